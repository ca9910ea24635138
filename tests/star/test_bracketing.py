"""Vector root finding."""

from __future__ import annotations

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from exptime.arrays import Floats
from exptime.star.bracketing import bracketed_roots


def test_many_roots_at_once() -> None:
    """Roots of cos(x) - c in (0, pi) are arccos(c)."""
    c = np.linspace(-0.999999, 0.999999, 201)

    def function(x: Floats) -> Floats:
        return np.asarray(np.cos(x) - c)

    low, high = np.zeros(201), np.full(201, np.pi)
    roots = bracketed_roots(function, low, high, (function(low), function(high)))
    np.testing.assert_allclose(np.cos(roots), c, atol=1e-12)


@given(st.floats(-0.99, 0.99), st.integers(1, 9), st.floats(0.01, 6.0))
def test_stiff_functions_do_not_stall(root: float, power: int, steepness: float) -> None:
    """Odd powers and exponentials, a thousandfold from end to end, keep the bracket shrinking."""

    def function(x: Floats) -> Floats:
        return np.asarray(np.expm1(steepness * (x - root)) + (x - root) ** (2 * power - 1))

    low, high = np.array([-1.0]), np.array([1.0])
    found = bracketed_roots(function, low, high, (function(low), function(high)))
    assert abs(found[0] - root) < 1e-9


def test_without_a_sign_change_the_nearer_end_is_returned() -> None:
    """The end with the smaller absolute value stands in for a missing root."""

    def function(x: Floats) -> Floats:
        return np.asarray(x + 2.0)

    low, high = np.array([-1.0, -3.0]), np.array([1.0, 1.0])
    roots = bracketed_roots(function, low, high, (function(low), function(high)))
    np.testing.assert_allclose(roots, [-1.0, -2.0], atol=1e-12)


def test_a_root_at_an_end_is_found() -> None:
    """A function that vanishes at one end of its bracket."""

    def function(x: Floats) -> Floats:
        return np.asarray(x**2 - 1.0)

    low, high = np.array([0.0, 1.0]), np.array([1.0, 5.0])
    roots = bracketed_roots(function, low, high, (function(low), function(high)))
    np.testing.assert_allclose(roots, [1.0, 1.0], atol=1e-10)
