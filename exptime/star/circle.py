"""A circular spot as a stack of rings: colatitude pieces and azimuthal half-widths."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import numpy as np

from exptime.arrays import Floats

_EMPTY = 1e-13
_GRADING = 0.04


@dataclass(frozen=True, slots=True)
class RingStack:
    """Rings that make up an outline.

    Parameters
    ----------
    colatitude : ndarray, shape (n_ring,)
        rad.
    weight : ndarray, shape (n_ring,)
        Quadrature weight in colatitude, rad.
    half_width : ndarray, shape (n_ring,)
        Half of the azimuthal extent, rad; pi for a whole ring.
    """

    colatitude: Floats
    weight: Floats
    half_width: Floats


@cache
def sine_nodes(count: int) -> tuple[Floats, Floats]:
    """Gauss-Legendre rule on (-1, 1) after x = sin(t), which removes square roots at the ends."""
    t, weight = np.polynomial.legendre.leggauss(count)
    angle = 0.5 * np.pi * t
    return np.sin(angle), 0.5 * np.pi * weight * np.cos(angle)


def half_width(colatitude: Floats, center: float, angular_radius: float) -> Floats:
    """Azimuthal half-width of a circle at colatitudes (rad); 0 outside, pi where it is whole.

    Notes
    -----
    tan²(d/2) = sin((rho+theta-c)/2) sin((rho-theta+c)/2)
    / [sin((theta+c+rho)/2) sin((theta+c-rho)/2)], free of cancellation.
    """
    above = np.sin(0.5 * (angular_radius + colatitude - center)) * np.sin(
        0.5 * (angular_radius - colatitude + center)
    )
    below = np.sin(0.5 * (colatitude + center + angular_radius)) * np.sin(
        0.5 * (colatitude + center - angular_radius)
    )
    with np.errstate(divide="ignore", invalid="ignore"):
        width = 2.0 * np.arctan(np.sqrt(np.maximum(above, 0.0) / below))
    return np.where(below <= 0.0, np.pi, np.where(above <= 0.0, 0.0, width))


def cuts(center: float, angular_radius: float, transitions: Floats) -> Floats:
    """Colatitudes that bound the pieces of a circle, increasing, rad.

    Parameters
    ----------
    center, angular_radius : float
        Colatitude of the centre and angular radius, rad.
    transitions : ndarray
        Colatitudes where visibility changes its kind, rad.
    """
    low, high = center - angular_radius, center + angular_radius
    bounds = [max(low, 0.0), min(high, np.pi)]
    if low < 0.0:
        bounds.append(min(-low, np.pi))
    if high > np.pi:
        bounds.append(max(2.0 * np.pi - high, 0.0))
    first, last = min(bounds), max(bounds)
    bounds += [float(value) for value in transitions if first < value < last]
    bounds += _graded(abs(low), min(high, np.pi))
    bounds += [np.pi - value for value in _graded(abs(np.pi - high), min(np.pi - low, np.pi))]
    ordered = np.unique(np.clip(bounds, first, last))
    return np.asarray(ordered[np.concatenate([[True], np.diff(ordered) > _EMPTY])])


def _graded(gap: float, reach: float) -> list[float]:
    """Extra cuts where the edge passes close to a pole and the half-width turns there fast."""
    extra = []
    while _EMPTY < gap < _GRADING * reach:
        gap *= 8.0
        extra.append(gap)
    return extra


def stack(
    center: float, angular_radius: float, transitions: Floats, rings_per_piece: int
) -> RingStack:
    """Cut a circle into rings.

    Parameters
    ----------
    center, angular_radius : float
        Colatitude of the centre and angular radius, rad.
    transitions : ndarray
        Colatitudes where visibility changes its kind, rad.
    rings_per_piece : int
        Rings in each piece.
    """
    bounds = cuts(center, angular_radius, transitions)
    nodes, weights = sine_nodes(rings_per_piece)
    middle, half = 0.5 * (bounds[1:] + bounds[:-1]), 0.5 * np.diff(bounds)
    colatitude = (middle[:, None] + half[:, None] * nodes).ravel()
    return RingStack(
        colatitude=colatitude,
        weight=(half[:, None] * weights).ravel(),
        half_width=half_width(colatitude, center, angular_radius),
    )
