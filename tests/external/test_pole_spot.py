"""A spot centred on the rotation pole constrains neither mass nor radius.

Source: Lo, Miller, Bhattacharyya & Lamb 2013, ApJ 776, 19 (arXiv:1304.2330): spots near the
rotation pole give no useful constraint; exactly there nothing varies, so that all that remains
is one spectrum, in which mass, radius, size, temperature and distance exchange.
"""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from exptime.information.precision import Experiment, precision_at, required_exposure
from exptime.instrument.records import BackgroundKnowledge
from exptime.observation.linearise import linearise
from exptime.star.records import HotSpot
from exptime.star.resolution import Resolution
from tests.external.recording import Checks
from tests.makers.scenes import experiment_of, star_of, toy_edges, toy_response, two_spot_scene

pytestmark = pytest.mark.external


def at_the_pole(kind: str, priors: bool) -> Experiment:
    spot = HotSpot(colatitude=0.0, longitude=0.0, angular_radius=0.3, temperature_kev=0.12)
    scene, edges = two_spot_scene(star_of(400.0, 50.0), (spot,)), toy_edges(0.1)
    resolution = Resolution(harmonics=64, rings=8, redshift_terms=18)
    linear = linearise(scene, toy_response(edges), 32, [resolution])
    knowledge = BackgroundKnowledge(kind=kind)  # type: ignore[arg-type]
    experiment = experiment_of(scene, linear, edges, 0.02, knowledge)
    if priors:
        return experiment
    parameters = tuple(
        replace(p, prior_sigma=math.inf, is_flat=False) for p in experiment.parameters
    )
    return replace(experiment, parameters=parameters)


def test_without_priors_nothing_is_constrained() -> None:
    """Under an unknown background the steady spectrum itself is lost: infinite, not large."""
    experiment = at_the_pole("unknown", priors=False)
    for exposure in (1e5, 1e7):
        precision = precision_at(experiment, exposure)
        assert np.isinf(precision.data_sigma).all()
        assert precision.condition == math.inf
    assert required_exposure(experiment, "radius", 0.5) == math.inf


@pytest.mark.parametrize("kind", ["known", "unknown"])
def test_with_priors_the_radius_is_not_measured(checks: Checks, kind: str) -> None:
    """Flat priors on the other parameters: data_sigma stays beyond the radius prior's own width."""
    experiment = at_the_pole(kind, priors=True)
    precision = precision_at(experiment, 1e6)
    prior = experiment.prior_sigmas()
    for row, name in enumerate(("mass", "radius")):
        checks.between(
            "spot on the rotation pole: data_sigma over the width of the prior",
            float(precision.data_sigma[row] / prior[row]), 5.0, math.inf,
            at=f"{name}, {kind} background", theirs="no useful constraint",
            source="Lo, Miller, Bhattacharyya & Lamb 2013, ApJ 776, 19, abstract",
            kind="published",
        )  # fmt: skip
    assert required_exposure(experiment, "radius", 0.10) == math.inf


def test_away_from_the_pole_the_same_spot_does_constrain() -> None:
    """The statement is about the pole, not about the example."""
    spot = HotSpot(colatitude=1.2, longitude=0.0, angular_radius=0.3, temperature_kev=0.12)
    scene, edges = two_spot_scene(star_of(400.0, 80.0), (spot,)), toy_edges(0.1)
    resolution = Resolution(harmonics=64, rings=8, redshift_terms=18)
    linear = linearise(scene, toy_response(edges), 32, [resolution])
    experiment = experiment_of(scene, linear, edges, 0.02, BackgroundKnowledge(kind="unknown"))
    assert required_exposure(experiment, "radius", 0.10) < 1e8
