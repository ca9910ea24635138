"""The verdict follows from profiles, other solutions and refits, by rules in a table."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from exptime.information.precision import Quantity
from exptime.study.profile import Interval, Profile
from exptime.study.verdict import overall, verdict_of
from exptime.study.verify_records import Hump, Scatter, Simulations, Verdict

TRUTH, BOUND = 12.0, 0.5


def profile(below: float = 1.0, above: float = 1.0, quantity: Quantity = "radius") -> Profile:
    """Return a profile whose sides are these multiples of the bound."""
    return Profile(
        quantity=quantity,
        truth=TRUTH,
        bound=BOUND,
        points=(),
        intervals=(
            Interval(lower=TRUTH - below * BOUND, upper=TRUTH + above * BOUND),
            Interval(lower=TRUTH - 1.96 * below * BOUND, upper=TRUTH + 1.96 * above * BOUND),
        ),
    )


def hump(radius_km: float) -> Hump:
    return Hump(
        rise=1.2, mass_msun=1.4, radius_km=radius_km, inclination=math.radians(40.0),
        colatitudes=(1.0,),
    )  # fmt: skip


def refits(
    ratio: float = 1.0, converged: int = 400, elsewhere: int = 0, coverage: float = 0.68
) -> Simulations:
    scatter = Scatter(
        quantity="radius", bound=BOUND, deviation=ratio * BOUND, bias=0.0, coverage=coverage,
        coverage_error=0.02,
    )  # fmt: skip
    return Simulations(
        asked=converged, converged=converged, elsewhere=elsewhere,
        elsewhere_radius_km=(11.0, 11.5, 12.0) if elsewhere else (), scatter=(scatter,),
    )  # fmt: skip


@pytest.mark.parametrize(
    ("word", "sides", "humps", "simulations", "says"),
    [
        ("holds", (1.0, 1.0), [], None, "1.00"),
        ("holds", (1.0, 1.0), [], refits(), "400 refits"),
        ("holds", (0.9, 1.2), [], None, "1.05"),
        ("holds", (1.14, 1.14), [], None, "1.14"),
        ("optimistic", (1.16, 1.16), [], None, "factor 1.16, by the profile"),
        ("optimistic", (1.0, math.inf), [], None, "without limit"),
        ("optimistic", (1.0, 1.0), [], refits(1.2), "factor 1.20, by 400 refits"),
        ("optimistic", (0.6, 1.4), [], None, "1.40 above"),
        ("optimistic", (1.35, 0.75), [], None, "1.35 below"),
        ("pessimistic", (0.84, 0.84), [], None, "0.84"),
        ("pessimistic", (0.65, 1.25), [], None, "below the truth"),
        ("pessimistic", (1.0, 1.0), [], refits(0.5), "0.50"),
        # Twenty refits know their scatter to 16 per cent: a factor 1.3 is no contradiction.
        ("holds", (1.0, 1.0), [], refits(1.3, converged=20), "20 refits"),
        ("optimistic", (1.0, 1.0), [], refits(1.6, converged=20), "20 refits"),
        ("optimistic", (1.0, 1.0), [], refits(coverage=0.60), "only 60 per cent"),
        ("holds", (1.0, 1.0), [], refits(coverage=0.64), "400 refits"),
        ("multimodal", (1.0, 1.0), [hump(13.0)], None, "13.00 km, inclination 40 deg"),
        ("holds", (1.0, 1.0), [hump(12.3)], None, "1.00"),
        ("multimodal", (1.0, 1.0), [], refits(elsewhere=40), "10 per cent of 400"),
        ("holds", (1.0, 1.0), [], refits(elsewhere=12), "400 refits"),
        ("holds", (1.0, 1.0), [], refits(converged=0), "1.00"),
    ],
)  # fmt: skip
def test_the_rules(
    word: Verdict, sides: tuple[float, float], humps: list[Hump],
    simulations: Simulations | None, says: str,
) -> None:  # fmt: skip
    """Word and reason for every kind of finding; the number that decides is named."""
    found, reason = verdict_of([profile(*sides)], humps, simulations, False)
    assert found == word, reason
    assert says in reason


def test_refits_that_did_not_converge_are_told() -> None:
    """More than one in twenty: the verdict stands on the others and says so."""
    some = replace(refits(), asked=440)
    assert "40 of 440 refits did not converge" in verdict_of([profile()], [], some, False)[1]
    few = replace(refits(), asked=404)
    assert "converge" not in verdict_of([profile()], [], few, False)[1]


def test_prior_limited_comes_before_everything() -> None:
    """A bound that is all prior may agree with every check and still measure nothing."""
    word, reason = verdict_of([profile()], [hump(13.0)], refits(), True)
    assert word == "prior-limited"
    assert "radius" in reason


def test_the_mass_is_judged_where_the_radius_is_held() -> None:
    """The first profile is the one judged; a hump of the same mass is then no contradiction."""
    word, _ = verdict_of([profile(quantity="mass")], [hump(13.0)], None, False)
    assert word == "multimodal"
    _, reason = verdict_of([profile(quantity="mass")], [], None, True)
    assert "The mass is prior-limited" in reason


def test_the_gravest_verdict_stands_for_all() -> None:
    """One geometry that fails is not outvoted."""
    assert overall(["holds", "holds"]) == "holds"
    assert overall(["holds", "pessimistic", "holds"]) == "pessimistic"
    assert overall(["optimistic", "pessimistic"]) == "optimistic"
    assert overall(["prior-limited", "multimodal", "optimistic"]) == "multimodal"


def test_a_profile_without_a_bound_has_no_ratio() -> None:
    """Nothing is divided by zero."""
    flat = Profile(
        quantity="radius", truth=12.0, bound=0.0, points=(),
        intervals=(Interval(lower=12.0, upper=12.0), Interval(lower=12.0, upper=12.0)),
    )  # fmt: skip
    assert np.isnan(flat.ratio)
