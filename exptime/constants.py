"""Physical constants in the units used inside the program (km, s, keV, solar masses).

Values are those of CODATA 2018 and IAU 2015 Resolution B3, written out so that the kernels
need no units package; a test compares them with `astropy.constants`.
"""

from __future__ import annotations

import math
from typing import Final

SPEED_OF_LIGHT_KM_S: Final = 299792.458
"""Speed of light, km/s (exact)."""

SOLAR_MASS_KM: Final = 1.3271244e20 / 299792458.0**2 / 1e3
"""GM/c² of one solar mass, km (IAU 2015 nominal solar mass parameter)."""

PARSEC_KM: Final = 648000.0 / math.pi * 149597870.7
"""One parsec, km (IAU 2015 Resolution B2)."""

PLANCK_LIGHT_KEV_CM: Final = 12.398419843320026e-8
"""hc, keV cm."""

KEV_ERG: Final = 1.602176634e-9
"""One keV in erg."""

BLACKBODY_PHOTONS: Final = 2.0 * SPEED_OF_LIGHT_KM_S * 1e5 / PLANCK_LIGHT_KEV_CM**3
"""2/(h³c²): photons cm^-2 s^-1 keV^-3 sr^-1, the prefactor of the Planck law by number."""
