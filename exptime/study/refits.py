"""Simulated observations refitted: scatter, bias and coverage of the quoted intervals."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from exptime.arrays import Floats
from exptime.information.model import Bounds
from exptime.information.precision import QUANTITIES
from exptime.information.refit import fit
from exptime.study.profile import Setting, free_constraint, value_of
from exptime.study.verdict import NORMAL_SHARE as NORMAL_SHARE
from exptime.study.verify_records import Refit, Scatter, Simulations

_PERTURBATION = 0.5
_FAR_SIGMA = 5.0
_MOST_TRIES = 3


@dataclass(frozen=True, slots=True, kw_only=True)
class Observer:
    """What is needed to simulate and refit; sent to every process.

    Parameters
    ----------
    setting : Setting
        Model, truth and priors.
    covariance : ndarray, shape (n, n)
        Of all parameters at the truth, zero for those held fixed.
    seeds : tuple of numpy.random.SeedSequence
        One for each observation.
    bounds : Bounds
        Hard limits of the parameters.
    """

    setting: Setting
    covariance: Floats
    seeds: tuple[np.random.SeedSequence, ...]
    bounds: Bounds


def refit_one(observer: Observer, number: int) -> Refit:
    """Simulate one observation and refit it.

    The data are Poisson; the centre of every Gaussian-counted prior is drawn about the truth with
    the prior's own width, as the measurement behind it would have come out.

    Parameters
    ----------
    observer : Observer
        What is observed.
    number : int
        Which of its seeds to use.
    """
    random = np.random.default_rng(observer.seeds[number])
    setting, model = observer.setting, observer.setting.model
    counts = random.poisson(setting.expected_counts).astype(float)
    penalty = setting.penalty
    moved = replace(
        penalty,
        center=_drawn(setting.truth, penalty.information, random),
        level_center=_drawn(
            np.zeros_like(model.levels.prior_information), model.levels.prior_information, random
        ),
    )
    best, found = math.inf, setting.truth
    root = _root(observer.covariance)
    for _ in range(_MOST_TRIES):
        start = setting.truth + _PERTURBATION * root @ random.standard_normal(len(root))
        attempt = fit(model, counts, moved, observer.bounds.clip(start), free_constraint(setting))
        if attempt.deviance < best:
            best, found = attempt.deviance, attempt.vector
        if attempt.has_converged and math.isfinite(attempt.deviance):
            return True, attempt.vector
    return False, found


def summarise(observer: Observer, refits: Sequence[Refit], bounds: Floats) -> Simulations:
    """Compare refits with the truth.

    Parameters
    ----------
    observer : Observer
        What was observed.
    refits : sequence of Refit
        Results of `refit_one`.
    bounds : ndarray, shape (3,)
        Standard deviations of mass, radius and compactness by the information matrix.
    """
    setting = observer.setting
    vectors = np.array([vector for has_converged, vector in refits if has_converged])
    if len(vectors) == 0:
        return Simulations(
            asked=len(refits), converged=0, elsewhere=0, elsewhere_radius_km=(), scatter=()
        )
    far = _is_elsewhere(observer, vectors)
    radius = setting.model.names.index("radius")
    where = np.quantile(vectors[far, radius], [0.16, 0.5, 0.84]) if np.any(far) else np.empty(0)
    scatter = []
    for name, bound in zip(QUANTITIES, bounds, strict=True):
        values = np.array([value_of(setting, name, vector) for vector in vectors])
        truth = value_of(setting, name, setting.truth)
        scatter.append(
            Scatter(
                quantity=name,
                bound=float(bound),
                deviation=float(np.std(values, ddof=1)) if len(values) > 1 else 0.0,
                bias=float(np.mean(values)) - truth,
                coverage=float(np.mean(np.abs(values - truth) <= bound)),
                coverage_error=math.sqrt(NORMAL_SHARE * (1.0 - NORMAL_SHARE) / len(values)),
            )
        )
    return Simulations(
        asked=len(refits),
        converged=len(vectors),
        elsewhere=int(np.sum(far)),
        elsewhere_radius_km=tuple(float(value) for value in where),
        scatter=tuple(scatter),
    )


def _is_elsewhere(observer: Observer, vectors: Floats) -> Floats:
    """Mask of vectors with an inclination or colatitude far from the truth, by its own sigma."""
    sigma = np.sqrt(np.maximum(np.diagonal(observer.covariance), 0.0))
    angles = [
        index
        for index, name in enumerate(observer.setting.model.names)
        if name == "cos_inclination" or name.endswith("colatitude")
    ]
    away = np.abs(vectors - observer.setting.truth)[:, angles]
    return np.asarray(np.any(away > _FAR_SIGMA * np.maximum(sigma[angles], 1e-9), axis=1))


def _drawn(center: Floats, information: Floats, random: np.random.Generator) -> Floats:
    noise = random.standard_normal(len(center))
    width = np.divide(
        1.0, np.sqrt(information), out=np.zeros_like(information), where=information > 0.0
    )
    return np.asarray(center + width * noise)


def _root(covariance: Floats) -> Floats:
    values, vectors = np.linalg.eigh(covariance)
    return np.asarray(vectors * np.sqrt(np.maximum(values, 0.0)))
