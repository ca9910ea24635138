"""Rays by quadrature against a step-by-step integration of the orbit."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import solve_ivp

from exptime.arrays import Floats
from exptime.star.rays import deflection, deflection_of_angle, delay, delay_of_angle


def orbit(alpha: float, u: float) -> tuple[float, float]:
    """Follow w = R/r along a ray: w'' = -w + (3/2) u w², until it is at infinity.

    The delay behind the radial ray grows by R/(R/b - w') per unit of angle: from
    c dt = r² dpsi/(b (1 - u w)) less dr/(1 - u w) for the radial ray between the same radii.
    """
    inverse_impact = math.sqrt(1.0 - u) / math.sin(alpha)

    def slopes(_: float, state: Floats) -> list[float]:
        w, slope, _late = state
        return [slope, -w + 1.5 * u * w * w, 1.0 / (inverse_impact - slope)]

    def at_infinity(_: float, state: Floats) -> float:
        return float(state[0])

    at_infinity.terminal = True  # type: ignore[attr-defined]
    start = [1.0, -math.sqrt(1.0 - u) / math.tan(alpha), 0.0]
    end = solve_ivp(
        slopes, (0.0, 10.0), start, method="DOP853", events=at_infinity, rtol=1e-13, atol=1e-14
    )
    return float(end.t_events[0][0]), float(end.y_events[0][0][2])


@pytest.mark.parametrize("u", [0.05, 0.2, 1 / 3, 0.45, 0.56])
@pytest.mark.parametrize("degrees", [5.0, 40.0, 75.0, 88.0, 89.9, 90.0, 90.1, 92.0, 97.0])
def test_deflection_and_delay_are_those_of_the_integrated_orbit(u: float, degrees: float) -> None:
    """Tolerance 1e-11: the integrator is good to some 1e-12 over the longest orbits."""
    alpha = math.radians(degrees)
    psi, late = orbit(alpha, u)
    angle, compactness = np.array([alpha]), np.array([u])
    assert deflection_of_angle(angle, compactness)[0] == pytest.approx(psi, abs=1e-11)
    assert delay_of_angle(angle, compactness)[0] == pytest.approx(late, abs=1e-11)


@pytest.mark.parametrize("u", [0.1, 0.35, 0.55])
def test_both_are_smooth_through_ninety_degrees(u: float) -> None:
    """An interpolant from points outside the middle predicts those inside to 1e-11."""
    t = np.cos(np.pi * (np.arange(24) + 0.5) / 24)
    half = 0.08
    inside = np.array([-1e-2, -1e-4, -1e-8, 0.0, 1e-8, 1e-4, 1e-2])
    for function in (deflection_of_angle, delay_of_angle):
        series = np.polynomial.Chebyshev.fit(
            t, function(math.pi / 2 + half * t, np.full(24, u)), 15, domain=[-1, 1]
        )
        expected = function(math.pi / 2 + inside, np.full(len(inside), u))
        np.testing.assert_allclose(series(inside / half), expected, rtol=0, atol=1e-11)


@given(st.floats(0.01, 0.56), st.floats(0.05, 1.55))
def test_delay_follows_deflection_by_the_impact_parameter(u: float, alpha: float) -> None:
    """Along a fixed radius c d(dt) = b d(psi): here in its integrated form over a short span."""
    x, weight = np.polynomial.legendre.leggauss(8)
    span = 0.015
    nodes = alpha + span * x
    # d(b psi) = b dpsi + psi db gives dt as a difference minus a smooth integral.
    low, high = np.array([alpha - span]), np.array([alpha + span])
    compact = np.array([u])
    root = math.sqrt(1.0 - u)
    impact_psi = [math.sin(a[0]) / root * deflection_of_angle(a, compact)[0] for a in (low, high)]
    rest = span * weight @ (np.cos(nodes) / root * deflection_of_angle(nodes, np.full(8, u)))
    change = delay_of_angle(high, compact)[0] - delay_of_angle(low, compact)[0]
    assert change == pytest.approx(impact_psi[1] - impact_psi[0] - rest, abs=2e-12)


def test_a_ray_that_falls_in_has_no_deflection() -> None:
    """Inward rays below the critical impact parameter never come out."""
    with np.errstate(all="ignore"):
        assert np.isnan(deflection(-0.9, 0.5))
        assert np.isnan(delay(-0.9, 0.5))


def test_scalars_and_arrays_broadcast() -> None:
    """A column of angles against a row of compactnesses gives a grid."""
    grid = deflection(np.array([[0.9], [0.1]]), np.array([0.1, 0.2, 0.3]))
    assert grid.shape == (2, 3)
    assert grid[1, 2] == pytest.approx(float(deflection(0.1, 0.3)), rel=1e-15)
