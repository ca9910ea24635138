"""How long a pulse and the matrix take, and how long the slow twin takes beside them.

Run by ``pytest tests/benchmarks``.
"""

from __future__ import annotations

import time

import numpy as np
import pytest
from pytest_benchmark.fixture import BenchmarkFixture

from exptime.arrays import Floats
from exptime.information.precision import precision_at
from exptime.instrument.records import BackgroundKnowledge
from exptime.observation.linearise import Linearised, linearise
from exptime.observation.rates import source_rates
from exptime.observation.scene import Scene
from exptime.star.pulse import bin_averages, photon_harmonics
from exptime.star.records import Emission
from exptime.star.view import view_of
from tests.benchmarks.phase_grid import phase_grid_derivatives, phase_grid_rates
from tests.makers.scenes import (
    experiment_of,
    resolutions_of,
    star_of,
    toy_edges,
    toy_response,
    two_spot_scene,
)

EDGES = toy_edges(0.05)
RESPONSE = toy_response(EDGES)
KNOWLEDGE = BackgroundKnowledge(kind="fraction", fraction=0.1)
GOALS_MS = {"pulse": 5.0, "matrix": 80.0}
GOAL_RATIO = 500.0


@pytest.fixture(scope="module")
def scene() -> Scene:
    """Two ordinary spots on a star of 300 Hz; one is eclipsed for part of the turn."""
    return two_spot_scene(star_of(300.0))


def test_pulse_of_two_spots(benchmark: BenchmarkFixture, scene: Scene) -> None:
    """Photon flux at eight energies in 32 bins."""
    resolutions, energies = resolutions_of(scene), np.linspace(0.3, 3.0, 8)

    def pulse() -> float:
        harmonics = photon_harmonics(
            view_of(scene.star), scene.spots, Emission(), 300.0, energies, resolutions
        )
        return float(bin_averages(harmonics, 32).sum())

    benchmark.extra_info["goal_ms"] = GOALS_MS["pulse"]
    benchmark.extra_info["resolutions"] = [str(r) for r in resolutions]
    assert benchmark(pulse) > 0.0


def test_counts_of_two_spots(benchmark: BenchmarkFixture, scene: Scene) -> None:
    """The same through 54 channels of six energies each."""
    resolutions = resolutions_of(scene)
    assert benchmark(source_rates, scene, RESPONSE, 32, resolutions).sum() > 0.0


def test_matrix_of_thirteen_parameters(benchmark: BenchmarkFixture, scene: Scene) -> None:
    """Rates and all derivatives at a resolution already chosen."""
    resolutions = resolutions_of(scene)
    benchmark.extra_info["goal_ms"] = GOALS_MS["matrix"]
    linear: Linearised = benchmark(linearise, scene, RESPONSE, 32, resolutions)
    assert linear.derivatives.shape[0] == 13


def test_choice_of_resolution(benchmark: BenchmarkFixture, scene: Scene) -> None:
    """Once a geometry."""
    assert len(benchmark(resolutions_of, scene)) == 2


def test_matrix_against_an_interpolated_phase_grid(
    benchmark: BenchmarkFixture, scene: Scene
) -> None:
    """The slow twin at the size that reaches 1 per cent in sigma(radius): 1024 phases, 16² cells.

    One round, as it takes a minute; the ratio to the matrix above stands in extra_info.
    """
    resolutions = resolutions_of(scene)
    linear = linearise(scene, RESPONSE, 32, resolutions)
    best = min(_seconds(scene) for _ in range(7))
    start = time.perf_counter()
    slow: Floats = benchmark.pedantic(  # type: ignore[no-untyped-call]
        phase_grid_derivatives, args=(scene, RESPONSE, 32, 1024, 16), rounds=1, iterations=1
    )
    taken = time.perf_counter() - start
    rates = phase_grid_rates(scene, RESPONSE, 32, 1024, 16)
    peak = linear.source_per_s.max()
    assert np.abs(rates - linear.source_per_s).max() < 1e-3 * peak
    twin = Linearised(
        source_per_s=np.maximum(rates, 1e-6 * rates.max(axis=0)),
        names=linear.names,
        derivatives=slow,
        is_hidden=linear.is_hidden,
        floored_share=0.0,
    )
    sigma = [
        precision_at(experiment_of(scene, either, EDGES, 0.02, KNOWLEDGE), 1e6).data_sigma[1]
        for either in (twin, linear)
    ]
    assert sigma[0] == pytest.approx(sigma[1], rel=0.02)
    ratio = taken / best
    benchmark.extra_info["sigma_radius_over_fast"] = float(sigma[0] / sigma[1])
    benchmark.extra_info["times_slower"] = float(ratio)
    benchmark.extra_info["goal_times_slower"] = GOAL_RATIO
    print(f"\nslow twin: {taken:.1f} s, {ratio:.0f} times the matrix")


def _seconds(scene: Scene) -> float:
    resolutions = resolutions_of(scene)
    start = time.perf_counter()
    linearise(scene, RESPONSE, 32, resolutions)
    return time.perf_counter() - start
