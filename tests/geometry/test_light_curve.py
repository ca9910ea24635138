"""Statistics of light curves against closed forms, dense samples and simulated profiles."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from exptime.arrays import Complexes, Floats
from exptime.geometry.light_curve import (
    extremes,
    harmonic_fraction,
    noisy_pulsed_fraction,
    pulsed_fraction,
)
from exptime.star.pulse import bin_averages
from exptime.target.records import FractionDefinition

EXTREMES: tuple[FractionDefinition, ...] = ("peak-to-trough", "full-swing", "above-minimum")


def wave(amplitude: float, phase: float = 0.0, mean: float = 1.0) -> Complexes:
    """Return the harmonics of mean (1 + amplitude cos 2 pi (x - phase))."""
    return mean * np.array([1.0, 0.5 * amplitude * np.exp(-2j * np.pi * phase)])


def sampled(harmonics: Complexes, count: int) -> Floats:
    """Return a light curve on an even grid."""
    order = np.arange(len(harmonics))
    factor = np.where(order == 0, 1.0, 2.0)
    turns = np.outer(np.arange(count) / count, order)
    return np.asarray((np.exp(2j * np.pi * turns) @ (factor * harmonics)).real)


def random_curve(seed: int, highest: int) -> Complexes:
    """Return a positive light curve whose harmonics fall as the square of their number."""
    random = np.random.default_rng(seed)
    order = np.arange(1, highest + 1)
    size = random.uniform(0.2, 1.0, highest) / order**2
    size *= random.uniform(0.1, 0.9) / (2.0 * size.sum())
    return np.concatenate([[1.0], size * np.exp(2j * np.pi * random.random(highest))])


@given(st.floats(0.0, 0.99), st.floats(0.0, 1.0), st.floats(1e-6, 1e6))
def test_fractions_know_neither_phase_nor_brightness(a: float, phase: float, mean: float) -> None:
    """A sinusoid anywhere and of any mean: the closed forms, to a parabola through its tip."""
    curve = wave(a, phase, mean)
    assert pulsed_fraction(curve, "peak-to-trough") == pytest.approx(a, abs=1e-6)
    assert pulsed_fraction(curve, "full-swing") == pytest.approx(2.0 * a, abs=1e-6)
    assert pulsed_fraction(curve, "above-minimum") == pytest.approx(a, abs=1e-6)
    assert pulsed_fraction(curve, "rms") == pytest.approx(a / math.sqrt(2.0), rel=1e-12)
    assert pulsed_fraction(curve, "first-harmonic") == pytest.approx(a, rel=1e-12)


@pytest.mark.parametrize("seed", range(8))
def test_extremes_are_refined_between_samples(seed: int) -> None:
    """Against a grid a thousand times finer, within the error of a parabola.

    Half a step h off its middle sample that is h³/16 of the third derivative at most.
    """
    curve = random_curve(seed, 24)
    dense = sampled(curve, 256_000)
    highest, lowest = extremes(curve)
    turn = 2.0 * np.pi * np.arange(25) / 256.0
    error = float(np.sum(2.0 * np.abs(curve) * turn**3)) / 16.0
    assert error < 1e-3
    assert highest == pytest.approx(dense.max(), abs=error)
    assert lowest == pytest.approx(dense.min(), abs=error)


@pytest.mark.parametrize("seed", range(4))
def test_fractions_of_any_curve_follow_their_definitions(seed: int) -> None:
    """Each definition written out on a dense grid."""
    curve = random_curve(seed, 12)
    dense = sampled(curve, 100_000)
    top, bottom, mean = dense.max(), dense.min(), dense.mean()
    expected: dict[FractionDefinition, float] = {
        "peak-to-trough": (top - bottom) / (top + bottom),
        "full-swing": (top - bottom) / mean,
        "above-minimum": 1.0 - bottom / mean,
        "rms": dense.std() / mean,
        "first-harmonic": 2.0 * abs(curve[1]),
    }
    for definition, value in expected.items():
        assert pulsed_fraction(curve, definition) == pytest.approx(value, abs=5e-5)


def test_truncation_below_zero_does_not_push_a_fraction_above_one() -> None:
    """An eclipsed curve dips slightly below zero; its trough counts as zero."""
    assert pulsed_fraction(wave(1.02), "peak-to-trough") == 1.0
    assert pulsed_fraction(wave(1.02), "above-minimum") == 1.0


def test_a_dark_star_has_no_pulse() -> None:
    """No mean: zero by every definition, noise or not."""
    dark = np.zeros(5, complex)
    for definition in (*EXTREMES, "rms", "first-harmonic"):
        assert pulsed_fraction(dark, definition) == 0.0
        assert noisy_pulsed_fraction(dark, definition, 1000.0, 16) == 0.0
    assert harmonic_fraction(dark, 1) == 0.0


def test_harmonic_fractions_are_amplitudes_over_the_mean() -> None:
    """1 + 0.3 cos x + 0.1 sin 2x, three times as bright; nothing beyond the last."""
    curve = 3.0 * np.array([1.0, 0.15, -0.05j])
    assert [harmonic_fraction(curve, number) for number in (1, 2, 3)] == pytest.approx(
        [0.3, 0.1, 0.0], abs=1e-15
    )


def statistic(profiles: Floats, definition: FractionDefinition) -> Floats:
    """Return a pulsed fraction read off the raw bins of each of many profiles."""
    top, bottom, mean = profiles.max(axis=1), profiles.min(axis=1), profiles.mean(axis=1)
    if definition == "peak-to-trough":
        return np.asarray((top - bottom) / (top + bottom))
    if definition == "full-swing":
        return np.asarray((top - bottom) / mean)
    if definition == "above-minimum":
        return np.asarray(1.0 - bottom / mean)
    if definition == "rms":
        return np.asarray(profiles.std(axis=1) / mean)
    bins = profiles.shape[1]
    turn = np.exp(2j * np.pi * (np.arange(bins) + 0.5) / bins)
    return np.asarray(2.0 * np.abs(profiles @ turn) / profiles.sum(axis=1))


def simulated(curve: Complexes, counts: float, bins: int, profiles: int = 20_000) -> Floats:
    """Return Poisson profiles of a light curve."""
    expected = bin_averages(curve, bins) / curve[0].real * counts / bins
    return np.random.default_rng(7).poisson(expected, (profiles, bins)).astype(float)


@pytest.mark.parametrize("definition", EXTREMES)
@pytest.mark.parametrize("amplitude", [0.0, 0.3, 0.8])
def test_raw_extremes_are_biased_as_simulated(
    amplitude: float, definition: FractionDefinition
) -> None:
    """Mean over simulated profiles of 16 bins with 100 counts each.

    Normal bins stand for Poisson ones: their skewness g = 0.1 moves an expected extreme by
    g (z² - 1)/6 standard deviations with z² near 3, 0.004 of the mean; the bias itself is 0.18.
    """
    curve = wave(amplitude, 0.13)
    values = statistic(simulated(curve, 1600.0, 16), definition)
    model = noisy_pulsed_fraction(curve, definition, 1600.0, 16)
    assert model == pytest.approx(values.mean(), abs=0.008)
    if amplitude == 0.0:
        assert model > 0.15


@pytest.mark.parametrize("definition", ["rms", "first-harmonic"])
@pytest.mark.parametrize(("amplitude", "bins"), [(0.0, 8), (0.1, 8), (0.1, 16), (0.5, 16)])
def test_noise_adds_in_square_as_simulated(
    amplitude: float, bins: int, definition: FractionDefinition
) -> None:
    """Root mean square over simulated profiles of 100 counts a bin, within five errors.

    The mean is read off the profile too: that is worth 1/counts, below 0.2 per cent here.
    """
    curve = wave(amplitude, 0.4)
    squares = statistic(simulated(curve, 100.0 * bins, bins), definition) ** 2
    model = noisy_pulsed_fraction(curve, definition, 100.0 * bins, bins) ** 2
    slack = 5.0 * squares.std() / math.sqrt(len(squares)) + 3.0 / (100.0 * bins) * model
    assert model == pytest.approx(squares.mean(), abs=slack)


@pytest.mark.parametrize("definition", [*EXTREMES, "rms", "first-harmonic"])
def test_noise_vanishes_with_many_counts(definition: FractionDefinition) -> None:
    """1e12 counts in 64 bins: what the bins, each an average, show without noise."""
    curve = random_curve(3, 4)
    profile = bin_averages(curve, 64)[None]
    model = noisy_pulsed_fraction(curve, definition, 1e12, 64)
    assert model == pytest.approx(float(statistic(profile, definition)[0]), abs=1e-5)
