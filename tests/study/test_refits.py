"""Refits of simulated observations scatter as the bound says, and find what it does not see."""

from __future__ import annotations

import math
from dataclasses import replace
from unittest import mock

import numpy as np
import pytest

from exptime.arrays import Floats
from exptime.study import refits
from exptime.study.refits import NORMAL_SHARE, refit_one, summarise
from exptime.study.verify_records import Scatter, Simulations
from tests.information.toys import TRUTH, Straight
from tests.study.settings import covariance_of, observer_of, setting_of_toy

COUNT = 500
PRIOR = 1.0 / math.sqrt(Straight().information(TRUTH)[1, 1])
"""Of the radius: as much as the data say of it when the mass is held."""


def _simulations(prior_sigma: tuple[float, float], is_free: tuple[bool, bool]) -> Simulations:
    setting = setting_of_toy(Straight(), prior_sigma, is_free)
    observer = observer_of(setting, COUNT)
    found = [refit_one(observer, number) for number in range(COUNT)]
    sigma = np.sqrt(np.diagonal(covariance_of(setting)))
    return summarise(observer, found, np.array([sigma[0], sigma[1], 1.0]))


def _of_radius(simulations: Simulations) -> Scatter:
    return next(item for item in simulations.scatter if item.quantity == "radius")


def test_the_scatter_of_refits_is_the_bound() -> None:
    """Rates linear in the parameters: ratio, bias and coverage to their own errors."""
    simulations = _simulations((math.inf, math.inf), (True, True))
    assert simulations.converged == COUNT
    assert simulations.elsewhere == 0
    for scatter in simulations.scatter[:2]:
        # Three standard errors of a standard deviation, a mean and a share.
        assert scatter.ratio == pytest.approx(1.0, abs=3.0 / math.sqrt(2.0 * COUNT))
        assert abs(scatter.bias) < 3.0 * scatter.bound / math.sqrt(COUNT)
        assert abs(scatter.coverage - NORMAL_SHARE) < 3.0 * scatter.coverage_error


def test_coverage_is_right_with_the_centres_of_priors_drawn() -> None:
    """Prior and data weigh the same, and the quoted interval still holds 68 per cent."""
    scatter = _of_radius(_simulations((math.inf, PRIOR), (False, True)))
    assert abs(scatter.coverage - NORMAL_SHARE) < 3.0 * scatter.coverage_error
    assert scatter.ratio == pytest.approx(1.0, abs=3.0 / math.sqrt(2.0 * COUNT))


def test_coverage_is_faked_by_fixed_centres() -> None:
    """Negative control: centres at the truth make it erf(1) = 84.3 per cent."""

    def fixed(center: Floats, *_: object) -> Floats:
        return center

    with mock.patch.object(refits, "_drawn", fixed):
        scatter = _of_radius(_simulations((math.inf, PRIOR), (False, True)))
    error = math.sqrt(math.erf(1.0) * (1.0 - math.erf(1.0)) / COUNT)
    assert abs(scatter.coverage - math.erf(1.0)) < 3.0 * error
    assert scatter.coverage - NORMAL_SHARE > 5.0 * scatter.coverage_error
    assert scatter.ratio == pytest.approx(math.sqrt(0.5), abs=3.0 / math.sqrt(2.0 * COUNT))


def test_a_refit_is_its_seed() -> None:
    """Twice the same number gives the same vector, another number another."""
    observer = observer_of(setting_of_toy(Straight()), 2)
    first, again, other = (refit_one(observer, number)[1] for number in (0, 0, 1))
    assert np.array_equal(first, again)
    assert not np.array_equal(first, other)


def test_refits_that_did_not_converge_are_left_out_and_counted() -> None:
    """They would spoil scatter and coverage."""
    observer = observer_of(setting_of_toy(Straight()), 3)
    found = [(True, TRUTH), (False, TRUTH + 5.0), (True, TRUTH + np.array([0.0, 0.2]))]
    simulations = summarise(observer, found, np.array([1.0, 0.1, 1.0]))
    assert (simulations.asked, simulations.converged) == (3, 2)
    scatter = _of_radius(simulations)
    assert scatter.bias == pytest.approx(0.1)
    assert scatter.deviation == pytest.approx(math.sqrt(0.02))
    assert scatter.coverage == 0.5


def test_a_refit_in_another_mode_is_told_with_its_place() -> None:
    """An angle moved by more than five of its sigmas; the radius stands beside."""
    observer = observer_of(setting_of_toy(Straight()), 2)
    angles = replace(observer.setting.model, names=("cos_inclination", "radius", "mass"))
    truth = np.array([0.5, 10.0, 1.4])
    setting = replace(observer.setting, model=angles, truth=truth)
    tilted = replace(observer, setting=setting, covariance=np.diag([0.01**2, 0.1**2, 0.1**2]))
    found = [
        (True, truth),
        (True, np.array([0.54, 10.1, 1.4])),
        (True, np.array([0.56, 11.0, 1.4])),
    ]
    simulations = summarise(tilted, found, np.full(3, 0.1))
    assert simulations.elsewhere == 1
    assert simulations.elsewhere_radius_km == (11.0, 11.0, 11.0)


def test_nothing_converged_is_no_division_by_nothing() -> None:
    """There is then nothing to summarise."""
    observer = observer_of(setting_of_toy(Straight()), 1)
    simulations = summarise(observer, [(False, TRUTH)], np.ones(3))
    assert (simulations.converged, simulations.scatter) == (0, ())
