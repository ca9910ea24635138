"""What stands in for quantities that a target file does not give."""

from __future__ import annotations

from typing import Final

FLAT_MASS_MSUN: Final = (1.1, 2.6)
FLAT_RADIUS_KM: Final = (9.0, 16.0)
"""Flat priors."""

DRAWN_MASS_MSUN: Final = (1.2, 2.0)
DRAWN_RADIUS_KM: Final = (11.0, 13.0)
"""Stars drawn where hot-spot geometries are drawn too."""

FIXED_MASS_MSUN: Final = 1.4
FIXED_RADIUS_KM: Final = 12.0
"""The star where geometry is known or a fixed star was asked for."""

DISTANCE_UNCERTAINTY: Final = 0.20
FRACTION_UNCERTAINTY: Final = 0.10
"""Relative standard deviations where none was given."""
