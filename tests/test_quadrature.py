"""Quadrature by pieces."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from exptime.quadrature import gauss_legendre, piecewise_nodes


@pytest.mark.parametrize("count", [1, 2, 5, 16])
def test_rule_is_exact_for_polynomials(count: int) -> None:
    """Up to degree 2n - 1."""
    nodes, weights = gauss_legendre(count)
    for degree in range(2 * count):
        exact = 0.0 if degree % 2 else 2.0 / (degree + 1)
        assert np.sum(weights * nodes**degree) == pytest.approx(exact, abs=1e-14)


@given(
    st.lists(st.floats(0.01, 50.0), min_size=2, max_size=8, unique=True),
    st.floats(0.3, 20.0),
    st.integers(1, 6),
)
def test_pieces_cover_the_interval_once(points: list[float], widest: float, order: int) -> None:
    """Weights are positive and sum to its length; nodes rise and lie inside."""
    nodes, weights = piecewise_nodes(np.array(points), widest, order)
    length = max(points) - min(points)
    assert weights.sum() == pytest.approx(length, rel=1e-12)
    assert (weights > 0.0).all()
    assert (np.diff(nodes) >= 0.0).all()
    assert nodes[0] >= min(points)
    assert nodes[-1] <= max(points)
    assert len(nodes) % order == 0


def test_no_piece_is_wider_than_asked() -> None:
    """Neither absolutely nor against its lower end."""
    nodes, weights = piecewise_nodes(np.array([0.1, 0.5, 10.0]), 0.3, 1, 0.2)
    low = nodes - 0.5 * weights
    assert weights.max() <= 0.3 * (1.0 + 1e-9)
    # A relative limit is that of the interval between two cuts.
    assert (weights <= 0.2 * np.where(low < 0.5 - 1e-9, 0.1, 0.5) * (1.0 + 1e-9)).all()


def test_step_at_a_cut_is_integrated_exactly() -> None:
    """And spoilt where it is not cut: the cut does the work."""

    def step(x):
        return np.where(x < 0.7312, 1.0, 3.0)

    exact = 0.7312 + 3.0 * (2.0 - 0.7312)
    nodes, weights = piecewise_nodes(np.array([0.0, 0.7312, 2.0]), 0.5, 3)
    assert np.sum(weights * step(nodes)) == pytest.approx(exact, rel=1e-14)
    nodes, weights = piecewise_nodes(np.array([0.0, 2.0]), 0.5, 3)
    assert abs(np.sum(weights * step(nodes)) - exact) > 1e-3
