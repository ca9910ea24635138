"""A spectrum folded into channels, with its derivatives."""

from __future__ import annotations

import math

import numpy as np

from exptime.observation.fold import fold_rate, fold_spectrum
from tests.makers.scenes import toy_edges, toy_response

RESPONSE = toy_response(toy_edges(0.3))
RANGE, TERMS = (1.1, 1.5), 12


def test_rate_alone_is_the_rate_with_derivatives() -> None:
    """Two routes, one number."""
    full = fold_spectrum(RESPONSE, 3e20, 0.1, RANGE, TERMS)
    np.testing.assert_allclose(
        full.rate, fold_rate(RESPONSE, 3e20, 0.1, RANGE, TERMS), rtol=1e-12, atol=1e-13
    )


def test_derivatives_are_those_of_differences() -> None:
    """Fourth-order differences in ln kT and in the column, to 1e-9 of the largest."""
    full = fold_spectrum(RESPONSE, 3e20, 0.1, RANGE, TERMS)

    def slope(step: float, in_temperature: bool) -> np.ndarray:
        def at(k: int) -> np.ndarray:
            kev = 0.1 * math.exp(k * step) if in_temperature else 0.1
            column = 3e20 if in_temperature else 3e20 + k * step
            return fold_rate(RESPONSE, column, kev, RANGE, TERMS)

        return np.asarray((8 * (at(1) - at(-1)) - (at(2) - at(-2))) / (12 * step))

    for got, expected in (
        (full.by_log_temperature, slope(1e-3, True)),
        (full.by_column, slope(3e17, False)),
    ):
        np.testing.assert_allclose(got, expected, atol=1e-9 * np.abs(expected).max())


def test_a_thick_column_absorbs_the_soft_channels_first() -> None:
    """The lowest channel loses most."""
    share = fold_rate(RESPONSE, 1e21, 0.1, RANGE, 1) / fold_rate(RESPONSE, 0.0, 0.1, RANGE, 1)
    assert np.all(np.diff(share[0]) > 0.0)
    assert np.all((share > 0.0) & (share < 1.0))
