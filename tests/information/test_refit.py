"""Fits find the minimum of the penalised deviance, along curved ridges and inside limits."""

from __future__ import annotations

from unittest import mock

import numpy as np
import pytest
from scipy.optimize import minimize
from scipy.special import xlogy

from exptime.arrays import Floats
from exptime.information import refit
from exptime.information.matrix import BackgroundLevels
from exptime.information.model import Bounds, Constraint, Penalty
from exptime.information.refit import fit
from tests.information.toys import CHANNELS, SHAPES, TRUTH, Curved, Straight, expected_counts


def penalty(information: tuple[float, float] = (0.0, 0.0), levels: int = 0) -> Penalty:
    return Penalty(center=TRUTH, information=np.array(information), level_center=np.zeros(levels))


def noisy(model: Straight, seed: int = 3) -> Floats:
    return np.random.default_rng(seed).poisson(expected_counts(model)).astype(float)


def deviance_twin(
    model: Straight, counts: Floats, prior: Penalty, vector: Floats, levels: Floats
) -> float:
    """Return the penalised deviance, written again cell by cell."""
    total = 0.0
    rates = np.tensordot(model.amplitudes(vector), SHAPES, axes=1)
    for phase in range(len(counts)):
        for channel in range(CHANNELS):
            background = model.background_per_s[channel]
            for level, shape in zip(levels, model.levels.shape_per_s, strict=True):
                background += level * shape[channel]
            mean = model.exposure_s / model.phase_bins * (rates[phase, channel] + background)
            n = counts[phase, channel]
            total += 2.0 * (mean - n + xlogy(n, n / mean))
    total += float(np.sum(prior.information * (vector - prior.center) ** 2))
    return total + float(
        np.sum(model.levels.prior_information * (levels - prior.level_center) ** 2)
    )


LEVELS = BackgroundLevels(
    shape_per_s=np.array([[0.5, 0.0, 0.0], [0.0, 0.5, 0.5]]), prior_information=np.full(2, 100.0)
)


@pytest.mark.parametrize("model", [Straight(), Straight(levels=LEVELS), Curved(bend=3.0)])
def test_the_minimum_is_that_of_a_general_optimiser(model: Straight) -> None:
    """Twin: Nelder-Mead on a deviance written cell by cell, levels among the parameters."""
    counts = noisy(model)
    levels = len(model.levels.prior_information)
    prior = penalty((4.0, 0.04), levels)
    found = fit(model, counts, prior, TRUTH + np.array([0.05, 0.5]))  # type: ignore[arg-type]

    def twin(both: Floats) -> float:
        return deviance_twin(model, counts, prior, both[:2], both[2:])

    start = np.concatenate([TRUTH, np.zeros(levels)])
    best = minimize(
        twin, start, method="Nelder-Mead",
        options={"xatol": 1e-8, "fatol": 1e-9, "maxiter": 20000, "maxfev": 20000},
    )  # fmt: skip
    assert found.has_converged
    # Both stop within 1e-4 of the minimum of a deviance of order 20.
    assert found.deviance == pytest.approx(best.fun, abs=3e-4)
    assert twin(np.concatenate([found.vector, found.levels])) == pytest.approx(
        found.deviance, rel=1e-9
    )


def test_data_without_noise_give_the_truth_back() -> None:
    """The deviance falls to zero there, whatever the start."""
    found = fit(Curved(), expected_counts(Curved()), penalty(), np.array([1.5, 11.5]))  # type: ignore[arg-type]
    assert found.deviance == pytest.approx(0.0, abs=1e-4)


def test_a_fit_arrives_along_a_curved_ridge_by_bent_steps() -> None:
    """Negative control: with the bend taken out the same fit runs out of steps on the way."""
    model, start = Curved(), np.array([1.9, 10.0 + 30.0 * 0.25])
    arguments = (model, expected_counts(model), penalty((1.0, 0.0)), start)
    found = fit(*arguments)  # type: ignore[arg-type]
    assert found.has_converged
    np.testing.assert_allclose(found.vector, TRUTH, rtol=0.02)
    with mock.patch.object(refit, "_bend", return_value=None):
        assert not fit(*arguments).has_converged  # type: ignore[arg-type]


def test_a_constraint_holds_exactly() -> None:
    """The radius stays where it is put; the mass takes up what it can."""
    model = Straight()
    there = Constraint(origin=np.array([0.0, 10.3]), directions=np.array([[1.0], [0.0]]))
    found = fit(model, expected_counts(model), penalty(), TRUTH, there)  # type: ignore[arg-type]
    assert found.vector[1] == 10.3
    assert found.has_converged
    # For rates linear in the parameters the rise is that of the information matrix, but for the
    # third-order term of the Poisson likelihood.
    variance = np.linalg.inv(model.information(TRUTH))[1, 1]
    assert found.deviance == pytest.approx(0.3**2 / variance, rel=0.02)


def test_limits_are_never_passed() -> None:
    """The best mass below the limit is at it."""
    model = Straight()
    limits = Bounds(lower=np.array([1.45, -np.inf]), upper=np.array([np.inf, np.inf]))
    found = fit(model, expected_counts(model), penalty(), np.array([1.6, 9.0]), None, limits)  # type: ignore[arg-type]
    assert found.vector[0] == 1.45
    assert found.has_converged


def test_within_limits_the_background_stays_above_zero() -> None:
    """Data short of their background would pull a free level below nothing."""
    model = Straight(
        levels=BackgroundLevels(
            shape_per_s=np.full((1, CHANNELS), 0.5), prior_information=np.zeros(1)
        )
    )
    counts = expected_counts(model) - 0.55 * model.exposure_s / model.phase_bins
    anywhere = Bounds(lower=np.full(2, -np.inf), upper=np.full(2, np.inf))
    arguments = (model, counts, penalty(levels=1), TRUTH)
    assert fit(*arguments, bounds=anywhere).levels[0] >= -1.0  # type: ignore[arg-type]
    # Negative control: without limits it does go there.
    assert fit(*arguments).levels[0] < -1.0  # type: ignore[arg-type]


def test_a_start_outside_the_model_is_told() -> None:
    """No number is made up for it."""
    found = fit(Straight(), expected_counts(Straight()), penalty(), np.array([-5.0, 1.0]))  # type: ignore[arg-type]
    assert not found.has_converged
    assert np.isinf(found.deviance)
