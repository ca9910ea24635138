"""Pulses of slow antipodal spots against their four classes in closed form.

Beloborodov 2002, ApJ 566, L85: for two equal antipodal points and 1 - cos(alpha) = (1-u)(1 - cos
psi) the pulse is a sinusoid, one with a plateau, two humps or constant. Numbers worked out
beforehand from the formulas, u = 1/3.
"""

from __future__ import annotations

import math

import numpy as np
import pytest

from exptime.arrays import Floats
from exptime.constants import SOLAR_MASS_KM
from exptime.geometry.surrogate import rough_pulses
from exptime.star.convergence import photon_flux
from exptime.star.pulse import photon_harmonics
from exptime.star.records import Emission, HotSpot, Star
from exptime.star.resolution import Resolution
from exptime.star.view import view_of
from exptime.target.defaults import DRAWN_MASS_MSUN, DRAWN_RADIUS_KM
from tests.external.recording import Checks
from tests.geometry.targets import search_of

pytestmark = pytest.mark.external

THIRD = 1.0 / 3.0
MASS = 12.0 * THIRD / (2.0 * SOLAR_MASS_KM)
SOURCE = "Beloborodov 2002, ApJ 566, L85, four classes; worked out from the formulas"
WORKED = (
    # class, i, theta (degrees), peak-to-trough fraction, mean
    ("I", 20.0, 30.0, 0.13016, 0.87587),
    ("II", 60.0, 30.0, 0.15470, 0.73733),
    ("II, boundary", 60.0, 60.0, 0.20000, 0.75141),
    ("II", 45.0, 60.0, 0.18895, 0.75153),
    ("III", 85.0, 80.0, 0.19878, 0.80512),
    ("IV", 80.0, 15.0, 0.0, 2.0 / 3.0),
    ("IV", 90.0, 15.0, 0.0, 2.0 / 3.0),
)
HIGHEST = {(20.0, 30.0): 0.98987, (60.0, 30.0): 0.91068}
IDS = [f"{kind} {inclination:g}-{theta:g}" for kind, inclination, theta, *_ in WORKED]


def fraction(curve: Floats) -> float:
    return float((curve.max() - curve.min()) / (curve.max() + curve.min()))


def rough(inclination: float, theta: float) -> Floats:
    """Return the pulse in closed form by which the search for geometries places its first draws."""
    search = search_of()
    at = {
        "cos_colatitude_1": 0.5 + 0.5 * math.cos(math.radians(theta)),
        "cos_colatitude_2": 0.5 - 0.5 * math.cos(math.radians(theta)),
        "longitude": 0.5,
        "ratio": 0.5,
        "cos_inclination": math.cos(math.radians(inclination)),
        "mass": (MASS - DRAWN_MASS_MSUN[0]) / (DRAWN_MASS_MSUN[1] - DRAWN_MASS_MSUN[0]),
        "radius": (12.0 - DRAWN_RADIUS_KM[0]) / (DRAWN_RADIUS_KM[1] - DRAWN_RADIUS_KM[0]),
    }
    return rough_pulses(search, np.array([[at[axis] for axis in search.axes]]))[0]


@pytest.mark.parametrize(("kind", "inclination", "theta", "wanted", "mean"), WORKED, ids=IDS)
def test_rough_pulse_has_its_class(
    checks: Checks, kind: str, inclination: float, theta: float, wanted: float, mean: float
) -> None:
    """Five decimals of the fraction; the mean of 64 samples misses the kinks by some 1e-4."""
    curve = rough(inclination, theta)
    at = f"class {kind}, i = {inclination:g}°, theta = {theta:g}°"
    checks.close(
        "cosine relation, antipodal spots: peak-to-trough fraction", fraction(curve), wanted,
        absolute=6e-6, at=at, source=SOURCE, kind="computed independently",
    )  # fmt: skip
    highest = HIGHEST.get((inclination, theta))
    if highest is not None:
        checks.close(
            "cosine relation, antipodal spots: maximum over mean", curve.max(), highest / mean,
            relative=3e-4, at=at, source=SOURCE, kind="computed independently",
        )  # fmt: skip


@pytest.mark.parametrize(("kind", "inclination", "theta", "wanted", "mean"), WORKED, ids=IDS)
def test_exact_pulse_is_near_its_class(
    checks: Checks, kind: str, inclination: float, theta: float, wanted: float, mean: float
) -> None:
    """The whole pulse model: 0.02 in the fraction, what the cosine relation leaves at u = 1/3.

    It takes the lensing for constant, wrong by 5 per cent at the limb.
    """
    star = Star(
        mass_msun=MASS,
        radius_km=12.0,
        spin_hz=1e-6,
        cos_inclination=math.cos(math.radians(inclination)),
        figure="sphere",
    )
    spots = [
        HotSpot(colatitude=angle, longitude=turn, angular_radius=1e-3, temperature_kev=0.1)
        for angle, turn in (
            (math.radians(theta), 0.0),
            (math.pi - math.radians(theta), math.pi),
        )
    ]
    curve = photon_flux(star, spots, Emission(), 100.0, np.array([0.5]), 48)[:, 0]
    checks.close(
        "exact bending, antipodal spots: peak-to-trough fraction", fraction(curve), wanted,
        absolute=0.02, at=f"class {kind}, i = {inclination:g}°, theta = {theta:g}°",
        source=SOURCE, kind="computed independently",
        note="the class is an approximation: the tolerance is its error",
    )  # fmt: skip


@pytest.mark.parametrize("h", [0.5, 1.5])
def test_harmonics_of_a_darkened_point(checks: Checks, h: float) -> None:
    """Q + h(Q² + U²/2), U + 2hQU and hU²/2 for a point that never sets; 2 per cent of the mean."""
    inclination, theta, u = math.radians(25.0), math.radians(30.0), 0.2
    star = Star(
        mass_msun=u * 12.0 / (2.0 * SOLAR_MASS_KM),
        radius_km=12.0,
        spin_hz=1e-6,
        cos_inclination=math.cos(inclination),
        figure="sphere",
    )
    spot = HotSpot(colatitude=theta, longitude=0.0, angular_radius=1e-3, temperature_kev=0.1)
    emission = Emission(model="limb-darkened", coefficient=h)
    resolution = Resolution(harmonics=16, rings=8, redshift_terms=8)
    found = photon_harmonics(view_of(star), [spot], emission, 100.0, np.array([0.5]), [resolution])[
        :3, 0
    ]
    swing = (1.0 - u) * math.sin(inclination) * math.sin(theta)
    level = u + (1.0 - u) * math.cos(inclination) * math.cos(theta)
    mean = level + h * (level**2 + 0.5 * swing**2)
    checks.close(
        "limb-darkened point: first and second harmonic over the mean",
        2.0 * np.abs(found[1:]) / found[0].real,
        [(swing + 2.0 * h * level * swing) / mean, 0.5 * h * swing**2 / mean],
        absolute=0.004, at=[f"first, h = {h:g}", f"second, h = {h:g}"],
        source="algebra on the cosine relation; cf. Viironen & Poutanen 2004, A&A 426, 985",
        kind="computed independently", note="the closed form is an approximation",
    )  # fmt: skip
