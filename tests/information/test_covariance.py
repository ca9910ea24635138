"""Inversion of information matrices."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from exptime.arrays import Floats
from exptime.information.covariance import invert


def positive(seed: int, count: int = 5) -> Floats:
    rng = np.random.default_rng(seed)
    a = rng.normal(size=(count, count + 3))
    return np.asarray(a @ a.T)


@given(st.integers(0, 10_000))
def test_a_sound_matrix_is_inverted(seed: int) -> None:
    """Against LU, in any direction, to 1e-9 for matrices of this size."""
    matrix = positive(seed)
    directions = np.random.default_rng(seed + 1).normal(size=(3, 5))
    got = invert(matrix).covariance(directions)
    expected = directions @ np.linalg.inv(matrix) @ directions.T
    np.testing.assert_allclose(got, expected, rtol=0, atol=1e-9 * np.abs(expected).max())


@given(st.integers(0, 10_000), st.lists(st.floats(-12.0, 12.0), min_size=5, max_size=5))
def test_units_do_not_matter(seed: int, powers: list[float]) -> None:
    """Parameters in other units: the same condition number, covariances in those units."""
    matrix, units = positive(seed), 10.0 ** np.array(powers)
    plain, scaled = invert(matrix), invert(matrix * np.outer(units, units))
    assert scaled.condition == pytest.approx(plain.condition, rel=1e-8)
    sigma = np.sqrt(np.diagonal(plain.covariance(np.eye(5))))
    other = np.sqrt(np.diagonal(scaled.covariance(np.eye(5)))) * units
    np.testing.assert_allclose(other, sigma, rtol=1e-8)


def test_condition_number_of_a_correlation() -> None:
    """Two parameters with correlation r: (1 + r)/(1 - r), whatever their units."""
    matrix = np.array([[4.0, 0.9 * 2.0 * 3e5], [0.9 * 2.0 * 3e5, 9e10]])
    assert invert(matrix).condition == pytest.approx(1.9 / 0.1, rel=1e-12)


def test_a_parameter_without_information_is_unconstrained_and_the_rest_is_not() -> None:
    """A zero row: infinite for it, the plain inverse for the others."""
    matrix = np.zeros((4, 4))
    matrix[:3, :3] = positive(2, 3)
    inverse = invert(matrix)
    covariance = inverse.covariance(np.eye(4))
    assert inverse.condition == np.inf
    assert np.isinf(covariance[3]).all()
    np.testing.assert_allclose(covariance[:3, :3], np.linalg.inv(matrix[:3, :3]), rtol=1e-10)


@pytest.mark.parametrize("scale", [1e-8, 1.0, 1e10])
def test_a_degenerate_pair_is_infinite_though_its_sum_is_known(scale: float) -> None:
    """Information on a + b alone; rounding must not turn it into a large number."""
    rng = np.random.default_rng(4)
    base = positive(3, 3)
    spread = np.array([[1.0, 0, 0, 0], [0, 1.0, 0, 0], [0, 0, 1.0, scale]])
    matrix = spread.T @ base @ spread * (1.0 + 1e-16 * rng.normal())
    inverse = invert(matrix)
    directions = np.vstack([np.eye(4), spread[2]])
    covariance = inverse.covariance(directions)
    assert np.isinf(np.diagonal(covariance)[[2, 3]]).all()
    expected = np.linalg.inv(base)
    np.testing.assert_allclose(np.diagonal(covariance)[:2], np.diagonal(expected)[:2], rtol=1e-8)
    assert covariance[4, 4] == pytest.approx(expected[2, 2], rel=1e-8)


def test_no_information_at_all() -> None:
    """Everything infinite, nothing raised."""
    inverse = invert(np.zeros((3, 3)))
    assert inverse.condition == np.inf
    assert np.isinf(inverse.covariance(np.eye(3))).all()


def test_a_nearly_singular_matrix_is_inverted_not_refused() -> None:
    """Condition 1e10 in scaled form: finite, and right to what rounding leaves."""
    gap = 2e-10
    matrix = np.array([[1.0, 1.0 - gap], [1.0 - gap, 1.0]])
    inverse = invert(matrix)
    assert inverse.condition == pytest.approx(2.0 / gap, rel=1e-4)
    variance = inverse.covariance(np.eye(2))[0, 0]
    assert variance == pytest.approx(1.0 / (1.0 - (1.0 - gap) ** 2), rel=1e-4)
