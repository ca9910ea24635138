"""Profiles agree with the bound where the likelihood is Gaussian, and leave it where it is not."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from exptime.constants import SOLAR_MASS_KM
from exptime.information.model import Bounds
from exptime.information.precision import Quantity
from exptime.study.profile import (
    Profile,
    Setting,
    constraint_at,
    is_inside,
    profile_of,
    side_of,
    value_of,
)
from tests.information.toys import TRUTH, Curved, Straight
from tests.study.settings import ANYWHERE, covariance_of, setting_of_toy

ROWS = {"mass": np.array([1.0, 0.0]), "radius": np.array([0.0, 1.0])}


def _profile(setting: Setting, quantity: Quantity) -> Profile:
    covariance, row = covariance_of(setting), ROWS[quantity]
    bound = math.sqrt(row @ covariance @ row)
    return profile_of(setting, quantity, bound, covariance @ row / bound)


@pytest.mark.parametrize("quantity", ["mass", "radius"])
def test_a_gaussian_likelihood_gives_the_bound_back(quantity: Quantity) -> None:
    """Rates linear in the parameters and many counts: ratio one, both sides alike."""
    profile = _profile(setting_of_toy(Straight()), quantity)
    # The third-order term of the Poisson likelihood is of the order of the relative error.
    assert profile.ratio == pytest.approx(1.0, abs=2e-3)
    for interval, sigmas in zip(profile.intervals, (1.0, math.sqrt(3.841)), strict=True):
        assert profile.truth - interval.lower == pytest.approx(sigmas * profile.bound, rel=0.02)
        assert interval.upper - profile.truth == pytest.approx(sigmas * profile.bound, rel=0.02)
    assert all(point.has_converged for point in profile.points)


def test_a_prior_counts_as_in_the_bound() -> None:
    """Half of the information from the prior: still ratio one, and narrower by root two."""
    free = _profile(setting_of_toy(Straight()), "radius")
    alone = 1.0 / math.sqrt(Straight().information(TRUTH)[1, 1])
    held = setting_of_toy(Straight(), (math.inf, alone), is_free=(False, True))
    profile = _profile(held, "radius")
    assert profile.bound == pytest.approx(alone / math.sqrt(2.0), rel=1e-9)
    assert profile.bound < free.bound
    assert profile.ratio == pytest.approx(1.0, abs=2e-3)


def test_a_curved_ridge_is_no_gaussian() -> None:
    """Mass is held by its prior alone and bends the radius upwards: the lower side is cut."""
    profile = _profile(setting_of_toy(Curved(), (0.2, math.inf)), "radius")
    interval = profile.intervals[0]
    below, above = profile.truth - interval.lower, interval.upper - profile.truth
    assert above > 2.0 * below
    assert profile.ratio > 1.3


def test_the_profile_follows_the_ridge() -> None:
    """At each mass the radius has gone to the parabola that fits best."""
    model = Curved(bend=5.0)
    profile = _profile(setting_of_toy(model, (0.2, math.inf)), "mass")
    for point in profile.points:
        mass, radius = point.vector
        assert mass == pytest.approx(point.value)
        # The best radius is on the ridge but for what the small second slope pulls.
        assert radius - 10.0 - 5.0 * (mass - 1.4) ** 2 == pytest.approx(0.0, abs=0.1)


def test_the_lower_side_stops_before_nothing() -> None:
    """A mass or radius of zero or less is never asked of the model."""
    setting = setting_of_toy(Straight(), (10.0, math.inf))
    points = side_of(setting, "mass", -5.0, np.array([-5.0, 0.0]))
    assert all(point.value > 0.0 for point in points)


@pytest.mark.parametrize(
    ("is_free", "held"),
    [((True, True), None), ((True, False), 1), ((False, True), 0)],
)
def test_a_compactness_is_held_whatever_is_fixed(
    is_free: tuple[bool, bool], held: int | None
) -> None:
    """Every vector of the constraint has it, and fixed parameters stay."""
    setting = setting_of_toy(Straight(), is_free=is_free)
    wanted = 1.1 * value_of(setting, "compactness", TRUTH)
    constraint = constraint_at(setting, "compactness", wanted)
    for step in (0.0, 1.0, 2.5):
        vector = constraint.origin + constraint.directions @ np.full(
            constraint.directions.shape[1], step
        )
        if held is None and step == 0.0:
            continue  # the line goes through zero mass and radius
        assert SOLAR_MASS_KM * vector[0] / vector[1] == pytest.approx(wanted, rel=1e-12)
        if held is not None:
            assert vector[held] == TRUTH[held]


def test_hard_limits_matter_only_where_they_bind() -> None:
    """A profile is inside wide limits and not inside narrow ones."""
    setting = setting_of_toy(Straight())
    sigma = math.sqrt(covariance_of(setting)[0, 0])
    points = side_of(setting, "mass", sigma, np.array([sigma, 0.0]))
    assert is_inside(setting, points, ANYWHERE)
    narrow = Bounds(lower=ANYWHERE.lower, upper=np.array([1.4 + 0.6 * sigma, np.inf]))
    assert not is_inside(setting, points, narrow)


def test_a_limit_on_another_parameter_narrows_the_profile() -> None:
    """The radius may not follow the mass: the interval of the mass is that of a held radius."""
    setting = setting_of_toy(Straight())
    wide = _profile(setting, "mass")
    tight = Bounds(lower=np.array([-np.inf, 10.0 - 1e-9]), upper=np.array([np.inf, 10.0 + 1e-9]))
    narrow = profile_of(
        replace(setting, bounds=tight), "mass", wide.bound, np.array([wide.bound, 0.0])
    )
    alone = 1.0 / math.sqrt(Straight().information(TRUTH)[0, 0])
    assert narrow.intervals[0].half_width == pytest.approx(alone, rel=5e-3)
    assert narrow.ratio < wide.ratio
