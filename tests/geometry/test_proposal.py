"""Densities of proposals: whole, followed by the draws, closed or reflecting at their ends."""

from __future__ import annotations

import numpy as np
import pytest

from exptime.arrays import Booleans, Floats
from exptime.geometry.proposal import Kernels, around, uniform


def kernels(width: float, is_periodic: Booleans, share: float = 0.2) -> Kernels:
    """Return three kernels, two of them at an edge."""
    dimensions = len(is_periodic)
    random = np.random.default_rng(2)
    centers = random.random((3, dimensions))
    centers[0], centers[1] = 0.005, 0.99
    return Kernels(
        centers=centers,
        weights=np.array([0.5, 0.2, 0.3]),
        widths=np.full(dimensions, width),
        is_periodic=is_periodic,
        uniform_share=share,
    )


def middles(count: int, dimensions: int) -> Floats:
    """Return the midpoints of an even grid over the cube."""
    axis = (np.arange(count) + 0.5) / count
    return np.stack(np.meshgrid(*[axis] * dimensions, indexing="ij"), -1).reshape(-1, dimensions)


@pytest.mark.parametrize("width", [0.02, 0.1, 0.25])
@pytest.mark.parametrize("is_periodic", [[True, True], [False, False], [True, False]])
def test_densities_integrate_to_one(width: float, is_periodic: list[bool]) -> None:
    """Midpoint rule; at the widest, images farther than four widths are left out (1e-4)."""
    proposal = kernels(width, np.array(is_periodic))
    assert proposal.density(middles(400, 2)).mean() == pytest.approx(1.0, abs=3e-4)


@pytest.mark.parametrize("width", [0.05, 0.2])
@pytest.mark.parametrize("is_periodic", [[True, True], [False, False], [False, True]])
def test_draws_follow_the_density(width: float, is_periodic: list[bool]) -> None:
    """Chi² of 200 000 draws in 10 x 10 cells: five standard deviations of sqrt(2 x 99)."""
    proposal = kernels(width, np.array(is_periodic))
    drawn = proposal.draw(200_000, np.random.default_rng(3))
    assert drawn.min() >= 0.0
    assert drawn.max() <= 1.0
    found, _, _ = np.histogram2d(drawn[:, 0], drawn[:, 1], bins=10, range=[[0, 1], [0, 1]])
    cells = proposal.density(middles(200, 2)).reshape(10, 20, 10, 20).mean(axis=(1, 3))
    expected = 200_000 * cells / cells.sum()
    chi2 = float(np.sum((found - expected) ** 2 / expected))
    assert abs(chi2 - 99.0) < 5.0 * np.sqrt(2.0 * 99.0)


def test_a_periodic_axis_closes_and_another_reflects() -> None:
    """A kernel at 0.01: seen at 0.99 only where the axis closes; doubled at 0 where it reflects."""
    one = {"centers": np.array([[0.01]]), "weights": np.ones(1), "widths": np.array([0.02])}
    points = np.array([[0.99], [0.0]])
    closed = Kernels(**one, is_periodic=np.array([True]), uniform_share=0.0).density(points)
    mirror = Kernels(**one, is_periodic=np.array([False]), uniform_share=0.0).density(points)
    peak = 1.0 / (np.sqrt(2.0 * np.pi) * 0.02)
    np.testing.assert_allclose(closed, peak * np.exp([-0.5, -0.125]), rtol=1e-12)
    np.testing.assert_allclose(mirror, [0.0, 2.0 * peak * np.exp(-0.125)], rtol=1e-12)


def test_the_uniform_density_is_one() -> None:
    """And its draws fill the cube."""
    proposal = uniform(np.array([True, False, False]))
    drawn = proposal.draw(10_000, np.random.default_rng(1))
    assert np.all(proposal.density(drawn) == 1.0)
    # The mean of 10 000 uniform numbers: five standard errors.
    np.testing.assert_allclose(drawn.mean(axis=0), 0.5, atol=5.0 * 12**-0.5 / 100.0)


def test_kernels_stand_about_the_heaviest_points() -> None:
    """The heaviest first; points without weight are no centres."""
    points = np.random.default_rng(5).random((50, 2))
    weights = np.zeros(50)
    weights[[4, 9, 30]] = [2.0, 6.0, 4.0]
    proposal = around(points, weights, np.array([False, True]), 0.3)
    np.testing.assert_array_equal(proposal.centers, points[[9, 30, 4]])
    np.testing.assert_allclose(proposal.weights, [0.5, 1.0 / 3.0, 1.0 / 6.0])
    assert len(around(points, np.ones(50), np.array([False, True]), 0.3, most=20).centers) == 20


def test_one_point_alone_still_spreads_its_kernel() -> None:
    """A width of zero would be no density."""
    proposal = around(np.array([[0.3, 0.4]]), np.ones(1), np.array([False, False]), 0.2)
    assert np.all(proposal.widths > 0.0)


def test_narrow_kernels_leave_out_images_that_do_not_count() -> None:
    """At the width where far images are first left out, the density makes no step.

    Such an image is exp(-1/(2 x 0.15²)) = 2e-10 of a peak of 7; there are two of them.
    """
    points = middles(50, 2)
    for is_periodic in (np.array([True, True]), np.array([False, False])):
        below, above = (
            kernels(0.15 * factor, is_periodic, 0.0).density(points)
            for factor in (1.0 - 1e-12, 1.0 + 1e-12)
        )
        np.testing.assert_allclose(below, above, rtol=1e-9, atol=3.2e-9)


def test_a_centre_does_not_vouch_for_itself() -> None:
    """At a point that a kernel stands on, the density is that of the other kernels."""
    points = np.random.default_rng(5).random((12, 3))
    weights = np.arange(12.0)
    is_periodic = np.array([True, False, False])
    proposal = around(points, weights, is_periodic, 0.2)
    found = proposal.density_at_sources(points)
    for index in range(12):
        others = proposal.sources != index
        expected = Kernels(
            centers=proposal.centers[others],
            weights=proposal.weights[others] / proposal.weights[others].sum(),
            widths=proposal.widths,
            is_periodic=is_periodic,
            uniform_share=0.2,
        ).density(points[index : index + 1])
        assert found[index] == pytest.approx(expected[0], rel=1e-12)
