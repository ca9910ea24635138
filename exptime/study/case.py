"""One geometry forecast: the unit of work that is spread over processes."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from exptime.arrays import Booleans, Floats
from exptime.geometry.resampling import weighted_quantiles
from exptime.information.matrix import (
    BackgroundLevels,
    background_levels,
    information_per_second,
)
from exptime.information.parameters import parameters_of
from exptime.information.precision import (
    Experiment,
    precision_at,
    required_exposure,
)
from exptime.instrument.records import Instrument
from exptime.observation.linearise import Linearised, linearise
from exptime.observation.response import Response
from exptime.observation.scene import Scene
from exptime.star.convergence import Accuracy, resolution_needed
from exptime.star.records import HotSpot, Star
from exptime.star.resolution import Resolution
from exptime.star.view import view_of
from exptime.study.records import Goal
from exptime.target.records import Target

TOLERANCE = 4e-5
MOST_HARMONICS = 128
"""What the pulses of a forecast reach: sigma(radius) is then good to some parts in a thousand."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Question:
    """What is asked of every geometry; sent to every process.

    Parameters
    ----------
    target : Target
        The target.
    instrument : Instrument
        The instrument.
    response : Response
        Its channels, behind the target's column.
    exposures_s : ndarray, shape (n_exposure,)
        Exposures, s.
    goals : tuple of Goal
        Wanted precisions.
    """

    target: Target
    instrument: Instrument
    response: Response
    exposures_s: Floats
    goals: tuple[Goal, ...]

    @property
    def levels(self) -> BackgroundLevels:
        """Background levels that the instrument's knowledge leaves free."""
        return background_levels(
            self.instrument.background_knowledge,
            self.instrument.background_per_s,
            self.instrument.channel_edges_kev,
        )


@dataclass(frozen=True, slots=True, kw_only=True)
class Case:
    """The answer for one geometry; second axes run over mass, radius and compactness.

    Parameters
    ----------
    sigma, data_sigma : ndarray, shape (n_exposure, 3)
        With every prior, and without the flat ones on mass and radius.
    is_prior_limited : ndarray of bool, shape (n_exposure, 3)
        Whether sigma without the own prior exceeds that prior's standard deviation.
    prior_sigma : ndarray, shape (3,)
        Standard deviations of the own priors.
    covariance : ndarray, shape (n_exposure, 2, 2)
        Of mass and radius with every prior.
    required_s : ndarray, shape (n_goal,)
        Exposure for each goal, s; infinite where not reached.
    condition : float
        Of the scaled matrix at the longest exposure.
    source_per_s : ndarray, shape (n_phase, n_channel)
        Expected source rate.
    hidden_spots : int
        Spots that never show.
    floored_share : float
        Share of floored cells.
    """

    sigma: Floats
    data_sigma: Floats
    is_prior_limited: Booleans
    prior_sigma: Floats
    covariance: Floats
    required_s: Floats
    condition: float
    source_per_s: Floats
    hidden_spots: int
    floored_share: float


Geometry = tuple[Star, tuple[HotSpot, ...]]


def scene_of(target: Target, star: Star, spots: tuple[HotSpot, ...]) -> Scene:
    """Put a star at the target's distance, behind its column."""
    return Scene(
        star=star,
        spots=spots,
        emission=target.emission,
        distance_pc=target.distance.value,
        column_cm2=target.column_density.value,
    )


def resolutions_for(question: Question, geometry: Geometry) -> list[Resolution]:
    """Choose the resolution of each spot."""
    star, spots = geometry
    nodes = question.response.nodes_kev
    accuracy = Accuracy(
        phase_bins=question.instrument.phase_bins,
        lowest_kev=float(nodes[0]),
        highest_kev=float(nodes[-1]),
        tolerance=TOLERANCE,
        most_harmonics=max(MOST_HARMONICS, 2 * question.instrument.phase_bins),
    )
    view = view_of(star)
    return [resolution_needed(view, spot, question.target.emission, accuracy) for spot in spots]


def answer(
    question: Question, geometry: Geometry, resolutions: Sequence[Resolution] | None = None
) -> Case:
    """Forecast one geometry.

    Parameters
    ----------
    question : Question
        What is asked.
    geometry : tuple
        Star and spots.
    resolutions : sequence of Resolution, optional
        Chosen by need when not given.
    """
    star, spots = geometry
    chosen = resolutions or resolutions_for(question, geometry)
    scene = scene_of(question.target, star, spots)
    linearised = linearise(scene, question.response, question.instrument.phase_bins, chosen)
    experiment = experiment_of(question, star, linearised)
    precisions = [precision_at(experiment, float(time)) for time in question.exposures_s]
    prior = experiment.prior_sigmas()
    return Case(
        sigma=np.array([precision.sigma for precision in precisions]),
        data_sigma=np.array([precision.data_sigma for precision in precisions]),
        is_prior_limited=np.array(
            [precision.sigma_without_own_prior > prior for precision in precisions]
        )
        | (prior == 0.0),
        prior_sigma=prior,
        covariance=np.array([precision.covariance for precision in precisions]),
        required_s=np.array(
            [
                required_exposure(experiment, goal.quantity, goal.precision)
                for goal in question.goals
            ]
        ),
        condition=precisions[-1].condition,
        source_per_s=linearised.source_per_s,
        hidden_spots=sum(linearised.is_hidden),
        floored_share=linearised.floored_share,
    )


def index_at(cases: Sequence[Case], weights: Floats, share: float) -> int:
    """Index of the geometry whose data_sigma(radius) is nearest a weighted quantile.

    Taken at the longest exposure; where the quantile is infinite, the widest finite one, or else
    the heaviest geometry.
    """
    sigma = np.array([case.data_sigma[-1, 1] for case in cases])
    center = float(weighted_quantiles(sigma, weights, np.array([share]))[0])
    if np.isfinite(center):
        return int(np.argmin(np.abs(sigma - center)))
    finite = np.where(np.isfinite(sigma), sigma, -1.0)
    return int(np.argmax(finite if finite.max() >= 0.0 else weights))


def experiment_of(question: Question, star: Star, linearised: Linearised) -> Experiment:
    """Join the information of the data with what is known beforehand."""
    instrument = question.instrument
    # The grey factor multiplies the source: its derivative is the source itself.
    derivatives = np.concatenate([linearised.derivatives, linearised.source_per_s[None]])
    spot_count = len(linearised.is_hidden)
    return Experiment(
        information=information_per_second(
            linearised.source_per_s, derivatives, instrument.background_per_s, question.levels
        ),
        parameters=parameters_of(
            question.target, instrument.area_uncertainty, spot_count, star.cos_inclination
        ),
        mass_msun=star.mass_msun,
        radius_km=star.radius_km,
    )


def correlation(covariance: Floats) -> float:
    """Correlation coefficient of a 2 x 2 covariance; zero where it has no meaning."""
    if not np.all(np.isfinite(covariance)):
        return 0.0
    product = math.sqrt(float(covariance[0, 0] * covariance[1, 1]))
    return float(covariance[0, 1]) / product if product > 0.0 else 0.0
