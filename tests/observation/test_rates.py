"""Expected counts against a twin written as loops."""

from __future__ import annotations

import cmath
import math
from dataclasses import replace

import numpy as np
import pytest

from exptime.arrays import Floats
from exptime.observation.rates import source_rates
from exptime.observation.response import Response
from exptime.observation.scene import Scene
from exptime.star.moments import spot_moments
from exptime.star.records import Emission
from exptime.star.resolution import Resolution
from exptime.star.view import view_of
from tests.makers.scenes import star_of, toy_edges, toy_response, two_spot_scene

RESOLUTION = Resolution(harmonics=12, rings=4, redshift_terms=18)


def twin(scene: Scene, response: Response, bins: int, resolution: Resolution) -> Floats:
    """Loop over spots, energies, harmonics, bins and channels; constants written out."""
    rates = np.zeros((bins, response.matrix.shape[1]))
    distance_km = scene.distance_pc * 3.0856775814913673e13
    prefactor = 2.0 * 2.99792458e10 / 12.398419843320026e-8**3
    for spot in scene.spots:
        moments = spot_moments(view_of(scene.star), scene.emission, spot, resolution)
        low, high = moments.redshift_range
        for node, energy in enumerate(response.nodes_kev):
            points = np.polynomial.chebyshev.chebpts1(resolution.redshift_terms)
            e = 0.5 * (low + high) + 0.5 * (high - low) * points
            planck = 1.0 / np.expm1(energy * e / spot.temperature_kev)
            series = np.polynomial.chebyshev.chebfit(points, planck, resolution.redshift_terms - 1)
            through = math.exp(-response.cross_section_cm2[node] * scene.column_cm2)
            scale = prefactor * energy**2 * through / distance_km**2
            for k in range(bins):
                total = 0.0
                for m in range(resolution.harmonics + 1):
                    amplitude = complex(np.sum(moments.values[m] * series))
                    turn = 2.0 * math.pi * m
                    amplitude *= cmath.exp(1j * m * spot.longitude)
                    amplitude *= cmath.exp(1j * turn * (k + 0.5) / bins)
                    for width in (1.0 / bins, scene.star.spin_hz * response.time_bin_s):
                        x = 0.5 * turn * width
                        amplitude *= math.sin(x) / x if x else 1.0
                    jitter = turn * scene.star.spin_hz * response.clock_error_s
                    amplitude *= math.exp(-0.5 * jitter**2)
                    total += amplitude.real * (2.0 if m else 1.0)
                for channel in range(rates.shape[1]):
                    rates[k, channel] += total * scale * response.matrix[node, channel]
    return rates


@pytest.mark.parametrize("h", [0.0, 0.5])
def test_rates_are_those_of_loops(h: float) -> None:
    """Two spots, absorption, redistribution between channels and losses of timing: 1e-12."""
    edges = toy_edges(0.45)
    response = replace(toy_response(edges, 2), time_bin_s=2e-4, clock_error_s=8e-5)
    rng = np.random.default_rng(2)
    mixed = response.matrix @ rng.uniform(0.0, 1.0, (len(edges) - 1, len(edges) - 1))
    response = replace(response, matrix=mixed)
    scene = replace(
        two_spot_scene(star_of(400.0)),
        emission=Emission(model="limb-darkened", coefficient=h),
        column_cm2=4e20,
    )
    got = source_rates(scene, response, 8, [RESOLUTION, RESOLUTION])
    expected = twin(scene, response, 8, RESOLUTION)
    np.testing.assert_allclose(got, expected, rtol=0, atol=1e-12 * expected.max())


def test_spots_may_have_resolutions_of_their_own() -> None:
    """The rate is the sum of each spot alone."""
    scene, response = two_spot_scene(), toy_response(toy_edges(0.3))
    coarse, fine = RESOLUTION, replace(RESOLUTION, harmonics=40, rings=8)
    both = source_rates(scene, response, 16, [coarse, fine])
    alone = [
        source_rates(replace(scene, spots=(spot,)), response, 16, [resolution])
        for spot, resolution in zip(scene.spots, (coarse, fine), strict=True)
    ]
    np.testing.assert_allclose(both, alone[0] + alone[1], atol=1e-13 * both.max())


def test_finer_channels_add_up() -> None:
    """Pairs of channels of 50 eV are channels of 100 eV."""
    scene = two_spot_scene()
    resolutions = [replace(RESOLUTION, redshift_terms=14)] * 2
    fine = source_rates(scene, toy_response(toy_edges(0.05), 6), 16, resolutions)
    coarse = source_rates(scene, toy_response(toy_edges(0.1), 10), 16, resolutions)
    np.testing.assert_allclose(fine[:, ::2] + fine[:, 1::2], coarse, rtol=1e-9)
