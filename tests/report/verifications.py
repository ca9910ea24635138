"""Verifications built by hand, one for every state that a report has to word."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np

from exptime.information.precision import Quantity
from exptime.study.profile import Interval, Profile, ProfilePoint
from exptime.study.verify_records import (
    CheckedGeometry,
    Hump,
    Scatter,
    Simulations,
    Verification,
)
from tests.report.results import EVIL, MASS_MSUN, RADIUS_KM, geometry

VALUES: dict[Quantity, tuple[float, float]] = {
    "radius": (RADIUS_KM, 0.5),
    "mass": (MASS_MSUN, 0.05),
    "compactness": (0.1846, 0.004),
}


def profile(quantity: Quantity, below: float = 1.0, above: float = 1.0) -> Profile:
    """Return a profile of two half parabolas; an infinite side never rises to one."""
    truth, bound = VALUES[quantity]
    points = []
    for step in np.arange(-6, 7) / 2.0:
        side = below if step < 0.0 else above
        rise = 0.9 * (1.0 - math.exp(-abs(step))) if math.isinf(side) else (step / side) ** 2
        points.append(
            ProfilePoint(
                value=truth + step * bound,
                rise=rise,
                has_converged=True,
                vector=np.zeros(2),
                levels=np.zeros(0),
            )
        )
    return Profile(
        quantity=quantity,
        truth=truth,
        bound=bound,
        points=tuple(points),
        intervals=(
            Interval(lower=truth - below * bound, upper=truth + above * bound),
            Interval(lower=truth - 1.96 * below * bound, upper=truth + 1.96 * above * bound),
        ),
    )


def simulations(elsewhere: int = 0) -> Simulations:
    return Simulations(
        asked=400,
        converged=399,
        elsewhere=elsewhere,
        elsewhere_radius_km=(11.2, 11.5, 11.9) if elsewhere else (),
        scatter=tuple(
            Scatter(
                quantity=quantity,
                bound=bound,
                deviation=1.05 * bound,
                bias=-0.2 * bound,
                coverage=0.6942,
                coverage_error=0.0233,
            )
            for quantity, (_, bound) in VALUES.items()
        ),
    )


def checked(label: str = "the geometry given") -> CheckedGeometry:
    """Return a geometry at which the bound holds."""
    place = geometry(0.5, 1.0)
    profiles = tuple(profile(quantity) for quantity in VALUES)
    return CheckedGeometry(
        label=label,
        star=place.star,
        spots=place.spots,
        profiles=profiles,
        bounded_profiles=profiles,
        humps=(),
        simulations=None,
        is_prior_limited=False,
        verdict="holds",
        reason="The bound holds: 1.00 of it by the profile likelihood.",
    )


def holds() -> Verification:
    return Verification(
        target="Candidate A",
        file="candidate.yaml",
        instrument="Invented array",
        exposure_s=1e6,
        seed=1,
        geometries=(checked(),),
        versions={"exptime": "0.1.0", "python": "3.11.7"},
        notes=("The radius was not given: a flat prior from 9 to 16 km.",),
    )


def refitted() -> Verification:
    return replace(holds(), geometries=(replace(checked(), simulations=simulations(12)),))


def three() -> Verification:
    """Return the median and the tails, each with another verdict."""
    hump = Hump(
        rise=1.2, mass_msun=1.3, radius_km=13.2, inclination=math.radians(40.0), colatitudes=(1.0,)
    )
    return replace(
        holds(),
        geometries=(
            checked("the median geometry"),
            replace(
                checked("the 16 per cent geometry"),
                humps=(hump,),
                verdict="multimodal",
                reason="Another solution fits the expected data as well.",
            ),
            replace(
                checked("the 84 per cent geometry"),
                profiles=(
                    profile("radius", 0.4, math.inf), profile("mass"), profile("compactness"),
                ),
                verdict="optimistic",
                reason="The bound is optimistic without limit, by the profile likelihood.",
            ),
        ),
    )  # fmt: skip


def evil() -> Verification:
    return replace(refitted(), target=EVIL, file=EVIL, instrument=EVIL, notes=(EVIL,))


STATES = {"holds": holds, "refitted": refitted, "three": three, "evil-names": evil}
