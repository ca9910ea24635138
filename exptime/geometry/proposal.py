"""Points in the unit cube: uniform ones, and ones crowded where earlier points fared well."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from exptime.arrays import Booleans, Floats, Integers

_NARROWEST = 1e-3
_NARROW = 0.15


@dataclass(frozen=True, slots=True, kw_only=True)
class Kernels:
    """A mixture of the uniform density on the unit cube with kernels about centres.

    Parameters
    ----------
    centers : ndarray, shape (n_center, n_dim)
        Centres in the cube; none makes the density uniform.
    weights : ndarray, shape (n_center,)
        Shares, summing to one.
    widths : ndarray, shape (n_dim,)
        Standard deviations of the normal kernels.
    is_periodic : ndarray of bool, shape (n_dim,)
        Axes that close on themselves; the others reflect at their ends.
    uniform_share : float
        Share of the uniform density.
    sources : ndarray of int, shape (n_center,)
        Which of the points that the kernels were placed among each centre is; empty where
        they stand among none.
    """

    centers: Floats
    weights: Floats
    widths: Floats
    is_periodic: Booleans
    uniform_share: float
    sources: Integers = field(default_factory=lambda: np.empty(0, int))

    def draw(self, count: int, random: np.random.Generator) -> Floats:
        """Draw points, shape (count, n_dim)."""
        dimensions = len(self.widths)
        points = random.random((count, dimensions))
        if len(self.centers) == 0:
            return points
        crowded = random.random(count) >= self.uniform_share
        chosen = random.choice(len(self.centers), size=count, p=self.weights)
        moved = self.centers[chosen] + self.widths * random.standard_normal((count, dimensions))
        wrapped = np.where(self.is_periodic, moved % 1.0, 1.0 - np.abs(1.0 - moved % 2.0))
        return np.where(crowded[:, None], wrapped, points)

    def density(self, points: Floats) -> Floats:
        """Return the density at points of shape (n, n_dim), shape (n,)."""
        if len(self.centers) == 0:
            return np.ones(len(points))
        kernel = self._kernels(points) @ self.weights
        return np.asarray(self.uniform_share + (1.0 - self.uniform_share) * kernel)

    def density_at_sources(self, points: Floats) -> Floats:
        """Return the density at the points that the kernels were placed among, shape (n,).

        A centre's own kernel is left out at the centre itself: it is there because the point is,
        and would make every good point weigh too little.
        """
        density = self.density(points)
        if len(self.sources) > 1:
            each = self._kernels(self.centers)
            np.fill_diagonal(each, 0.0)
            kernel = each @ self.weights / (1.0 - self.weights)
            density[self.sources] = self.uniform_share + (1.0 - self.uniform_share) * kernel
        return density

    def _kernels(self, points: Floats) -> Floats:
        """Return the density of every kernel at every point, shape (n, n_center)."""
        total = np.ones((len(points), len(self.centers)))
        for axis, width in enumerate(self.widths):
            x, center = points[:, axis, None], self.centers[None, :, axis]
            total *= _images(x, center, float(width), bool(self.is_periodic[axis]))
        return total


def _images(x: Floats, center: Floats, width: float, is_periodic: bool) -> Floats:
    """One-dimensional kernel with the images that periodicity or reflection brings in."""
    # Images farther off than a whole axis count for wide kernels only.
    is_wide = width > _NARROW
    if is_periodic:
        apart = np.abs(x - center)
        distances = [apart, 1.0 - apart]
        distances += [1.0 + apart, 2.0 - apart] if is_wide else []
    else:
        apart, mirrored = x - center, x + center
        distances = [apart, mirrored, mirrored - 2.0]
        distances += [apart - 2.0, apart + 2.0] if is_wide else []
    norm = 1.0 / (np.sqrt(2.0 * np.pi) * width)
    return np.asarray(sum(np.exp(-0.5 * (d / width) ** 2) for d in distances) * norm)


def uniform(is_periodic: Booleans) -> Kernels:
    """Return the uniform density on the cube."""
    dimensions = len(is_periodic)
    return Kernels(
        centers=np.empty((0, dimensions)),
        weights=np.empty(0),
        widths=np.ones(dimensions),
        is_periodic=is_periodic,
        uniform_share=1.0,
    )


def around(
    points: Floats, weights: Floats, is_periodic: Booleans, uniform_share: float, most: int = 200
) -> Kernels:
    """Return kernels about the heaviest of weighted points.

    Parameters
    ----------
    points : ndarray, shape (n, n_dim)
        Points in the cube.
    weights : ndarray, shape (n,)
        Not negative; need not sum to one.
    is_periodic : ndarray of bool, shape (n_dim,)
        Axes that close on themselves.
    uniform_share : float
        Share of the uniform density.
    most : int
        Largest number of kernels.

    Notes
    -----
    Width of each axis: that of a uniform axis or of the points, whichever is less, times
    n_eff^(-1/(d+4)), the normal-reference rule of kernel density estimates (Silverman 1986).
    """
    order = np.argsort(weights)[::-1][:most]
    order = order[weights[order] > 0.0]
    share = weights[order] / weights[order].sum()
    centers = points[order]
    effective = 1.0 / float(np.sum(share**2))
    spread = np.sqrt(share @ (centers - share @ centers) ** 2)
    shrink = effective ** (-1.0 / (points.shape[1] + 4.0))
    widths = np.clip(spread, _NARROWEST / shrink, 12.0**-0.5) * shrink
    return Kernels(
        centers=centers,
        weights=share,
        widths=widths,
        is_periodic=is_periodic,
        uniform_share=uniform_share,
        sources=order,
    )
