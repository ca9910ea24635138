"""The pulse: symmetries it must have, and bins."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from exptime.arrays import Complexes, Floats
from exptime.star.convergence import photon_flux
from exptime.star.pulse import bin_averages, longitude_factor, photon_harmonics
from exptime.star.records import Emission, HotSpot, Star
from exptime.star.resolution import Resolution
from exptime.star.view import view_of
from tests.makers.scenes import star_of

KEV = np.array([0.3, 1.0, 2.0])
RESOLUTION = Resolution(harmonics=32, rings=8, redshift_terms=14)
SPOTS = (
    HotSpot(colatitude=1.2, longitude=0.2, angular_radius=0.12, temperature_kev=0.12),
    HotSpot(colatitude=2.2, longitude=3.0, angular_radius=0.4, temperature_kev=0.11),
)


def harmonics(
    star: Star, spots: tuple[HotSpot, ...], emission: Emission | None = None, pc: float = 100.0
) -> Complexes:
    return photon_harmonics(
        view_of(star), spots, emission or Emission(), pc, KEV, [RESOLUTION] * len(spots)
    )


def close(one: Complexes | Floats, other: Complexes | Floats, tolerance: float = 1e-12) -> None:
    """Compare relative to the largest value at each energy."""
    assert np.all(np.abs(one - other).max(axis=0) < tolerance * np.abs(other).max(axis=0))


@settings(max_examples=25)
@given(st.floats(-7.0, 7.0))
def test_rotating_all_longitudes_shifts_the_phase(angle: float) -> None:
    """Later longitudes cross earlier: c_m gains exp(i m angle)."""
    moved = tuple(replace(spot, longitude=spot.longitude + angle) for spot in SPOTS)
    expected = harmonics(star_of(400.0), SPOTS) * longitude_factor(angle, 32)[:, None]
    close(harmonics(star_of(400.0), moved), expected)


def test_a_quarter_turn_in_longitude_is_a_quarter_of_the_bins() -> None:
    """The spot ahead by 90 degrees arrives eight of thirty-two bins earlier."""
    one = photon_flux(star_of(300.0), SPOTS[:1], Emission(), 100.0, KEV, 32)
    ahead = (replace(SPOTS[0], longitude=SPOTS[0].longitude + math.pi / 2),)
    other = photon_flux(star_of(300.0), ahead, Emission(), 100.0, KEV, 32)
    close(other, np.roll(one, -8, axis=0))


@pytest.mark.parametrize("longitude_deg", [0.0, 90.0, 200.0])
def test_a_spot_peaks_near_one_minus_its_longitude(longitude_deg: float) -> None:
    """Slow star: the peak lies within one bin of 1 - L/360."""
    spot = replace(SPOTS[0], longitude=math.radians(longitude_deg))
    flux = photon_flux(star_of(1.0), (spot,), Emission(), 100.0, KEV, 64)
    peak = (np.argmax(flux[:, 0]) + 0.5) / 64
    gap = (peak - (1.0 - longitude_deg / 360.0) + 0.5) % 1.0 - 0.5
    assert abs(gap) < 1.0 / 64


@pytest.mark.parametrize("colatitude", [0.0, math.pi])
@pytest.mark.parametrize("spin", [1.0, 650.0])
def test_a_spot_about_a_pole_does_not_pulse(colatitude: float, spin: float) -> None:
    """Every ring is whole: the harmonics vanish to rounding of the mean."""
    spot = replace(SPOTS[0], colatitude=colatitude, angular_radius=1.1)
    amplitude = np.abs(harmonics(star_of(spin, 70.0), (spot,)))
    assert np.all(amplitude[1:] < 1e-13 * amplitude[0])
    assert np.all(amplitude[0] > 0.0)


@pytest.mark.parametrize("spin", [10.0, 650.0])
def test_mirror_about_the_equator(spin: float) -> None:
    """Inclination and all colatitudes reflected: the same pulse."""
    star = star_of(spin, 50.0)
    mirrored = tuple(replace(spot, colatitude=math.pi - spot.colatitude) for spot in SPOTS)
    other = harmonics(replace(star, cos_inclination=-star.cos_inclination), mirrored)
    close(other, harmonics(star, SPOTS), 1e-11)


def test_spots_add_and_distance_dilutes() -> None:
    """The sum of both alone; a quarter at twice the distance."""
    star = star_of(500.0)
    both = harmonics(star, SPOTS)
    close(harmonics(star, SPOTS[:1]) + harmonics(star, SPOTS[1:]), both)
    close(4.0 * harmonics(star, SPOTS, pc=200.0), both)


def test_limb_darkening_without_a_coefficient_is_a_blackbody() -> None:
    """And with one it changes the pulse."""
    star = star_of(300.0)
    plain, law = harmonics(star, SPOTS), Emission(model="limb-darkened", coefficient=0.0)
    close(harmonics(star, SPOTS, law), plain, 1e-15)
    darkened = harmonics(star, SPOTS, replace(law, coefficient=0.6))
    assert np.abs(darkened - plain).max() > 0.01 * np.abs(plain).max()


def test_slow_rotation_looks_the_same_forwards_and_backwards() -> None:
    """As the spin vanishes the pulse of one spot is symmetric: harmonics become real."""
    spot = replace(SPOTS[0], longitude=0.0)
    for spin in (1e-2, 1e-3):
        slow = harmonics(star_of(spin), (spot,))
        assert np.abs(slow.imag).max() < 2e-3 * spin * np.abs(slow).max()


@given(st.floats(0.0, 0.9), st.floats(0.0, 1.0), st.integers(1, 6), st.integers(7, 64))
def test_bins_average_a_sinusoid_exactly(
    amplitude: float, phase: float, number: int, bins: int
) -> None:
    """1 + A cos(2 pi (m phi - phi0)) between edges, in closed form."""
    series = np.zeros((number + 1, 1), complex)
    series[0] = 1.0
    series[number] = 0.5 * amplitude * np.exp(-2j * math.pi * phase)
    edges = np.arange(bins + 1) / bins
    primitive = np.sin(2 * math.pi * (number * edges - phase)) / (2 * math.pi * number)
    expected = 1.0 + amplitude * np.diff(primitive) * bins
    np.testing.assert_allclose(bin_averages(series, bins)[:, 0], expected, atol=1e-13)


def test_finer_bins_average_to_coarser_ones() -> None:
    """Pairs of 64 bins are 32 bins."""
    series = harmonics(star_of(600.0), SPOTS)
    fine = bin_averages(series, 64)
    close(0.5 * (fine[::2] + fine[1::2]), bin_averages(series, 32), 1e-13)
