"""A rough pulse in closed form, to place the first draws where the exact pulse may fit.

Two point spots of a slowly turning sphere, bent by Beloborodov's formula: 1 - cos alpha =
(1-u)(1 - cos psi), seen while cos alpha > 0, with flux in proportion to cos alpha. The search
divides by the density that comes of it, so that its error costs efficiency and no truth.

References
----------
Beloborodov 2002, ApJ 566, L85.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from exptime.arrays import Floats
from exptime.constants import SOLAR_MASS_KM
from exptime.geometry.candidates import LARGEST_RATIO, Search, columns_at
from exptime.target.records import FractionDefinition, HarmonicShape

_PHASES = 64
_SOFTENING = 0.07
_SAMPLE = 20_000
_BATCH = 4096
_LEAST = 1e-4


@dataclass(frozen=True, slots=True, kw_only=True)
class Surrogate:
    """The density of uniform points weighted by the likelihood of their rough pulse.

    Parameters
    ----------
    search : Search
        What is sought.
    mean : float
        Mean of the softened likelihood over the unit cube.
    uniform_share : float
        Share of the uniform density mixed in.
    """

    search: Search
    mean: float
    uniform_share: float

    def draw(self, count: int, random: np.random.Generator) -> Floats:
        """Draw points by rejection, shape (count, n_axis)."""
        dimensions = len(self.search.axes)
        points = random.random((count, dimensions))
        is_weighted = random.random(count) >= self.uniform_share
        wanted, kept = int(is_weighted.sum()), np.empty((0, dimensions))
        while len(kept) < wanted:
            trial = random.random((_BATCH, dimensions))
            accepted = random.random(_BATCH) < softened_likelihood(self.search, trial)
            kept = np.concatenate([kept, trial[accepted]])
        points[is_weighted] = kept[:wanted]
        return points

    def density(self, points: Floats) -> Floats:
        """Return the density at points of shape (n, n_axis), shape (n,)."""
        weighted = softened_likelihood(self.search, points) / self.mean
        return np.asarray(self.uniform_share + (1.0 - self.uniform_share) * weighted)


def surrogate_of(search: Search, random: np.random.Generator, uniform_share: float) -> Surrogate:
    """Measure the mean of the softened likelihood and return its density."""
    sample = random.random((_SAMPLE, len(search.axes)))
    mean = float(np.mean(softened_likelihood(search, sample)))
    return Surrogate(search=search, mean=mean, uniform_share=uniform_share)


def softened_likelihood(search: Search, points: Floats) -> Floats:
    """Likelihood of rough pulses, at most one, with uncertainties widened by the model's own.

    Parameters
    ----------
    search : Search
        What is sought; folded profiles play no part.
    points : ndarray, shape (n, n_axis)
        In the unit cube.

    Returns
    -------
    ndarray, shape (n,)
        Never below 1e-4, so that rejection ends.
    """
    curves = rough_pulses(search, points)
    misfit = np.zeros(len(points))
    for measured in search.target.pulsed_fractions:
        value = _fractions(curves, measured.definition)
        misfit += _misfit(value, measured.value, measured.uncertainty)
    for shape in search.target.pulse_shapes:
        if isinstance(shape, HarmonicShape):
            amplitudes = 2.0 * np.abs(np.fft.rfft(curves, axis=1)) / _PHASES
            for entry in shape.harmonics:
                if entry.number < _PHASES // 2:
                    value = amplitudes[:, entry.number]
                    misfit += _misfit(value, entry.fraction, entry.uncertainty)
    return np.asarray(np.maximum(np.exp(-0.5 * misfit), _LEAST))


def rough_pulses(search: Search, points: Floats) -> Floats:
    """Rough pulses with a mean of one, shape (n, 64); zero where nothing shows."""
    at = columns_at(search, points)
    u = (2.0 * SOLAR_MASS_KM * at["mass"] / at["radius"])[:, None]
    cos_i = at["cos_inclination"]
    sin_i = np.sqrt(np.maximum(0.0, 1.0 - cos_i**2))
    phase = 2.0 * np.pi * np.arange(_PHASES) / _PHASES
    total = np.zeros((len(points), _PHASES))
    ratio = LARGEST_RATIO ** (2.0 * (at["ratio"] - 0.5))
    for number, longitude, weight in ((1, 0.0 * ratio, ratio**2), (2, at["longitude"], 1.0)):
        cosine = 2.0 * at[f"cos_colatitude_{number}"] - 1.0
        sine = np.sqrt(np.maximum(0.0, 1.0 - cosine**2))
        cos_psi = (cos_i * cosine)[:, None] + (sin_i * sine)[:, None] * np.cos(
            phase + 2.0 * np.pi * longitude[:, None]
        )
        seen = np.maximum(u + (1.0 - u) * cos_psi, 0.0)
        total += np.broadcast_to(weight, len(points))[:, None] * seen
    mean = total.mean(axis=1, keepdims=True)
    return np.asarray(np.divide(total, mean, out=np.zeros_like(total), where=mean > 0.0))


def _misfit(value: Floats, measured: float, uncertainty: float) -> Floats:
    return np.asarray((value - measured) ** 2 / (uncertainty**2 + _SOFTENING**2))


def _fractions(curves: Floats, definition: FractionDefinition) -> Floats:
    highest, lowest = curves.max(axis=1), curves.min(axis=1)
    if definition == "peak-to-trough":
        total = highest + lowest
        swing = highest - lowest
        return np.asarray(np.divide(swing, total, out=np.zeros_like(total), where=total > 0.0))
    if definition == "full-swing":
        return np.asarray(highest - lowest)
    if definition == "above-minimum":
        return np.asarray(1.0 - lowest)
    if definition == "rms":
        return np.asarray(curves.std(axis=1))
    wave = np.exp(-2j * math.pi * np.arange(_PHASES) / _PHASES)
    return np.asarray(2.0 * np.abs(curves @ wave) / _PHASES)
