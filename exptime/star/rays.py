r"""Exact light rays outside a Schwarzschild star, by quadrature.

Slow and accurate: the tables of `exptime.star.ray_table` are made from these functions, and the
pulse uses the tables. With R the radius at which a ray leaves, u = 2GM/(Rc²), alpha the angle of
the ray to the radial direction there (s its sine, c its cosine) and R/r = 1 - y²:

.. math::

   q(y) &= (1-u)c^2 + s^2 y^2 [(2-3u) - (1-3u)y^2 - u y^4] \\
   \psi &= \int_0^1 2 y s / \sqrt{q}\,dy \\
   c\,\Delta t / R &= \frac{s^2}{1-u} \int_0^1 \frac{2 y}{Q(1+Q)}\,dy, \quad Q=\sqrt{q/(1-u)}

Rays that leave inwards (alpha > 90 deg, possible on an oblate surface) run through their
periastron and then like the outward ray at 180 deg - alpha.

References
----------
Pechenick, Ftaclas & Cohen 1983, ApJ 274, 846 (deflection); Pechenick et al. and Poutanen &
Beloborodov 2006, MNRAS 373, 836 (delay); the substitutions are derived here.
"""

from __future__ import annotations

from functools import cache

import numpy as np

from exptime.arrays import Floats

_NODES = 160


def deflection(cos_alpha: Floats | float, u: Floats | float) -> Floats:
    """Angle between the radius vector at emission and the direction at infinity.

    Parameters
    ----------
    cos_alpha : array_like
        Cosine of the emission angle to the radial direction; negative for inward rays.
    u : array_like
        2GM/(Rc²), 0 to below 2/3; broadcasts against `cos_alpha`.

    Returns
    -------
    ndarray
        psi, rad, of the broadcast shape; nan for inward rays that fall in.

    Notes
    -----
    Good to 1e-13 (measured against an orbit integration).
    """
    cosine, compactness = np.broadcast_arrays(np.asarray(cos_alpha, float), np.asarray(u, float))
    return deflection_of_angle(np.arccos(cosine), compactness)


def delay(cos_alpha: Floats | float, u: Floats | float) -> Floats:
    """Delay of a ray behind the radial one from the same radius, in units of R/c.

    Parameters
    ----------
    cos_alpha, u : array_like
        As for `deflection`.

    Returns
    -------
    ndarray
        c dt/R, of the broadcast shape; nan for inward rays that fall in.
    """
    cosine, compactness = np.broadcast_arrays(np.asarray(cos_alpha, float), np.asarray(u, float))
    return delay_of_angle(np.arccos(cosine), compactness)


def deflection_of_angle(alpha: Floats, u: Floats) -> Floats:
    """Return psi (rad) for emission angles alpha (rad); arrays of one shape."""
    alpha, u = np.asarray(alpha), np.asarray(u)
    sine, cosine = np.sin(alpha), np.cos(alpha)
    y, weight = _outward_nodes(sine, cosine, u)
    q = _radicand(y, sine, cosine, u)
    psi = np.asarray(np.sum(weight * 2.0 * sine[..., None] * y / np.sqrt(q), axis=-1))
    inward = cosine < 0.0
    if np.any(inward):
        depth, y, weight, g, _ = _inward_nodes(sine[inward], cosine[inward], u[inward])
        psi[inward] += 4.0 * np.sqrt(depth) * np.sum(weight / np.sqrt(g), axis=-1)
    return psi


def delay_of_angle(alpha: Floats, u: Floats) -> Floats:
    """Return c dt/R for emission angles alpha (rad); arrays of one shape."""
    alpha, u = np.asarray(alpha), np.asarray(u)
    sine, cosine = np.sin(alpha), np.cos(alpha)
    y, weight = _outward_nodes(sine, cosine, u)
    root = np.sqrt(_radicand(y, sine, cosine, u) / (1.0 - u)[..., None])
    integral = np.sum(weight * 2.0 * y / (root * (1.0 + root)), axis=-1)
    late = np.asarray(sine**2 / (1.0 - u) * integral)
    inward = cosine < 0.0
    if np.any(inward):
        s, v = sine[inward], u[inward]
        depth, y, weight, g, w = _inward_nodes(s, cosine[inward], v)
        slowness = weight / (w**2 * (1.0 - v[..., None] * w) * np.sqrt(g))
        late[inward] += np.sqrt(1.0 - v) / s * 4.0 * np.sqrt(depth) * np.sum(slowness, axis=-1)
    return late


def _radicand(y: Floats, sine: Floats, cosine: Floats, u: Floats) -> Floats:
    s, c, v, square = sine[..., None], cosine[..., None], u[..., None], y**2
    bracket = (2.0 - 3.0 * v) - (1.0 - 3.0 * v) * square - v * square**2
    return np.asarray((1.0 - v) * c**2 + s**2 * square * bracket)


def _outward_nodes(sine: Floats, cosine: Floats, u: Floats) -> tuple[Floats, Floats]:
    """Nodes and weights in y; near grazing they crowd at 0 as y = a sinh(v)."""
    x, weight = _unit_nodes()
    with np.errstate(divide="ignore"):
        scale = np.sqrt((1.0 - u) / (2.0 - 3.0 * u)) * np.abs(cosine) / sine
    crowded = (scale > 0.0) & (scale < 1.0)
    a = np.where(crowded, scale, 1.0)
    end = np.arcsinh(1.0 / a)[..., None]
    y = np.where(crowded[..., None], a[..., None] * np.sinh(end * x), x)
    stretch = np.where(crowded[..., None], a[..., None] * end * np.cosh(end * x), 1.0)
    return y, weight * stretch


def _inward_nodes(
    sine: Floats, cosine: Floats, u: Floats
) -> tuple[Floats, Floats, Floats, Floats, Floats]:
    """Return depth w_p - 1, nodes, weights, G and w for the part below the starting radius.

    w = R/r runs from 1 to the periastron w_p, w = w_p - (w_p - 1) y².
    """
    # The periastron in closed form (Morsink et al. 2007), nan where the ray falls in; Newton on
    # w_p - 1, written without cancellation, takes off what the subtraction costs.
    with np.errstate(invalid="ignore"):
        third = (np.arccos(1.5 * np.sqrt(3.0) * u * np.sqrt(1.0 - u) / sine) + 2.0 * np.pi) / 3.0
    depth = -0.5 * np.sqrt(3.0 * (1.0 - u)) / (sine * np.cos(third)) - 1.0
    target = (1.0 - u) * cosine**2 / sine**2
    for _ in range(3):
        value = depth * ((1.0 - u) * (2.0 + depth) - u * (1.0 + depth) ** 2) - target
        slope = (1.0 - u) * (2.0 + 2.0 * depth) - u * (1.0 + depth) * (1.0 + 3.0 * depth)
        depth = depth - value / slope
    depth = np.maximum(depth, 0.0)
    x, weight = _unit_nodes()
    peri, v = 1.0 + depth[..., None], u[..., None]
    w = peri - depth[..., None] * x**2
    g = -(v * w**2 + (v * peri - 1.0) * w + v * peri**2 - peri)
    return depth, x, weight, np.where(g > 0.0, g, np.nan), w


@cache
@cache
def _unit_nodes() -> tuple[Floats, Floats]:
    x, weight = np.polynomial.legendre.leggauss(_NODES)
    return 0.5 * (x + 1.0), 0.5 * weight
