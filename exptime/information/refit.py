"""Fit the whole model to counts: damped Gauss-Newton steps on the smooth likelihood.

The penalised deviance is

    D = 2 sum [lambda - n + n ln(n/lambda)] + sum ((x - center)/sigma)² + sum level²/variance,

with lambda = (T/n_phase)(a s + b), s the source rate of a scene, a the grey area factor and b the
background with its free levels. Levels are eliminated from every step in closed form.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from exptime.arrays import Booleans, Floats
from exptime.information.model import Bounds, Constraint, Model, Penalty

_MOST_STEPS = 40
_CONVERGED = 1e-4
_FIRST_DAMPING = 1e-4
_LARGEST_DAMPING = 1e8
_FLOOR = 1e-12
_PROBE = 0.1
_MOST_BEND = 0.75


@dataclass(frozen=True, slots=True, kw_only=True)
class Fit:
    """A fitted vector.

    Parameters
    ----------
    vector : ndarray, shape (n,)
        The parameters.
    levels : ndarray, shape (n_level,)
        Background levels over their expectation, in units of their shape.
    deviance : float
        Penalised deviance there.
    has_converged : bool
        False when the steps ran out.
    """

    vector: Floats
    levels: Floats
    deviance: float
    has_converged: bool


def fit(
    model: Model,
    counts: Floats,
    penalty: Penalty,
    start: Floats,
    constraint: Constraint | None = None,
    bounds: Bounds | None = None,
    start_levels: Floats | None = None,
) -> Fit:
    """Minimise the penalised deviance.

    Parameters
    ----------
    model : Model
        Expected counts.
    counts : ndarray, shape (n_phase, n_channel)
        Data; need not be whole numbers.
    penalty : Penalty
        Priors.
    start : ndarray, shape (n,)
        First vector; moved onto the constraint.
    constraint : Constraint, optional
        Where the vector may go; anywhere when not given.
    bounds : Bounds, optional
        Hard limits; the background is then kept from going negative too.
    start_levels : ndarray, shape (n_level,), optional
        First levels; the centres of their priors when not given.

    Returns
    -------
    Fit
        The best vector found.
    """
    span = np.eye(len(start)) if constraint is None else constraint.directions
    vector = start if constraint is None else _onto(start, constraint)
    vector = vector if bounds is None else bounds.clip(vector)
    levels = penalty.level_center if start_levels is None else start_levels
    damping, best = _FIRST_DAMPING, _deviance(model, counts, penalty, vector, levels, bounds)
    local = model.linearised(vector)
    if local is None or not np.isfinite(best):
        return Fit(vector=vector, levels=levels, deviance=np.inf, has_converged=False)
    for _ in range(_MOST_STEPS):
        free = span[:, _is_movable(span, vector, bounds)]
        equations = _equations(model, counts, penalty, vector, levels, local)
        moved = False
        while damping < _LARGEST_DAMPING:
            step, level_step, gain = _step(equations, free, damping)
            bend = _bend(model, equations, vector, levels, local, free, step, damping)
            if bend is not None:
                step, level_step = step + bend[0], level_step + bend[1]
            trial = vector + free @ step
            trial = trial if bounds is None else bounds.clip(trial)
            trial_levels = _kept(model, levels + level_step, bounds)
            value = _deviance(model, counts, penalty, trial, trial_levels, bounds)
            if value < best:
                moved = True
                break
            damping = max(10.0 * damping, 1e-6)
        if not moved:
            return Fit(vector=vector, levels=levels, deviance=best, has_converged=gain < 1e-2)
        change, vector, levels, best = best - value, trial, trial_levels, value
        damping *= 0.1 if change > 0.5 * gain else 1.0
        if change < _CONVERGED and gain < 10.0 * _CONVERGED:
            return Fit(vector=vector, levels=levels, deviance=best, has_converged=True)
        following = model.linearised(vector)
        if following is None:
            break
        local = following
    return Fit(vector=vector, levels=levels, deviance=best, has_converged=False)


def _onto(vector: Floats, constraint: Constraint) -> Floats:
    """Return the vector with what leaves the constraint taken off."""
    offset, *_ = np.linalg.lstsq(constraint.directions, vector - constraint.origin, rcond=None)
    return np.asarray(constraint.origin + constraint.directions @ offset)


def _is_movable(span: Floats, vector: Floats, bounds: Bounds | None) -> Booleans:
    """Mask of directions that are not pinned by a hard limit on a single parameter."""
    if bounds is None:
        return np.ones(span.shape[1], bool)
    at_limit = (vector <= bounds.lower) | (vector >= bounds.upper)
    return np.asarray(~np.any((span != 0.0) & at_limit[:, None], axis=0))


@dataclass(frozen=True, slots=True, kw_only=True)
class _Equations:
    matrix: Floats
    gradient: Floats
    mixed: Floats
    level_matrix: Floats
    level_gradient: Floats


def _equations(
    model: Model,
    counts: Floats,
    penalty: Penalty,
    vector: Floats,
    levels: Floats,
    local: tuple[Floats, Floats],
) -> _Equations:
    source, derivatives = local
    share = model.exposure_s / model.phase_bins
    expected = share * np.maximum(source + _background(model, levels), _FLOOR)
    jacobian = (share * derivatives).reshape(len(derivatives), -1)
    shapes = share * model.levels.shape_per_s
    pull = counts / expected - 1.0
    weight = 1.0 / expected
    per_channel = np.einsum("ikc,kc->ic", share * derivatives, weight)
    return _Equations(
        matrix=(jacobian * weight.ravel()) @ jacobian.T + np.diag(penalty.information),
        gradient=jacobian @ pull.ravel() - penalty.information * (vector - penalty.center),
        mixed=per_channel @ shapes.T,
        level_matrix=shapes**2 @ weight.sum(axis=0) + model.levels.prior_information,
        level_gradient=shapes @ pull.sum(axis=0)
        - model.levels.prior_information * (levels - penalty.level_center),
    )


def _step(equations: _Equations, free: Floats, damping: float) -> tuple[Floats, Floats, float]:
    """Return the step along free directions, that of the levels, and the fall expected."""
    mixed = free.T @ equations.mixed
    inverse = 1.0 / equations.level_matrix
    matrix = free.T @ equations.matrix @ free - (mixed * inverse) @ mixed.T
    gradient = free.T @ equations.gradient - mixed @ (inverse * equations.level_gradient)
    scale = 1.0 / np.sqrt(np.maximum(np.diagonal(matrix), 1e-300))
    scaled = matrix * np.outer(scale, scale)
    step = scale * np.linalg.solve(scaled + damping * np.eye(len(scale)), scale * gradient)
    level_step = inverse * (equations.level_gradient - mixed.T @ step)
    gain = float(gradient @ step + np.sum(inverse * equations.level_gradient**2))
    return step, level_step, gain


def _bend(
    model: Model,
    equations: _Equations,
    vector: Floats,
    levels: Floats,
    local: tuple[Floats, Floats],
    free: Floats,
    step: Floats,
    damping: float,
) -> tuple[Floats, Floats] | None:
    """Return what a step lacks to follow a curved ridge; None where it is no correction.

    Half the acceleration of the geodesic that starts with the step (Transtrum & Sethna 2012,
    arXiv:1201.5885), its curvature of the counts by one more evaluation a tenth of a step away.
    """
    source, derivatives = local
    away = free @ step
    near = model.source(vector + _PROBE * away)
    if near is None:
        return None
    slope = np.tensordot(away, derivatives, axes=1)
    curvature = 2.0 / _PROBE * ((near - source) / _PROBE - slope)
    share = model.exposure_s / model.phase_bins
    expected = share * np.maximum(source + _background(model, levels), _FLOOR)
    pull = -share * curvature / expected
    bending = replace(
        equations,
        gradient=(share * derivatives).reshape(len(derivatives), -1) @ pull.ravel(),
        level_gradient=share * model.levels.shape_per_s @ pull.sum(axis=0),
    )
    bend, level_bend, _ = _step(bending, free, damping)
    scale = np.sqrt(np.maximum(np.diagonal(free.T @ equations.matrix @ free), 1e-300))
    if np.linalg.norm(scale * bend) > _MOST_BEND * np.linalg.norm(scale * step):
        return None
    return 0.5 * bend, 0.5 * level_bend


def _background(model: Model, levels: Floats) -> Floats:
    return np.asarray(model.background_per_s + levels @ model.levels.shape_per_s)


def _kept(model: Model, levels: Floats, bounds: Bounds | None) -> Floats:
    """Return levels that keep the background from going negative, where limits are hard."""
    if bounds is None or len(levels) == 0:
        return levels
    shape = model.levels.shape_per_s
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = np.where(shape > 0.0, model.background_per_s / shape, np.inf)
    return np.asarray(np.maximum(levels, -ratio.min(axis=1)))


def _deviance(
    model: Model,
    counts: Floats,
    penalty: Penalty,
    vector: Floats,
    levels: Floats,
    bounds: Bounds | None,
) -> float:
    source = model.source(vector)
    if source is None:
        return np.inf
    share = model.exposure_s / model.phase_bins
    total = source + _background(model, levels)
    if np.any(total < 0.0):
        return np.inf
    expected = share * np.maximum(total, _FLOOR)
    with np.errstate(divide="ignore", invalid="ignore"):
        logarithm = np.where(counts > 0.0, counts * np.log(counts / expected), 0.0)
    likelihood = 2.0 * float(np.sum(expected - counts + logarithm))
    return (
        likelihood
        + penalty.value(vector)
        + float(np.sum(model.levels.prior_information * (levels - penalty.level_center) ** 2))
    )
