"""Constants and worked stars against adopted values.

IAU 2015 Resolutions B2 and B3, CODATA 2018, and numbers worked out from them beforehand.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from astropy import constants, units

from exptime.constants import (
    BLACKBODY_PHOTONS,
    KEV_ERG,
    PARSEC_KM,
    PLANCK_LIGHT_KEV_CM,
    SOLAR_MASS_KM,
    SPEED_OF_LIGHT_KM_S,
)
from exptime.star.emission import angular_factor
from exptime.star.records import Emission, Star
from tests.external.recording import Checks

pytestmark = pytest.mark.external

ASTROPY = "astropy.constants (CODATA 2018, IAU 2015)"
WORKED = "worked out with mpmath from IAU 2015 and CODATA 2018"
APERY = 1.2020569031595942


def test_constants_are_the_adopted_ones(checks: Checks) -> None:
    """Against astropy, to 1e-12 where both are exact or nominal."""
    light = (constants.h * constants.c).to_value(units.keV * units.cm)
    mass = (constants.GM_sun / constants.c**2).to_value(units.km)
    pairs = {
        "speed of light (km/s)": (SPEED_OF_LIGHT_KM_S, constants.c.to_value(units.km / units.s)),
        "GM/c² of the Sun (km)": (SOLAR_MASS_KM, mass),
        "parsec (km)": (PARSEC_KM, constants.pc.to_value(units.km)),
        "hc (keV cm)": (PLANCK_LIGHT_KEV_CM, light),
        "keV (erg)": (KEV_ERG, units.keV.to(units.erg)),
    }
    ours, theirs = np.array(list(pairs.values())).T
    checks.close(
        "constants", ours, theirs, relative=1e-12, at=list(pairs), source=ASTROPY,
        kind="published",
    )  # fmt: skip


def test_derived_constants_are_those_worked_out(checks: Checks) -> None:
    """To the eight digits noted: blackbody number and energy through one side of a surface."""
    number = 2.0 * math.pi * BLACKBODY_PHOTONS * APERY
    energy = BLACKBODY_PHOTONS * math.pi**5 / 15.0 * KEV_ERG
    pairs = {
        "GM/c² of the Sun (km)": (SOLAR_MASS_KM, 1.4766250),
        "sigma T⁴ at 1 keV (erg cm-2 s-1)": (energy, 1.0283008e24),
        "blackbody photons at 1 keV (cm-2 s-1)": (number, 2.3760555e32),
        "mean photon energy over kT": (energy / KEV_ERG / number, 2.7011780),
        "hc (keV Angstrom)": (PLANCK_LIGHT_KEV_CM * 1e8, 12.398420),
    }
    ours, theirs = np.array(list(pairs.values())).T
    checks.close(
        "derived constants", ours, theirs, relative=4e-8, at=list(pairs), source=WORKED,
        kind="computed independently",
    )  # fmt: skip


@pytest.mark.parametrize(
    ("mass", "radius", "u", "redshift"),
    [
        (1.4, 12.0, 0.344546, 1.235176),
        (2.0, 12.0, 0.492208, 1.403322),
        (1.4, 10.0, 0.413455, 1.305718),
    ],
)
def test_worked_stars(
    checks: Checks, mass: float, radius: float, u: float, redshift: float
) -> None:
    """U = 2GM/(Rc²) and 1+z to the six decimals noted."""
    star = Star(mass_msun=mass, radius_km=radius, spin_hz=1.0, cos_inclination=0.5)
    at = f"{mass:g} Msun, {radius:g} km"
    checks.close(
        "worked stars: u and 1+z", [2.0 * star.compactness, star.redshift_factor], [u, redshift],
        absolute=6e-7, at=[f"u, {at}", f"1+z, {at}"], source=WORKED, kind="computed independently",
    )  # fmt: skip


def test_eddington_limb_darkening(checks: Checks) -> None:
    """The grey atmosphere of Eddington is the law of coefficient 3/2: 0.4 at the limb.

    The exact grey atmosphere has 0.3439 at the limb; the law keeps within 0.06 of it everywhere.
    """
    law = Emission(model="limb-darkened", coefficient=1.5)
    mu = np.array([0.0, 0.05, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1.0])
    ours = angular_factor(law, mu) / angular_factor(law, np.ones(1))
    checks.close(
        "law of coefficient 3/2: limb over centre", ours[0], 0.4, relative=1e-14,
        source="Eddington approximation, (1 + 1.5 mu)/2.5", kind="published",
    )  # fmt: skip
    exact = [0.34390, 0.39087, 0.42897, 0.49878, 0.56487, 0.62909, 0.69220, 0.75457]
    exact += [0.81641, 0.87788, 0.93905, 1.0]
    checks.close(
        "law of coefficient 3/2 against the exact grey atmosphere, I(mu)/I(1)", ours, exact,
        absolute=0.06, at=[f"mu = {value:g}" for value in mu], kind="computed independently",
        source="Chandrasekhar 1960, Radiative Transfer, section 26: H-function by quadrature",
        note="a straight line is not the exact law: the tolerance is their known distance",
    )  # fmt: skip
