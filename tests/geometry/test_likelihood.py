"""Likelihoods of pulses made by a known model, by hand-written chi² and by simulation."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from exptime.arrays import Complexes, Floats
from exptime.geometry.likelihood import bands_of, fractions_of, log_likelihood
from exptime.star.pulse import bin_averages
from exptime.target.records import (
    FoldedShape,
    HarmonicFraction,
    HarmonicShape,
    Measured,
    PulsedFraction,
    PulseShape,
    Target,
)

SOFT, HARD = (0.3, 1.0), (1.0, 2.0)
BINS = 16
CURVE = np.array([2.0, 0.4 * np.exp(0.4j), 0.2 * np.exp(2.0j), 0.05j])
OTHER = np.array([1.0, 0.3 * np.exp(1.0j), 0.05, 0.02])


def target_of(fractions: tuple[PulsedFraction, ...] = (), *shapes: PulseShape) -> Target:
    """Return a target of which only the pulse counts."""
    return Target(
        name="Invented",
        file="invented.yaml",
        spin_hz=200.0,
        column_density=Measured(value=1e20),
        distance=Measured(value=300.0, uncertainty=30.0),
        pulsed_fractions=fractions,
        pulse_shapes=shapes,
    )


def rotated(harmonics: Complexes, phase: float) -> Complexes:
    """Return a light curve that comes later by `phase`."""
    order = np.arange(len(harmonics))
    turn = np.exp(-2j * np.pi * phase * order)
    return harmonics * (turn if harmonics.ndim == 1 else turn[:, None])


def folded(
    curve: Complexes,
    band: tuple[float, float] = SOFT,
    counts: float = 16_000.0,
    background: float = 0.0,
    start: float = 0.0,
    random: np.random.Generator | None = None,
) -> FoldedShape:
    """Return a profile of BINS bins, the first of which begins at `start`."""
    mean = bin_averages(rotated(curve, -start), BINS) / curve[0].real * counts / BINS + background
    data: Floats = mean if random is None else random.poisson(mean).astype(float)
    return FoldedShape(
        band_kev=band,
        phase=start + (np.arange(BINS) + 0.5) / BINS,
        counts=data,
        error=np.sqrt(mean),
        background_per_bin=background,
        file="folded.ecsv",
    )


def misfit(target: Target, *curves: Complexes) -> float:
    """Return chi² of one light curve for each band."""
    harmonics, bands = np.stack(curves, axis=1), bands_of(target)
    fractions = fractions_of(target, bands, harmonics)
    return -2.0 * log_likelihood(target, bands, harmonics, fractions)


def test_bands_are_listed_once() -> None:
    """Fractions and shapes in the same band and instrument share a channel."""
    fraction = PulsedFraction(value=0.3, uncertainty=0.1, definition="rms", band_kev=SOFT)
    target = target_of(
        (fraction, replace(fraction, definition="full-swing"), replace(fraction, instrument="x")),
        folded(CURVE),
        folded(CURVE, HARD),
    )
    assert [(band.band_kev, band.instrument) for band in bands_of(target)] == [
        (SOFT, None),
        (SOFT, "x"),
        (HARD, None),
    ]


def test_fractions_of_several_bands_and_definitions_are_summed() -> None:
    """Chi² written out: a fraction in each of two bands."""
    target = target_of(
        (
            PulsedFraction(value=0.5, uncertainty=0.1, definition="first-harmonic", band_kev=SOFT),
            PulsedFraction(value=0.5, uncertainty=0.05, definition="rms", band_kev=HARD),
        )
    )
    rms = math.sqrt(2.0 * (0.3**2 + 0.05**2 + 0.02**2))
    expected = ((0.4 - 0.5) / 0.1) ** 2 + ((rms - 0.5) / 0.05) ** 2
    assert misfit(target, CURVE, OTHER) == pytest.approx(expected, rel=1e-12)


def test_noise_counts_where_counts_and_bins_are_given() -> None:
    """The raw extremes of few counts are wider apart than the curve's own."""
    plain = PulsedFraction(
        value=0.3, uncertainty=0.1, definition="peak-to-trough", band_kev=SOFT, counts=None
    )
    noisy = target_of((plain, replace(plain, counts=800.0, bins=BINS)))
    quiet, raw = fractions_of(noisy, bands_of(noisy), CURVE[:, None])
    assert raw > quiet + 0.05


