"""The array types used in signatures, named once."""

from __future__ import annotations

from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

Floats: TypeAlias = NDArray[np.float64]
Complexes: TypeAlias = NDArray[np.complex128]
Booleans: TypeAlias = NDArray[np.bool_]
Integers: TypeAlias = NDArray[np.int64]
