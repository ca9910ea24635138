"""Ranges in which the model is valid or an input believable, named once for all floors."""

from __future__ import annotations

import math
from typing import Final, Literal

from exptime.constants import SOLAR_MASS_KM, SPEED_OF_LIGHT_KM_S

RAY_TABLE_MAX_U: Final = 0.56
"""Largest 2GM/(Rc²) in the table of rays; above 0.568 some points have two images."""

RAY_TABLE_MAX_X: Final = 1.60
"""Largest (psi/psi_h)² in the table of rays, for the tilted surface of a fast oblate star."""

MAX_COMPACTNESS_U: Final = 0.55
"""Largest 2GM/(Rc²) at the pole of a star: leaves room for derivatives inside the ray table."""

MAX_ROTATION: Final = 0.3
"""Largest Omega² R³/(GM): the leading terms of the oblate figure (AlGendy & Morsink 2014, ApJ 791,
78) hold while its square is small. Break-up is near 0.4 to 0.5 for a star, 1 for a point mass."""

MIN_SPIN_HZ: Final = 0.01
MAX_SPIN_HZ: Final = 750.0
"""A little beyond the spins at which the pulse was checked (1 to 700 Hz)."""

MIN_MASS_MSUN: Final = 0.5
MAX_MASS_MSUN: Final = 3.0
"""Wider than any neutron star; what lies outside is a slip of the unit."""

MIN_RADIUS_KM: Final = 5.0
MAX_RADIUS_KM: Final = 25.0
"""Wider than any neutron star; what lies outside is a slip of the unit."""

MIN_TEMPERATURE_KEV: Final = 0.005
MAX_TEMPERATURE_KEV: Final = 10.0
"""kT of a surface that radiates X-rays; what lies outside is a slip of the unit."""

MIN_ENERGY_KEV: Final = 0.03
MAX_ENERGY_KEV: Final = 80.0
"""Photon energies of the absorption table."""

MAX_COLUMN_CM2: Final = 1e25
"""Beyond this nothing soft comes through and scattering, which is left out, decides."""

MIN_DISTANCE_PC: Final = 1.0
MAX_DISTANCE_PC: Final = 2e6
"""Up to the nearest galaxies; what lies outside is a slip of the unit."""

MIN_FLUX: Final = 1e-20
MAX_FLUX: Final = 1e-5
"""erg cm^-2 s^-1; what lies outside is a slip of the unit."""

MAX_HARMONIC: Final = 20
"""Highest harmonic of a measured profile that is compared; the model carries many more."""

MAX_SPOTS: Final = 8
"""Each spot adds four parameters; more than a few cannot be told apart."""

MIN_LIMB_COEFFICIENT: Final = -0.99
MAX_LIMB_COEFFICIENT: Final = 100.0
"""Limb-darkening coefficient h: 1 + h mu stays positive; large h means intensity ~ mu."""


def rotation(mass_msun: float, radius_km: float, spin_hz: float) -> float:
    """Return Omega² R³/(GM) at the equator: one where a point mass would shed the surface."""
    angular = 2.0 * math.pi * spin_hz / SPEED_OF_LIGHT_KM_S
    return angular**2 * radius_km**3 / (SOLAR_MASS_KM * mass_msun)


def pole_radius_km(mass_msun: float, radius_km: float, spin_hz: float) -> float:
    """Return the radius at the pole of the oblate figure, km.

    References
    ----------
    AlGendy & Morsink 2014, ApJ 791, 78, leading terms.
    """
    compactness = SOLAR_MASS_KM * mass_msun / radius_km
    flattening = rotation(mass_msun, radius_km, spin_hz) * (0.788 - 1.030 * compactness)
    return radius_km * (1.0 - max(flattening, 0.0))


def star_faults(
    mass_msun: float,
    radius_km: float,
    spin_hz: float,
    figure: Literal["oblate", "sphere"] = "oblate",
) -> tuple[str, ...]:
    """Return why a star lies outside the validity of the model; empty if it does not.

    Parameters
    ----------
    mass_msun : float
        Gravitational mass, solar masses.
    radius_km : float
        Equatorial circumferential radius, km.
    spin_hz : float
        Spin frequency, Hz.
    figure : {"oblate", "sphere"}
        Shape of the surface.

    Returns
    -------
    tuple of str
        Sentences with the numbers and their bounds. The rays around the limb of a fast star are
        looked at by `exptime.star.view.star_fault` besides.
    """
    reasons = []
    for name, value, lower, upper, unit in (
        ("mass", mass_msun, MIN_MASS_MSUN, MAX_MASS_MSUN, "Msun"),
        ("radius", radius_km, MIN_RADIUS_KM, MAX_RADIUS_KM, "km"),
        ("spin frequency", spin_hz, MIN_SPIN_HZ, MAX_SPIN_HZ, "Hz"),
    ):
        if not lower <= value <= upper:
            reasons.append(
                f"the {name} of {value:g} {unit} lies outside {lower:g} to {upper:g} {unit}"
            )
    if reasons:
        return tuple(reasons)
    is_oblate = figure == "oblate"
    star = f"a star of {mass_msun:.4g} Msun and {radius_km:.4g} km"
    spun = rotation(mass_msun, radius_km, spin_hz)
    if spun > (MAX_ROTATION if is_oblate else 1.0):
        bound = MAX_ROTATION if is_oblate else 1.0
        return (
            f"{star} at {spin_hz:g} Hz is too close to break-up: Omega² R³/(GM) = {spun:.3f}, "
            f"the model of its figure holds up to {bound:g} "
            f"({spin_hz * math.sqrt(bound / spun):.0f} Hz)",
        )
    innermost = pole_radius_km(mass_msun, radius_km, spin_hz) if is_oblate else radius_km
    compactness = SOLAR_MASS_KM * mass_msun / innermost
    if 2.0 * compactness > MAX_COMPACTNESS_U:
        where = " at its pole" if is_oblate else ""
        reasons.append(
            f"{star} is too compact: GM/(Rc²) = {compactness:.3f}{where}, light rays are "
            f"tabulated up to {MAX_COMPACTNESS_U / 2.0:g}"
        )
    return tuple(reasons)
