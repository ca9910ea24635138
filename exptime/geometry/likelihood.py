"""How well a geometry reproduces what was measured of the pulse."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from exptime.arrays import Complexes, Floats
from exptime.geometry.light_curve import harmonic_fraction, noisy_pulsed_fraction, pulsed_fraction
from exptime.observation.bands import Band
from exptime.star.pulse import bin_waves
from exptime.target.records import FoldedShape, HarmonicShape, PulsedFraction, PulseShape, Target

_SHIFTS = 256


def bands_of(target: Target) -> tuple[Band, ...]:
    """Return the distinct bands in which a target's pulse was measured."""
    entries: Sequence[PulsedFraction | PulseShape] = (
        *target.pulsed_fractions,
        *target.pulse_shapes,
    )
    found = dict.fromkeys(_band(entry) for entry in entries)
    return tuple(found)


def _band(entry: PulsedFraction | PulseShape) -> Band:
    return Band(band_kev=entry.band_kev, instrument=entry.instrument)


def fractions_of(target: Target, bands: Sequence[Band], harmonics: Complexes) -> Floats:
    """Pulsed fractions of a model, one for each that was measured.

    Parameters
    ----------
    target : Target
        What was measured and how.
    bands : sequence of Band
        `bands_of` the target.
    harmonics : ndarray, shape (m_max + 1, n_band)
        Light curve in each band.

    Returns
    -------
    ndarray, shape (n_fraction,)
        By each measurement's definition, with its noise where counts and bins were given.
    """
    return np.array(
        [
            _fraction(measured, harmonics[:, bands.index(_band(measured))])
            for measured in target.pulsed_fractions
        ]
    )


def _fraction(measured: PulsedFraction, harmonics: Complexes) -> float:
    if measured.counts is None or measured.bins is None:
        return pulsed_fraction(harmonics, measured.definition)
    return noisy_pulsed_fraction(harmonics, measured.definition, measured.counts, measured.bins)


def log_likelihood(
    target: Target, bands: Sequence[Band], harmonics: Complexes, fractions: Floats
) -> float:
    """Logarithm of the likelihood of all entries, at the best common phase.

    Parameters
    ----------
    target, bands, harmonics
        As for `fractions_of`.
    fractions : ndarray, shape (n_fraction,)
        Result of `fractions_of`.

    Returns
    -------
    float
        Minus half of chi², summed over pulsed fractions, harmonic fractions and the bins of
        folded profiles.
    """
    total = sum(
        ((value - measured.value) / measured.uncertainty) ** 2
        for value, measured in zip(fractions, target.pulsed_fractions, strict=True)
    )
    folded = np.zeros(_SHIFTS)
    for shape in target.pulse_shapes:
        curve = harmonics[:, bands.index(_band(shape))]
        if isinstance(shape, HarmonicShape):
            total += _harmonic_misfit(shape, curve)
        else:
            folded += _folded_misfit(shape, curve)
    return -0.5 * (float(total) + float(_lowest(folded)))


def _harmonic_misfit(shape: HarmonicShape, harmonics: Complexes) -> float:
    return sum(
        ((harmonic_fraction(harmonics, entry.number) - entry.fraction) / entry.uncertainty) ** 2
        for entry in shape.harmonics
    )


def _folded_misfit(shape: FoldedShape, harmonics: Complexes) -> Floats:
    """Return chi² of a folded profile at each trial shift, the mean fitted to the data."""
    mean = float(harmonics[0].real)
    bins, order = len(shape.counts), np.arange(len(harmonics))
    source = shape.counts - shape.background_per_bin
    if mean <= 0.0:
        return np.full(_SHIFTS, float(np.sum((source / shape.error) ** 2)))
    # Bin averages on a grid that begins at the profile's own first bin.
    start = shape.phase[0] - 0.5 / bins
    offset = np.arange(_SHIFTS) / _SHIFTS + start
    shifted = harmonics / mean * np.exp(2j * np.pi * np.outer(offset, order))
    waves = bin_waves(len(harmonics) - 1, bins)
    curves = (shifted @ waves.T).real
    weight = shape.error**-2
    level = (curves * weight) @ source / (curves**2 @ weight)
    return np.asarray((source - level[:, None] * curves) ** 2 @ weight)


def _lowest(misfit: Floats) -> float:
    """Return the minimum over a periodic grid, refined by a parabola."""
    index = int(np.argmin(misfit))
    left, middle, right = misfit[index - 1], misfit[index], misfit[(index + 1) % len(misfit)]
    bend = left + right - 2.0 * middle
    return float(middle if bend <= 0.0 else max(middle - (right - left) ** 2 / (8.0 * bend), 0.0))
