"""Rays by tanh-sinh sums of the plain integrals; a twin that shares nothing with the program.

Relations: Pechenick, Ftaclas & Cohen 1983, ApJ 274, 846 (deflection, travel time); Morsink, Leahy,
Cadeau & Braga 2007, ApJ 663, 1244 (rays that start inwards).
"""

from __future__ import annotations

import math

import numpy as np
from scipy.special import expit

from exptime.arrays import Floats


def trace(alpha: Floats, u: Floats) -> tuple[Floats, Floats]:
    """Return deflection (rad) and c dt/R behind the radial ray; alpha up to some 110 degrees.

    Tanh-sinh sums of d(psi) = dw/sqrt(1/b² - w² (1 - u w)), w = R/r, and of the travel time.
    """
    alpha, u = np.broadcast_arrays(alpha, u)
    step = 0.05
    s = step * np.arange(-84, 69)
    t = expit(math.pi * np.sinh(s))
    weight = step * math.pi * np.cosh(s) * t * (1.0 - t)
    sine, cosine = np.sin(alpha)[..., None], np.cos(alpha)[..., None]
    v = u[..., None]
    # Outwards from w = 1; 1 - w = t is exact near the end where the root may vanish.
    left = (1.0 - v) * cosine**2 + sine**2 * t * ((2.0 - 3.0 * v) - (1.0 - 3.0 * v) * t - v * t * t)
    root = np.sqrt(left / (1.0 - v))
    psi = np.sum(weight * sine / np.sqrt(left), axis=-1)
    late = np.sum(weight * sine**2 / (1.0 - v) / (root * (1.0 + root)), axis=-1)
    inwards = alpha > math.pi / 2.0
    if np.any(inwards):
        more_psi, more_late = _down_and_up(sine[inwards], v[inwards], t, weight)
        psi[inwards] += more_psi
        late[inwards] += more_late
    return psi, late


def _down_and_up(sine: Floats, u: Floats, t: Floats, weight: Floats) -> tuple[Floats, Floats]:
    """Return angle and c dt/R between leaving the radius inwards and passing it outwards."""
    impact = sine / np.sqrt(1.0 - u)
    nearest = np.cos((np.arccos(1.5 * math.sqrt(3.0) * u / impact) + 2.0 * math.pi) / 3.0)
    deepest = -math.sqrt(3.0) / (2.0 * impact * nearest)
    for _ in range(2):
        fault = deepest**2 * (1.0 - u * deepest) - 1.0 / impact**2
        deepest = deepest - fault / (deepest * (2.0 - 3.0 * u * deepest))
    below = (deepest - 1.0) * t
    w = deepest - below
    left = below * (deepest + w - u * (deepest**2 + deepest * w + w**2))
    step = 2.0 * (deepest - 1.0) * weight / np.sqrt(left)
    return np.sum(step, axis=-1), np.sum(step / (impact * w**2 * (1.0 - u * w)), axis=-1)
