"""Chebyshev series of the spectrum in the redshift factor."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from exptime.star.spectrum import (
    coefficients,
    planck_coefficients,
    redshift_points,
    terms_needed,
)


@settings(max_examples=60)
@given(st.floats(0.05, 0.4), st.floats(0.1, 3.0), st.floats(0.01, 0.25))
def test_terms_chosen_reach_the_spectrum(kev: float, energy: float, half: float) -> None:
    """Between the points the series is within 2e-9 of the largest value."""
    interval = 1.25 - half, 1.25 + half
    energies = np.array([energy])
    terms = terms_needed(energies, kev, interval)
    series = planck_coefficients(energies, kev, interval, terms)[:, 0]
    e = np.linspace(*interval, 101)
    t = (e - 1.25) / half
    exact = 1.0 / np.expm1(energy * e / kev)
    got = np.polynomial.chebyshev.chebval(t, series)
    assert np.abs(got - exact).max() < 2e-9 * exact.max()


def test_a_wider_interval_needs_more_terms() -> None:
    """Slow stars need few terms, fast ones more."""
    energies = np.array([0.3, 3.0])
    counts = [terms_needed(energies, 0.1, (1.25 - h, 1.25 + h)) for h in (1e-4, 0.02, 0.2)]
    assert counts == sorted(set(counts))
    assert counts[0] <= 4
    assert counts[-1] <= 32


@pytest.mark.parametrize("terms", [1, 2, 7])
def test_polynomials_are_reproduced_exactly(terms: int) -> None:
    """A Chebyshev polynomial of the variable gives a unit coefficient."""
    interval = (1.0, 1.6)
    points = redshift_points(interval, terms)
    t = (points - 1.3) / 0.3
    values = np.cos((terms - 1) * np.arccos(t))[:, None]
    expected = np.zeros((terms, 1))
    expected[-1] = 1.0
    np.testing.assert_allclose(coefficients(values), expected, atol=1e-14)
