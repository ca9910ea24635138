"""Spectrum of a spot as Chebyshev coefficients in the redshift factor."""

from __future__ import annotations

from functools import cache

import numpy as np

from exptime.arrays import Floats
from exptime.star.emission import occupation

_PROBE = 64


@cache
def _points_and_transform(terms: int) -> tuple[Floats, Floats]:
    t = np.cos(np.pi * (np.arange(terms) + 0.5) / terms)
    transform = np.cos(np.outer(np.arange(terms), np.arccos(t))) * (2.0 / terms)
    transform[0] *= 0.5
    return t, transform


def redshift_points(redshift_range: tuple[float, float], terms: int) -> Floats:
    """Return the Chebyshev points of an interval of the redshift factor, shape (terms,)."""
    low, high = redshift_range
    return np.asarray(0.5 * (high + low) + 0.5 * (high - low) * _points_and_transform(terms)[0])


def coefficients(values: Floats) -> Floats:
    """Turn values at `redshift_points` into Chebyshev coefficients.

    Parameters
    ----------
    values : ndarray, shape (terms, ...)
        A function of the redshift factor at the points.

    Returns
    -------
    ndarray, shape (terms, ...)
        Coefficients that match the moments' polynomials.
    """
    return np.asarray(_points_and_transform(values.shape[0])[1] @ values)


def planck_coefficients(
    energies_kev: Floats, temperature_kev: float, redshift_range: tuple[float, float], terms: int
) -> Floats:
    """Chebyshev coefficients of 1/(exp(E e/kT) - 1), shape (terms, n_energy)."""
    points = redshift_points(redshift_range, terms)
    return coefficients(occupation(np.outer(points, energies_kev / temperature_kev)))


def terms_needed(
    energies_kev: Floats,
    temperature_kev: float,
    redshift_range: tuple[float, float],
    negligible: float = 1e-10,
) -> int:
    """Return how many Chebyshev terms of the spectrum are not negligible.

    Parameters
    ----------
    energies_kev : ndarray, shape (n,)
        Energies to be met, keV; the lowest and the highest decide.
    temperature_kev : float
        Lowest temperature of the spots, keV.
    redshift_range : tuple of float
        Interval of the redshift factor.
    negligible : float
        Share of the largest coefficient below which the rest may be left out.
    """
    ends = np.array([np.min(energies_kev), np.max(energies_kev)])
    series = np.abs(planck_coefficients(ends, temperature_kev, redshift_range, _PROBE))
    large = np.any(series > negligible * series.max(axis=0), axis=1)
    return _PROBE - int(np.argmax(large[::-1]))