def test_harmonic_fractions_have_no_phase() -> None:
    """Amplitudes over the mean: 0.4, 0.2 and 0.05, each against its own measurement."""
    shape = HarmonicShape(
        band_kev=SOFT,
        harmonics=(
            HarmonicFraction(number=1, fraction=0.5, uncertainty=0.05),
            HarmonicFraction(number=3, fraction=0.02, uncertainty=0.03),
        ),
    )
    expected = ((0.4 - 0.5) / 0.05) ** 2 + ((0.05 - 0.02) / 0.03) ** 2
    for phase in (0.0, 0.31):
        assert misfit(target_of((), shape), rotated(CURVE, phase)) == pytest.approx(expected)


@given(st.floats(0.0, 1.0), st.floats(1e-3, 1e3))
def test_a_folded_profile_knows_neither_phase_nor_brightness(phase: float, factor: float) -> None:
    """The profile of the model itself fits at any phase: chi² far below one of its bins.

    Trial phases stand 1/256 apart and the minimum between them is that of a parabola.
    """
    target = target_of((), folded(CURVE))
    assert misfit(target, factor * rotated(CURVE, phase)) < 0.02


def test_the_first_bin_may_begin_anywhere() -> None:
    """Bin centres are heeded: a profile that begins at phase 0.4 against one that begins at 0.

    Both profiles are of the same source; only with both at their own phases do they share one.
    """
    target = target_of((), folded(CURVE), folded(OTHER, HARD, start=0.4))
    assert misfit(target, CURVE, OTHER) < 0.02
    shifted = replace(folded(OTHER, HARD, start=0.4), phase=(np.arange(BINS) + 0.5) / BINS)
    assert misfit(target_of((), folded(CURVE), shifted), CURVE, OTHER) > 100.0


def test_two_profiles_share_one_phase() -> None:
    """Turned against each other, two profiles that fit alone do not fit together."""
    both = target_of((), folded(CURVE), folded(OTHER, HARD))
    for phase in (0.0, 0.2):
        assert misfit(both, rotated(CURVE, phase), rotated(OTHER, phase)) < 0.04
    apart = misfit(both, CURVE, rotated(OTHER, 0.25))
    assert misfit(target_of((), folded(OTHER, HARD)), rotated(OTHER, 0.25)) < 0.02
    assert apart > 100.0


def test_the_best_phase_is_found_between_the_trials() -> None:
    """Against 20 000 phases tried one by one, for a curve that does not fit."""
    shape = folded(OTHER, counts=1600.0)
    source, weight, best = shape.counts, shape.error**-2, math.inf
    for phase in np.arange(20_000) / 20_000:
        model = bin_averages(rotated(CURVE, phase), BINS)
        level = (model * weight) @ source / (model**2 @ weight)
        best = min(best, float((source - level * model) ** 2 @ weight))
    assert misfit(target_of((), shape), CURVE) == pytest.approx(best, rel=1e-3)


def test_a_background_is_taken_off_the_profile() -> None:
    """Counts hold it, the model does not; forgotten, it dilutes the pulse."""
    shape = folded(CURVE, background=500.0)
    assert misfit(target_of((), shape), CURVE) < 0.02
    assert misfit(target_of((), replace(shape, background_per_bin=0.0)), CURVE) > 20.0


def test_a_dark_model_leaves_the_whole_source_unexplained() -> None:
    """No light in the band: chi² of the counts above background."""
    shape = folded(CURVE, background=500.0)
    expected = np.sum(((shape.counts - 500.0) / shape.error) ** 2)
    assert misfit(target_of((), shape), np.zeros(4, complex)) == pytest.approx(expected)


def test_profiles_of_the_model_give_chi2_near_their_bins() -> None:
    """300 simulated profiles: chi² of 16 bins less level and phase, 14 on average.

    The mean of 300 is good to sqrt(2 x 14/300) = 0.31; five of these.
    """
    random = np.random.default_rng(23)
    values = [
        misfit(target_of((), folded(CURVE, background=100.0, random=random)), rotated(CURVE, 0.123))
        for _ in range(300)
    ]
    assert np.mean(values) == pytest.approx(BINS - 2, abs=5.0 * math.sqrt(2.0 * 14.0 / 300.0))
    assert np.var(values) == pytest.approx(28.0, rel=0.5)
