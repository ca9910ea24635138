"""Losses of timing in closed form."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from exptime.observation.response import timing_factor
from tests.makers.scenes import toy_edges, toy_response

RESPONSE = toy_response(toy_edges(0.9), 1)


def test_perfect_timing_loses_nothing() -> None:
    """All factors are one."""
    np.testing.assert_array_equal(timing_factor(RESPONSE, 500.0, 9), np.ones(10))


@pytest.mark.parametrize("width", [1e-4, 7e-4, 2e-3])
def test_time_bin_averages_the_wave(width: float) -> None:
    """The mean of cos(2 pi m f t) over one bin of full width w, by quadrature."""
    x, weight = np.polynomial.legendre.leggauss(60)
    factor = timing_factor(replace(RESPONSE, time_bin_s=width), 300.0, 8)
    for m in range(9):
        mean = 0.5 * np.sum(weight * np.cos(2 * math.pi * m * 300.0 * 0.5 * width * x))
        assert factor[m] == pytest.approx(mean, abs=1e-13)


@pytest.mark.parametrize("sigma", [1e-5, 2e-4])
def test_clock_error_averages_the_wave(sigma: float) -> None:
    """The mean of cos(2 pi m f t) over a Gaussian of standard deviation sigma, by quadrature."""
    x, weight = np.polynomial.hermite_e.hermegauss(80)
    factor = timing_factor(replace(RESPONSE, clock_error_s=sigma), 300.0, 8)
    for m in range(9):
        wave = np.cos(2 * math.pi * m * 300.0 * sigma * x)
        mean = np.sum(weight * wave) / math.sqrt(2 * math.pi)
        assert factor[m] == pytest.approx(mean, abs=1e-12)


def test_a_bin_of_one_turn_leaves_the_mean_alone() -> None:
    """Every harmonic averages to zero over a whole turn."""
    factor = timing_factor(replace(RESPONSE, time_bin_s=1.0 / 300.0), 300.0, 5)
    np.testing.assert_allclose(factor, [1, 0, 0, 0, 0, 0], atol=1e-15)


def test_both_losses_multiply() -> None:
    """A bin and a clock error act one after the other."""
    both = replace(RESPONSE, time_bin_s=5e-4, clock_error_s=1e-4)
    one, other = replace(both, clock_error_s=0.0), replace(both, time_bin_s=0.0)
    np.testing.assert_allclose(
        timing_factor(both, 200.0, 6),
        timing_factor(one, 200.0, 6) * timing_factor(other, 200.0, 6),
        rtol=1e-14,
    )
