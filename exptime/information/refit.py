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
from exptime.information.matrix import BackgroundLevels
from exptime.observation.linearise import linearise
from exptime.observation.rates import source_rates
from exptime.observation.response import Response
from exptime.observation.scene import Scene
from exptime.star.resolution import Resolution
from exptime.star.view import star_fault

_MOST_STEPS = 40
_CONVERGED = 1e-4
_FIRST_DAMPING = 1e-4
_LARGEST_DAMPING = 1e8
_FLOOR = 1e-12


@dataclass(frozen=True, slots=True, kw_only=True)
class Constraint:
    """Vectors x = origin + directions @ z that a fit may reach.

    Parameters
    ----------
    origin : ndarray, shape (n,)
        One of them.
    directions : ndarray, shape (n, m)
        Columns span the others.
    """

    origin: Floats
    directions: Floats


@dataclass(frozen=True, slots=True, kw_only=True)
class Bounds:
    """Hard limits of the parameters.

    Parameters
    ----------
    lower, upper : ndarray, shape (n,)
        Infinite where there is none.
    """

    lower: Floats
    upper: Floats

    def clip(self, vector: Floats) -> Floats:
        """Return the nearest vector inside."""
        return np.clip(vector, self.lower, self.upper)


@dataclass(frozen=True, slots=True, kw_only=True)
class Model:
    """What turns a vector of parameters into expected counts.

    Parameters
    ----------
    scene : Scene
        Supplies what the vector does not: spin, figure, emission.
    names : tuple of str
        Parameters of the vector: those of `linearise`, then ``area_factor``.
    response : Response
        The channels.
    phase_bins : int
        Number of phase bins.
    resolutions : tuple of Resolution
        Counts to compute each spot with.
    exposure_s : float
        s.
    background_per_s : ndarray, shape (n_channel,)
        Expected background, counts/s.
    levels : BackgroundLevels
        What of it is free.
    """

    scene: Scene
    names: tuple[str, ...]
    response: Response
    phase_bins: int
    resolutions: tuple[Resolution, ...]
    exposure_s: float
    background_per_s: Floats
    levels: BackgroundLevels

    def scene_at(self, vector: Floats) -> Scene | None:
        """Return the scene of a vector; None where it is outside the model."""
        at = dict(zip(self.names, vector.tolist(), strict=True))
        star = replace(
            self.scene.star,
            mass_msun=at["mass"],
            radius_km=at["radius"],
            cos_inclination=at["cos_inclination"],
        )
        sizes = [at[f"spot{k + 1}.angular_radius"] for k in range(len(self.scene.spots))]
        is_sound = (
            star.mass_msun > 0.0
            and star.radius_km > 0.0
            and -1.0 < star.cos_inclination < 1.0
            and at["distance"] > 0.0
            and min(sizes) > 0.0
            and max(sizes) < np.pi
        )
        if not is_sound or star_fault(star) is not None:
            return None
        spots = []
        for k, spot in enumerate(self.scene.spots):
            colatitude = at[f"spot{k + 1}.colatitude"] % (2.0 * np.pi)
            longitude = at[f"spot{k + 1}.longitude"]
            # A centre carried over a pole comes down on the other side.
            if colatitude > np.pi:
                colatitude, longitude = 2.0 * np.pi - colatitude, longitude + np.pi
            spots.append(
                replace(
                    spot,
                    colatitude=colatitude,
                    longitude=longitude,
                    angular_radius=sizes[k],
                    temperature_kev=float(np.exp(at[f"spot{k + 1}.log_temperature"])),
                )
            )
        return replace(
            self.scene,
            star=star,
            spots=tuple(spots),
            distance_pc=at["distance"],
            column_cm2=at["column_density"],
        )

    def vector_of(self, scene: Scene) -> Floats:
        """Return the vector of a scene, with an area factor of one."""
        star = scene.star
        at = {
            "mass": star.mass_msun,
            "radius": star.radius_km,
            "distance": scene.distance_pc,
            "cos_inclination": star.cos_inclination,
            "column_density": scene.column_cm2,
            "area_factor": 1.0,
        }
        for k, spot in enumerate(scene.spots):
            at[f"spot{k + 1}.colatitude"] = spot.colatitude
            at[f"spot{k + 1}.longitude"] = spot.longitude
            at[f"spot{k + 1}.angular_radius"] = spot.angular_radius
            at[f"spot{k + 1}.log_temperature"] = float(np.log(spot.temperature_kev))
        return np.array([at[name] for name in self.names])

    def source(self, vector: Floats) -> Floats | None:
        """Return area factor times source rate, (n_phase, n_channel), counts/s; None outside."""
        scene = self.scene_at(vector)
        if scene is None:
            return None
        rates = source_rates(scene, self.response, self.phase_bins, self.resolutions)
        return np.asarray(np.maximum(rates, 0.0) * vector[self.names.index("area_factor")])

    def linearised(self, vector: Floats) -> tuple[Floats, Floats] | None:
        """Return the source rate and its derivatives, (n, n_phase, n_channel); None outside."""
        scene = self.scene_at(vector)
        if scene is None:
            return None
        local = linearise(scene, self.response, self.phase_bins, self.resolutions)
        factor = vector[self.names.index("area_factor")]
        derivatives = np.concatenate([factor * local.derivatives, local.source_per_s[None]])
        for row, name in enumerate(self.names):
            if name.endswith("colatitude") and vector[row] % (2.0 * np.pi) > np.pi:
                derivatives[row] *= -1.0
        return factor * local.source_per_s, derivatives


@dataclass(frozen=True, slots=True, kw_only=True)
class Penalty:
    """Gaussian-counted priors.

    Parameters
    ----------
    center : ndarray, shape (n,)
        Their centres.
    information : ndarray, shape (n,)
        1/variance of each; zero where there is none.
    level_center : ndarray, shape (n_level,)
        Centres of the priors of the background levels.
    """

    center: Floats
    information: Floats
    level_center: Floats

    def value(self, vector: Floats) -> float:
        """Return the sum of squared deviations over variances."""
        return float(np.sum(self.information * (vector - self.center) ** 2))


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
