"""Standard deviations fall as one over the root of exposure where no prior acts.

Source: additivity of Fisher information over independent counts (Cramér 1946, Mathematical
Methods of Statistics; Rao 1945, Bull. Calcutta Math. Soc. 37, 81).
"""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from exptime.information.precision import Experiment, precision_at, required_exposure
from exptime.instrument.records import BackgroundKnowledge
from exptime.observation.linearise import linearise
from exptime.star.resolution import Resolution
from tests.external.recording import Checks
from tests.makers.scenes import experiment_of, star_of, toy_edges, toy_response, two_spot_scene

pytestmark = pytest.mark.external


@pytest.fixture(scope="module", params=["known", "unknown"])
def bare(request: pytest.FixtureRequest) -> Experiment:
    """Two spots, no prior on anything; distance and area are held, as they trade with size."""
    scene, edges = two_spot_scene(star_of(400.0)), toy_edges(0.1)
    resolution = Resolution(harmonics=64, rings=8, redshift_terms=18)
    linear = linearise(scene, toy_response(edges), 32, [resolution] * 2)
    experiment = experiment_of(scene, linear, edges, 0.05, BackgroundKnowledge(kind=request.param))
    held = {"distance", "area_factor"}
    parameters = tuple(
        replace(p, prior_sigma=0.0 if p.name in held else math.inf, is_flat=False)
        for p in experiment.parameters
    )
    return replace(experiment, parameters=parameters)


def test_sigma_falls_with_the_root_of_exposure(checks: Checks, bare: Experiment) -> None:
    """Four decades, to 1e-9."""
    reference = precision_at(bare, 1e5)
    assert np.isfinite(reference.sigma).all()
    for exposure in (1e4, 1e6, 1e8):
        scaled = precision_at(bare, exposure)
        factor = math.sqrt(1e5 / exposure)
        checks.close(
            "sigma over its value at 1e5 s, by the root of exposure",
            scaled.sigma / reference.sigma, factor, relative=1e-9, at=f"{exposure:g} s",
            source="Cramér 1946; Rao 1945: information adds", kind="computed independently",
        )  # fmt: skip
        np.testing.assert_allclose(scaled.data_sigma, factor * reference.sigma, rtol=1e-9)


def test_half_the_error_takes_four_times_the_exposure(checks: Checks, bare: Experiment) -> None:
    """Through the search for an exposure, good to 1e-6."""
    base = precision_at(bare, 1e6).data_sigma[1] / 12.0
    long, short = (required_exposure(bare, "radius", share * base) for share in (0.5, 1.0))
    assert short == pytest.approx(1e6, rel=3e-6)
    checks.close(
        "exposure for half the error over that for the whole", long / short, 4.0, relative=5e-6,
        source="Cramér 1946; Rao 1945: information adds", kind="computed independently",
    )  # fmt: skip
