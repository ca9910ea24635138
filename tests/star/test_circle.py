"""A circle as a stack of rings."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from exptime.star.circle import cuts, half_width, sine_nodes, stack

NONE = np.empty(0)


@given(st.floats(0.0, math.pi), st.floats(0.005, 1.5))
def test_rings_add_up_to_the_area_of_the_cap(center: float, radius: float) -> None:
    """2 pi (1 - cos rho) to 1e-10, centres over and near the poles included."""
    rings = stack(center, radius, NONE, 32)
    area = np.sum(2.0 * rings.half_width * np.sin(rings.colatitude) * rings.weight)
    assert area == pytest.approx(4.0 * math.pi * math.sin(0.5 * radius) ** 2, rel=1e-10)


@given(st.floats(1e-9, 1e-2), st.floats(0.05, 1.2), st.sampled_from([-1, 1]), st.booleans())
def test_an_edge_that_all_but_touches_a_pole_keeps_the_area(
    gap: float, radius: float, side: int, south: bool
) -> None:
    """The half-width turns within the gap: the graded cuts follow it, to 1e-9."""
    center = radius + side * min(gap, 0.5 * radius)
    rings = stack(math.pi - center if south else center, radius, NONE, 32)
    area = np.sum(2.0 * rings.half_width * np.sin(rings.colatitude) * rings.weight)
    assert area == pytest.approx(4.0 * math.pi * math.sin(0.5 * radius) ** 2, rel=1e-9)


@given(st.floats(0.1, math.pi - 0.1), st.floats(0.02, 1.2), st.floats(0.01, 0.99))
def test_half_width_is_the_spherical_triangle(center: float, radius: float, share: float) -> None:
    """Cos d = (cos rho - cos theta cos c)/(sin theta sin c), where that is well conditioned."""
    low, high = max(center - radius, 1e-3), min(center + radius, math.pi - 1e-3)
    theta = low + share * (high - low)
    cosine = (math.cos(radius) - math.cos(theta) * math.cos(center)) / (
        math.sin(theta) * math.sin(center)
    )
    width = float(half_width(np.array([theta]), center, radius)[0])
    if cosine <= -1.0:
        assert width == math.pi
    elif cosine >= 1.0:
        assert width < 1e-6
    else:
        assert math.cos(width) == pytest.approx(cosine, abs=1e-11)


def test_outside_the_circle_there_is_no_width_and_over_the_pole_a_whole_ring() -> None:
    """Zero beyond the edge, pi where the cap covers the pole."""
    theta = np.array([0.05, 0.5, 0.95])
    np.testing.assert_allclose(half_width(theta, 0.2, 0.3)[[0, 2]], [math.pi, 0.0])
    assert 0.0 <= half_width(theta, 0.2, 0.3)[1] < 1e-6


def test_pieces_are_cut_at_transitions_inside_the_circle_only() -> None:
    """A transition inside becomes a bound, one outside does not."""
    bounds = cuts(1.5, 0.2, np.array([0.7, 1.45, 2.9]))
    np.testing.assert_allclose(bounds, [1.3, 1.45, 1.7])


@given(st.floats(0.0, math.pi), st.floats(0.005, 1.5))
def test_mirrored_circles_have_mirrored_rings(center: float, radius: float) -> None:
    """About the equator: the same widths at mirrored colatitudes."""
    one, other = stack(center, radius, NONE, 8), stack(math.pi - center, radius, NONE, 8)
    moment = [
        float(np.sum(rings.half_width * rings.weight * sign * np.cos(rings.colatitude)))
        for rings, sign in ((one, 1.0), (other, -1.0))
    ]
    assert moment[0] == pytest.approx(moment[1], abs=1e-12)


def test_nodes_integrate_square_roots() -> None:
    """The integral of sqrt(1 - x²) over (-1, 1) is pi/2."""
    x, weight = sine_nodes(16)
    assert weight @ np.sqrt(1.0 - x**2) == pytest.approx(math.pi / 2, rel=1e-13)
