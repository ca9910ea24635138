"""Statistics of a light curve: pulsed fractions by every definition in use, harmonic fractions."""

from __future__ import annotations

import math

import numpy as np

from exptime.arrays import Complexes, Floats
from exptime.star.pulse import bin_averages
from exptime.target.records import FractionDefinition

_PHASES = 256
_GRID = 2001
_WIDTH = 8.0


def pulsed_fraction(harmonics: Complexes, definition: FractionDefinition) -> float:
    """Pulsed fraction of a noiseless light curve.

    Parameters
    ----------
    harmonics : ndarray, shape (m_max + 1,)
        Complex amplitudes for m >= 0.
    definition : FractionDefinition
        peak-to-trough (max - min)/(max + min), full-swing (max - min)/mean, above-minimum
        1 - min/mean, rms (root mean square over mean), first-harmonic (amplitude over mean).

    Returns
    -------
    float
        Zero for a curve without a mean.
    """
    mean = float(harmonics[0].real)
    if mean <= 0.0:
        return 0.0
    if definition == "rms":
        return float(np.sqrt(2.0 * np.sum(np.abs(harmonics[1:]) ** 2))) / mean
    if definition == "first-harmonic":
        return harmonic_fraction(harmonics, 1)
    highest, lowest = extremes(harmonics)
    return _from_extremes(highest, lowest, mean, definition)


def noisy_pulsed_fraction(
    harmonics: Complexes, definition: FractionDefinition, counts: float, bins: int
) -> float:
    """Return the expected pulsed fraction of a noisy profile, as read off its raw bins.

    Parameters
    ----------
    harmonics, definition
        As for `pulsed_fraction`.
    counts : float
        Source counts in the profile.
    bins : int
        Number of phase bins.

    Notes
    -----
    Extremes: expected largest and smallest of independent normal bins with Poisson variances.
    rms and first harmonic: noise adds in square, to the rms the part of it that the mean of the
    bins does not take up.
    """
    mean = float(harmonics[0].real)
    if mean <= 0.0:
        return 0.0
    expected = np.maximum(bin_averages(harmonics, bins), 0.0) / mean * counts / bins
    average = counts / bins
    if definition == "rms":
        noise = (1.0 - 1.0 / bins) / average
        return math.sqrt(float(np.var(expected)) / average**2 + noise)
    if definition == "first-harmonic":
        wave = np.exp(-2j * np.pi * (np.arange(bins) + 0.5) / bins)
        amplitude = 2.0 * abs(complex(wave @ expected)) / counts
        return math.sqrt(amplitude**2 + 4.0 / counts)
    spread = np.sqrt(np.maximum(expected, 1e-3 * average))
    highest = _expected_largest(expected, spread)
    lowest = max(-_expected_largest(-expected, spread), 0.0)
    return _from_extremes(highest, lowest, average, definition)


def harmonic_fraction(harmonics: Complexes, number: int) -> float:
    """Amplitude of a harmonic over the mean; zero beyond the last and without a mean."""
    mean = float(harmonics[0].real)
    if mean <= 0.0 or number >= len(harmonics):
        return 0.0
    return 2.0 * float(abs(harmonics[number])) / mean


def extremes(harmonics: Complexes) -> tuple[float, float]:
    """Largest and smallest value of a light curve, refined between samples by parabolas."""
    order = np.arange(len(harmonics))
    factor = np.where(order == 0, 1.0, 2.0)
    phases = np.arange(_PHASES) / _PHASES
    curve = (np.exp(2j * np.pi * np.outer(phases, order)) @ (factor * harmonics)).real
    highest = _vertex(curve, int(np.argmax(curve)))
    lowest = -_vertex(-curve, int(np.argmin(curve)))
    return highest, max(lowest, 0.0)


def _vertex(curve: Floats, index: int) -> float:
    left, middle, right = curve[index - 1], curve[index], curve[(index + 1) % len(curve)]
    bend = 2.0 * middle - left - right
    return float(middle if bend <= 0.0 else middle + (right - left) ** 2 / (8.0 * bend))


def _from_extremes(
    highest: float, lowest: float, mean: float, definition: FractionDefinition
) -> float:
    if definition == "peak-to-trough":
        return (highest - lowest) / (highest + lowest)
    if definition == "full-swing":
        return (highest - lowest) / mean
    return 1.0 - lowest / mean


def _expected_largest(mean: Floats, spread: Floats) -> float:
    """Return the mean of the largest of independent normal variables."""
    from scipy.special import ndtr

    low = float(np.min(mean - _WIDTH * spread))
    high = float(np.max(mean + _WIDTH * spread))
    x = np.linspace(low, high, _GRID)
    all_below = np.prod(ndtr((x[:, None] - mean) / spread), axis=1)
    return high - float(np.trapezoid(all_below, x))
