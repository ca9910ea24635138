"""The likelihood about a geometry: model, truth, priors and hard limits."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from exptime.arrays import Floats
from exptime.information.covariance import invert
from exptime.information.model import Bounds, Model, Penalty
from exptime.information.parameters import prior_matrix
from exptime.information.precision import QUANTITIES, Experiment, Quantity
from exptime.observation.linearise import linearise
from exptime.study.case import Geometry, Question, experiment_of, resolutions_for, scene_of
from exptime.study.profile import Setting


def setting_of(
    question: Question, geometry: Geometry, exposure_s: float
) -> tuple[Setting, Experiment, Floats]:
    """Return the likelihood about a geometry, its information, and the free covariance.

    Flat priors on mass and radius are left out unless a quantity is unconstrained without them.
    """
    star, spots = geometry
    resolutions = resolutions_for(question, geometry)
    scene = scene_of(question.target, star, spots)
    bins = question.instrument.phase_bins
    linearised = linearise(scene, question.response, bins, resolutions)
    experiment = experiment_of(question, star, linearised)
    model = Model(
        scene=scene,
        names=tuple(parameter.name for parameter in experiment.parameters),
        response=question.response,
        phase_bins=bins,
        resolutions=tuple(resolutions),
        exposure_s=exposure_s,
        background_per_s=question.instrument.background_per_s,
        levels=question.levels,
    )
    data = experiment.information_at(exposure_s)
    without: tuple[str, ...] = ("mass", "radius")
    inverse = invert(data + prior_matrix(experiment.free, without, flat_only=True))
    covariance = inverse.covariance(np.eye(len(data)))
    if not np.all(np.isfinite(covariance)):
        without = ()
        covariance = invert(data + prior_matrix(experiment.free)).covariance(np.eye(len(data)))
    information = [
        0.0
        if parameter.is_fixed or (parameter.is_flat and parameter.name in without)
        else parameter.prior_information
        for parameter in experiment.parameters
    ]
    truth = model.vector_of(scene)
    penalty = Penalty(
        center=truth,
        information=np.array(information),
        level_center=np.zeros(len(model.levels.prior_information)),
    )
    setting = Setting(model=model, truth=truth, penalty=penalty, is_free=experiment.is_free)
    return setting, experiment, covariance


def hard_limits(names: Sequence[str]) -> Bounds:
    """Return the limits that parameters cannot pass: angles in range, nothing negative."""
    lower, upper = np.full(len(names), -np.inf), np.full(len(names), np.inf)
    for index, name in enumerate(names):
        kind = name.rsplit(".", maxsplit=1)[-1]
        low, high = {
            "cos_inclination": (0.0, 1.0 - 1e-6),
            "column_density": (0.0, math.inf),
            "colatitude": (0.0, math.pi),
            "angular_radius": (1e-4, 0.5 * math.pi),
            "distance": (1e-3, math.inf),
            "area_factor": (1e-3, math.inf),
        }.get(kind, (-math.inf, math.inf))
        lower[index], upper[index] = low, high
    return Bounds(lower=lower, upper=upper)


def sigma_of(experiment: Experiment, covariance: Floats, quantity: Quantity) -> float:
    """Return the standard deviation of a quantity by the information matrix."""
    row = experiment.directions()[QUANTITIES.index(quantity)]
    return math.sqrt(max(float(row @ covariance @ row), 0.0))
