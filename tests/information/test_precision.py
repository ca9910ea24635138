"""Precision against exposure, and exposure for a precision."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest

from exptime.constants import SOLAR_MASS_KM
from exptime.information.matrix import Information
from exptime.information.parameters import prior_matrix
from exptime.information.precision import (
    QUANTITIES,
    Experiment,
    data_sigma,
    earliest,
    precision_at,
    required_exposure,
)
from exptime.instrument.records import BackgroundKnowledge
from exptime.observation.linearise import linearise
from exptime.star.records import HotSpot
from exptime.star.resolution import Resolution
from tests.makers.scenes import experiment_of, star_of, toy_edges, toy_response, two_spot_scene

EDGES = toy_edges(0.1)
RESOLUTION = Resolution(harmonics=64, rings=8, redshift_terms=16)


def make(
    spots: tuple[HotSpot, ...] = (), inclination: float = 60.0, kind: str = "unknown"
) -> Experiment:
    scene = two_spot_scene(star_of(300.0, inclination), spots)
    linear = linearise(scene, toy_response(EDGES), 32, [RESOLUTION] * len(scene.spots))
    knowledge = BackgroundKnowledge(kind=kind, fraction=0.1)  # type: ignore[arg-type]
    return experiment_of(scene, linear, EDGES, 0.05, knowledge)


@pytest.fixture(scope="module")
def experiment() -> Experiment:
    return make()


def changed(experiment: Experiment, **sigmas: float) -> Experiment:
    """Give parameters Gaussian priors."""
    parameters = tuple(
        replace(p, prior_sigma=sigmas[p.name], is_flat=False) if p.name in sigmas else p
        for p in experiment.parameters
    )
    return replace(experiment, parameters=parameters)


def test_sigma_is_the_inverse_of_data_and_priors(experiment: Experiment) -> None:
    """Against LU of the plain matrices, 1e-6 for a condition number of some 1e6."""
    precision = precision_at(experiment, 1e6)
    data = experiment.information_at(1e6)
    covariance = np.linalg.inv(data + prior_matrix(experiment.parameters))
    np.testing.assert_allclose(precision.covariance, covariance[:2, :2], rtol=1e-6)
    np.testing.assert_allclose(precision.sigma[:2], np.sqrt(np.diagonal(covariance)[:2]), rtol=1e-6)
    flat = prior_matrix(experiment.parameters, ("mass", "radius"))
    loose = np.linalg.inv(data + flat)
    np.testing.assert_allclose(precision.data_sigma[:2], np.sqrt(np.diagonal(loose)[:2]), rtol=1e-5)


def test_compactness_by_propagation(experiment: Experiment) -> None:
    """sigma(GM/Rc²) from the covariance of mass and radius."""
    precision = precision_at(experiment, 1e6)
    x = SOLAR_MASS_KM * 1.4 / 12.0
    gradient = np.array([x / 1.4, -x / 12.0])
    expected = math.sqrt(gradient @ precision.covariance @ gradient)
    assert experiment.value("compactness") == pytest.approx(x)
    assert precision.sigma[2] == pytest.approx(expected, rel=1e-8)


def test_data_sigma_leaves_out_flat_priors_only(experiment: Experiment) -> None:
    """Larger than sigma with flat priors; the same with Gaussian ones on both."""
    loose = precision_at(experiment, 1e5)
    assert np.all(loose.data_sigma > loose.sigma)
    gaussian = precision_at(changed(experiment, mass=0.1, radius=2.0), 1e5)
    np.testing.assert_allclose(gaussian.data_sigma, gaussian.sigma, rtol=1e-9)
    assert gaussian.sigma[0] <= 0.1
    assert gaussian.sigma_without_own_prior[0] > gaussian.sigma[0]


def test_own_prior_is_left_out_flat_or_gaussian(experiment: Experiment) -> None:
    """For mass its own, for compactness those of mass and radius."""
    known = changed(experiment, mass=0.1, radius=2.0)
    alone = precision_at(known, 1e5).sigma_without_own_prior
    data = known.information_at(1e5)
    for row, without in enumerate([("mass",), ("radius",), ("mass", "radius")]):
        covariance = np.linalg.inv(data + prior_matrix(known.parameters, without))
        direction = known.directions()[row]
        expected = math.sqrt(direction @ covariance @ direction)
        assert alone[row] == pytest.approx(expected, rel=1e-5)


def test_prior_sigmas(experiment: Experiment) -> None:
    """Of mass, radius and, by propagation, compactness."""
    known = changed(experiment, mass=0.14, radius=0.6)
    x = known.value("compactness")
    np.testing.assert_allclose(
        known.prior_sigmas(), [0.14, 0.6, x * math.hypot(0.1, 0.05)], rtol=1e-12
    )


def test_more_exposure_is_never_worse(experiment: Experiment) -> None:
    """Both sigmas fall with exposure."""
    rows = [precision_at(experiment, t) for t in np.geomspace(1e3, 1e8, 11)]
    for name in ("sigma", "data_sigma"):
        values = np.array([getattr(row, name) for row in rows])
        assert np.all(np.diff(values, axis=0) < 0.0)


@pytest.mark.parametrize("quantity", QUANTITIES)
@pytest.mark.parametrize("wanted", [0.03, 0.1])
def test_required_exposure_agrees_with_a_scan(
    experiment: Experiment, quantity: str, wanted: float
) -> None:
    """The first of 500 log-spaced exposures that suffices brackets the answer."""
    index = ["mass", "radius", "compactness"].index(quantity)
    value = (1.4, 12.0, SOLAR_MASS_KM * 1.4 / 12.0)[index]
    answer = required_exposure(experiment, QUANTITIES[index], wanted)
    scan = np.geomspace(1.0, 1e8, 500)
    reached = [precision_at(experiment, t).data_sigma[index] <= wanted * value for t in scan]
    first = int(np.argmax(reached))
    assert reached[first]
    assert scan[first - 1] < answer <= scan[first] * (1.0 + 1e-6)


def test_what_cannot_be_reached_takes_for_ever(experiment: Experiment) -> None:
    """Infinite beyond 1e8 s; what the priors alone meet takes no time."""
    assert required_exposure(experiment, "radius", 1e-7) == math.inf
    assert required_exposure(changed(experiment, radius=0.1), "radius", 0.05) == 0.0


@pytest.mark.parametrize("threshold", [1.5, 77.0, 3.3e4])
def test_earliest_finds_a_threshold(threshold: float) -> None:
    """One part in a million, on the side where the condition holds."""

    def reached(value: float) -> bool:
        return value >= threshold

    found = earliest(reached, 1.0, 1e5)
    assert threshold <= found <= threshold * (1.0 + 2e-6)


@pytest.mark.parametrize(
    ("reached", "expected"), [(lambda _: True, 0.0), (lambda _: False, math.inf)]
)
def test_earliest_at_its_ends(reached: Callable[[float], bool], expected: float) -> None:
    """Always true: no exposure at all; never: infinite."""
    assert earliest(reached, 2.0, 9.0) == expected


def test_a_fixed_parameter_is_no_longer_free(experiment: Experiment) -> None:
    """Holding the distance is the limit of a vanishing uncertainty."""
    held = precision_at(changed(experiment, distance=0.0), 1e6)
    tight = precision_at(changed(experiment, distance=1e-4), 1e6)
    np.testing.assert_allclose(held.sigma, tight.sigma, rtol=1e-5)


def test_a_hidden_spot_constrains_nothing_and_breaks_nothing() -> None:
    """Beside a visible spot it changes no precision; its priors keep the matrix regular."""
    seen = HotSpot(colatitude=1.2, longitude=0.2, angular_radius=0.3, temperature_kev=0.12)
    hidden = replace(seen, colatitude=3.1, angular_radius=0.1)
    one, both = make((seen,), 25.0), make((seen, hidden), 25.0)
    alone, together = precision_at(one, 1e6), precision_at(both, 1e6)
    np.testing.assert_allclose(together.data_sigma, alone.data_sigma, rtol=1e-6)
    assert math.isfinite(together.condition)


def test_no_counts_leave_the_priors() -> None:
    """A star that shows no spot: sigma is the prior, data_sigma infinite."""
    hidden = HotSpot(colatitude=3.1, longitude=0.0, angular_radius=0.1, temperature_kev=0.1)
    dark = make((hidden,), 20.0, "fraction")
    precision = precision_at(dark, 1e6)
    np.testing.assert_allclose(precision.sigma[:2], [1.5 / 12**0.5, 7 / 12**0.5], rtol=1e-12)
    assert np.isinf(precision.data_sigma).all()
    assert required_exposure(dark, "radius", 0.5) == math.inf


def test_a_common_phase_brings_no_information(experiment: Experiment) -> None:
    """All spots shifted by whole bins: the same precision in mass and radius."""
    moved = tuple(
        replace(spot, longitude=spot.longitude + 5 * math.pi / 16)
        for spot in two_spot_scene().spots
    )
    np.testing.assert_allclose(
        precision_at(make(moved), 1e6).data_sigma,
        precision_at(experiment, 1e6).data_sigma,
        rtol=1e-6,
    )


def test_data_sigma_of_one_quantity(experiment: Experiment) -> None:
    """The short route gives the same number."""
    for row, quantity in enumerate(QUANTITIES):
        assert data_sigma(experiment, quantity, 3e5) == pytest.approx(
            precision_at(experiment, 3e5).data_sigma[row], rel=1e-12
        )


def test_two_observations_in_sequence_are_one_long_one(experiment: Experiment) -> None:
    """Information without known levels is proportional to exposure."""
    information: Information = experiment.information
    one, ten = information.at(np.array([1e5, 1e6]))
    np.testing.assert_allclose(ten, 10.0 * one, rtol=1e-12)
