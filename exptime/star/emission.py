"""Emission of the hot surface: spectrum and dependence on angle, kept apart.

The specific photon intensity is spectrum(E e / kT) times an angular factor of mu', the cosine
of the angle to the normal in the frame of the surface.
"""

from __future__ import annotations

import numpy as np

from exptime.arrays import Floats
from exptime.star.records import Emission


def angular_factor(emission: Emission, mu: Floats) -> Floats:
    """Return the intensity at mu' over its flux-weighted mean: (1 + h mu)/(1 + 2h/3).

    Parameters
    ----------
    emission : Emission
        The law.
    mu : ndarray
        Cosine of the angle to the normal, frame of the surface.
    """
    h = emission.coefficient
    return np.asarray((1.0 + h * mu) / (1.0 + 2.0 * h / 3.0))


def occupation(ratio: Floats) -> Floats:
    """Return the Planck occupation number 1/(exp(x) - 1) for x = E e/kT."""
    with np.errstate(over="ignore"):
        return np.asarray(1.0 / np.expm1(ratio))


def occupation_by_log_temperature(ratio: Floats) -> Floats:
    """Return the derivative of `occupation` with respect to ln kT at fixed energy."""
    number = occupation(ratio)
    return np.asarray(ratio * number * (1.0 + number))
