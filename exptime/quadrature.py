"""Quadrature over intervals that are smooth piece by piece."""

from __future__ import annotations

import itertools
from functools import cache

import numpy as np

from exptime.arrays import Floats


@cache
def gauss_legendre(count: int) -> tuple[Floats, Floats]:
    """Nodes and weights of the Gauss-Legendre rule on (-1, 1)."""
    return np.polynomial.legendre.leggauss(count)


def piecewise_nodes(
    breakpoints: Floats, widest: float, order: int = 4, widest_relative: float = np.inf
) -> tuple[Floats, Floats]:
    """Nodes and weights over an interval cut at the points where a function is not smooth.

    Parameters
    ----------
    breakpoints : ndarray, shape (n,)
        Ends of the interval and the cuts between them, any order.
    widest : float
        Widest piece.
    order : int
        Gauss-Legendre nodes in each piece.
    widest_relative : float
        Widest piece over its own lower end.

    Returns
    -------
    nodes, weights : ndarray, shape (m,)
        Nodes increase.
    """
    bounds = np.unique(breakpoints)
    pieces = [
        np.linspace(low, high, _parts(low, high, widest, widest_relative), endpoint=False)
        for low, high in itertools.pairwise(bounds)
    ]
    ends = np.append(np.concatenate(pieces), bounds[-1])
    middle, half = 0.5 * (ends[1:] + ends[:-1]), 0.5 * np.diff(ends)
    x, weight = gauss_legendre(order)
    nodes = middle[:, None] + half[:, None] * x
    return nodes.ravel(), (half[:, None] * weight).ravel()


def _parts(low: float, high: float, widest: float, widest_relative: float) -> int:
    limit = min(widest, widest_relative * low) if low > 0.0 else widest
    return max(1, int(np.ceil((high - low) / limit - 1e-9)))
