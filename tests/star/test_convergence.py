"""Pulses converge: what is chosen suffices."""

from __future__ import annotations

import numpy as np
import pytest

from exptime.star.convergence import Accuracy, photon_flux, resolution_needed
from exptime.star.moments import spot_moments
from exptime.star.pulse import bin_averages, spot_harmonics
from exptime.star.records import Emission, HotSpot
from exptime.star.view import view_of
from tests.makers.scenes import random_spot, random_star, star_of

ACCURACY = Accuracy(phase_bins=32, lowest_kev=0.3, highest_kev=3.0)


def change_on_doubling(seed: int) -> float:
    """Largest change of a bin over the peak when every count is doubled, one random spot."""
    rng = np.random.default_rng(seed)
    star, spot = random_star(rng), random_spot(rng)
    emission = Emission(model="limb-darkened", coefficient=float(rng.choice([0.0, 0.5])))
    view = view_of(star)
    chosen = resolution_needed(view, spot, emission, ACCURACY)
    coarse, fine = (
        bin_averages(
            spot_harmonics(
                spot_moments(view, emission, spot, resolution), spot, ACCURACY.energies_kev
            ),
            32,
        )
        for resolution in (chosen, chosen.doubled())
    )
    peak = np.abs(fine).max(axis=0)
    return float(np.max(np.abs(coarse - fine).max(axis=0) / np.where(peak > 0.0, peak, 1.0)))


@pytest.mark.parametrize("seed", [0, 1, 2, 3, 4, 7])
def test_doubling_the_resolution_leaves_the_pulse(seed: int) -> None:
    """Random star of 1 to 700 Hz, random spot: 3e-6 of the peak for a tolerance of 1e-6."""
    assert change_on_doubling(seed) < 3e-6


@pytest.mark.slow
@pytest.mark.parametrize("seed", range(100, 130))
def test_doubling_the_resolution_leaves_the_pulse_of_many_stars(seed: int) -> None:
    """Thirty more stars."""
    assert change_on_doubling(seed) < 3e-6


def test_eclipsed_pulses_ask_for_more_harmonics_than_smooth_ones() -> None:
    """A small spot that sets has a kink."""
    view, emission = view_of(star_of(300.0, 80.0)), Emission()
    setting = HotSpot(colatitude=1.9, longitude=0.0, angular_radius=0.02, temperature_kev=0.1)
    smooth = HotSpot(colatitude=0.3, longitude=0.0, angular_radius=0.5, temperature_kev=0.1)
    many = resolution_needed(view, setting, emission, ACCURACY)
    few = resolution_needed(view, smooth, emission, ACCURACY)
    assert many.harmonics > few.harmonics
    assert many.harmonics <= ACCURACY.most_harmonics


def test_flux_is_never_negative() -> None:
    """The truncated series of an eclipsed spot is floored at zero."""
    spot = HotSpot(colatitude=2.3, longitude=0.0, angular_radius=0.05, temperature_kev=0.1)
    flux = photon_flux(star_of(300.0, 75.0), (spot,), Emission(), 100.0, np.array([0.5, 1.5]), 32)
    assert flux.shape == (32, 2)
    assert flux.min() >= 0.0
    assert flux.max() > 0.0
