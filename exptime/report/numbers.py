"""Numbers of JSON documents: finite ones as they are, null for the others."""

from __future__ import annotations

import json
import math
from collections.abc import Sequence
from typing import Any

import numpy as np

from exptime.arrays import Floats


def to_json(document: dict[str, Any]) -> str:
    """Return a document as text.

    Raises
    ------
    ValueError
        When it holds NaN or infinity, which JSON does not know.
    """
    return json.dumps(document, ensure_ascii=False, allow_nan=False, indent=2) + "\n"


def numbers(values: Floats | Sequence[float] | float) -> Any:
    """Return an array of any shape as nested lists of numbers and nulls."""
    array = np.asarray(values, float)
    if array.ndim == 0:
        return number(float(array))
    return [numbers(row) for row in array] if array.ndim > 1 else [number(x) for x in array]


def number(value: float | Floats) -> float | None:
    """Return a number, or None where it is not finite."""
    plain = float(value)
    return plain if math.isfinite(plain) else None
