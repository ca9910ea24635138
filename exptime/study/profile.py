"""Profile likelihood on the expected data: the check of the Cramér-Rao bound.

The quantity is stepped away from the truth and everything else refitted, each fit started along
the ridge that the last ones found. Intervals are read off where the deviance has risen by 1 and
by 3.84.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from exptime.arrays import Booleans, Floats
from exptime.constants import SOLAR_MASS_KM
from exptime.information.model import Bounds, Constraint, Model, Penalty
from exptime.information.precision import Experiment, Quantity
from exptime.information.refit import Fit, fit

RISES = (1.0, 3.841)
_STEP = 0.5
_MOST_STEPS = 8
_HIGHEST = 5.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Setting:
    """Where a likelihood is explored.

    Parameters
    ----------
    model : Model
        Expected counts.
    truth : ndarray, shape (n,)
        The vector that the expected data are of.
    penalty : Penalty
        Gaussian-counted priors about the truth.
    is_free : ndarray of bool, shape (n,)
        Parameters that are not held fixed.
    bounds : Bounds or None
        Hard limits, if they are to hold.
    """

    model: Model
    truth: Floats
    penalty: Penalty
    is_free: Booleans
    bounds: Bounds | None = None

    @property
    def expected_counts(self) -> Floats:
        """Data without noise, shape (n_phase, n_channel)."""
        source = self.model.source(self.truth)
        if source is None:
            raise ValueError("the truth is outside the model")
        share = self.model.exposure_s / self.model.phase_bins
        return np.asarray(share * (source + self.model.background_per_s))


@dataclass(frozen=True, slots=True, kw_only=True)
class ProfilePoint:
    """One point of a profile.

    Parameters
    ----------
    value : float
        Of the quantity.
    rise : float
        Deviance above its minimum.
    has_converged : bool
        Whether the refit did.
    vector : ndarray, shape (n,)
        Where everything else went.
    levels : ndarray, shape (n_level,)
        Where the background levels went.
    """

    value: float
    rise: float
    has_converged: bool
    vector: Floats
    levels: Floats


@dataclass(frozen=True, slots=True, kw_only=True)
class Interval:
    """An asymmetric interval about the truth.

    Parameters
    ----------
    lower, upper : float
        Ends; infinite where the profile never rises so far (lower is then -infinity).
    """

    lower: float
    upper: float

    @property
    def half_width(self) -> float:
        """Half of the distance between the ends."""
        return 0.5 * (self.upper - self.lower)


@dataclass(frozen=True, slots=True, kw_only=True)
class Profile:
    """Profile likelihood of one quantity.

    Parameters
    ----------
    quantity : {"mass", "radius", "compactness"}
        Which.
    truth, bound : float
        Its value, and the standard deviation that the information matrix gives.
    points : tuple of ProfilePoint
        In the order of the value.
    intervals : tuple of Interval
        At 68 and 95 per cent.
    """

    quantity: Quantity
    truth: float
    bound: float
    points: tuple[ProfilePoint, ...]
    intervals: tuple[Interval, Interval]

    @property
    def ratio(self) -> float:
        """Half-width of the 68 per cent interval over the bound."""
        return self.intervals[0].half_width / self.bound if self.bound > 0.0 else math.nan


def profile_of(setting: Setting, quantity: Quantity, bound: float, direction: Floats) -> Profile:
    """Step a quantity and refit everything else; the arguments are those of `side_of`."""
    sides = [side_of(setting, quantity, sign * bound, sign * direction) for sign in (-1.0, 1.0)]
    return joined(setting, quantity, bound, sides)


def joined(
    setting: Setting, quantity: Quantity, bound: float, sides: Sequence[Sequence[ProfilePoint]]
) -> Profile:
    """Return a profile from its two sides, in any order."""
    truth = value_of(setting, quantity, setting.truth)
    middle = ProfilePoint(
        value=truth,
        rise=0.0,
        has_converged=True,
        vector=setting.truth,
        levels=setting.penalty.level_center,
    )
    points = [middle, *(point for side in sides for point in side)]
    ordered = tuple(sorted(points, key=lambda point: point.value))
    intervals = tuple(_interval(ordered, truth, rise) for rise in RISES)
    return Profile(
        quantity=quantity,
        truth=truth,
        bound=bound,
        points=ordered,
        intervals=(intervals[0], intervals[1]),
    )


def side_of(
    setting: Setting, quantity: Quantity, bound: float, direction: Floats
) -> list[ProfilePoint]:
    """Step a quantity to one side of the truth and refit everything else.

    Parameters
    ----------
    setting : Setting
        Where.
    quantity : {"mass", "radius", "compactness"}
        Which quantity.
    bound : float
        Its standard deviation by the information matrix, the measure of the steps; negative for
        the lower side.
    direction : ndarray, shape (n,)
        Change of the vector along the ridge for one `bound`, the first guess.
    """
    counts = setting.expected_counts
    truth = value_of(setting, quantity, setting.truth)
    points: list[ProfilePoint] = []
    before, vector = setting.truth, setting.truth + _STEP * direction
    levels = None
    for step in range(1, _MOST_STEPS + 1):
        value = truth + step * _STEP * bound
        if value <= 0.0:
            break
        constraint = constraint_at(setting, quantity, value)
        found: Fit = fit(
            setting.model, counts, setting.penalty, vector, constraint, setting.bounds, levels
        )
        if not math.isfinite(found.deviance):
            break
        points.append(
            ProfilePoint(
                value=value,
                rise=found.deviance,
                has_converged=found.has_converged,
                vector=found.vector,
                levels=found.levels,
            )
        )
        if found.deviance > _HIGHEST:
            break
        # Go on along the ridge as the last two points show it.
        before, vector, levels = found.vector, 2.0 * found.vector - before, found.levels
    return points


def is_inside(setting: Setting, points: Sequence[ProfilePoint], bounds: Bounds) -> bool:
    """Whether hard limits, the background's included, would change none of the points."""
    model = setting.model
    return all(
        bool(np.all((point.vector > bounds.lower) & (point.vector < bounds.upper)))
        and bool(np.all(model.background_per_s + point.levels @ model.levels.shape_per_s >= 0.0))
        for point in points
    )


def value_of(setting: Setting, quantity: Quantity, vector: Floats) -> float:
    """Return the value of a quantity at a vector."""
    names = setting.model.names
    mass, radius = float(vector[names.index("mass")]), float(vector[names.index("radius")])
    return {"mass": mass, "radius": radius, "compactness": SOLAR_MASS_KM * mass / radius}[quantity]


def constraint_at(setting: Setting, quantity: Quantity, value: float) -> Constraint:
    """Return the vectors at which a quantity has a value; fixed parameters stay."""
    names, free = setting.model.names, setting.is_free
    identity = np.eye(len(names))
    origin = np.where(free, 0.0, setting.truth)
    mass, radius = names.index("mass"), names.index("radius")
    if quantity == "compactness" and not free[radius]:
        return constraint_at(setting, "mass", value * setting.truth[radius] / SOLAR_MASS_KM)
    if quantity == "compactness" and not free[mass]:
        return constraint_at(setting, "radius", SOLAR_MASS_KM * setting.truth[mass] / value)
    if quantity == "compactness":
        # R = GM/(c² C): the pair moves together on a straight line through zero.
        pair = identity[mass] + SOLAR_MASS_KM / value * identity[radius]
        rest = [identity[k] for k in range(len(names)) if free[k] and k not in (mass, radius)]
        return Constraint(origin=origin, directions=np.array([pair, *rest]).T)
    held = mass if quantity == "mass" else radius
    origin = origin.copy()
    origin[held] = value
    kept = [identity[k] for k in range(len(names)) if free[k] and k != held]
    return Constraint(origin=origin, directions=np.array(kept).reshape(-1, len(names)).T)


def free_constraint(setting: Setting) -> Constraint:
    """Return the vectors whose fixed parameters are those of the truth."""
    free = setting.is_free
    origin = np.where(free, 0.0, setting.truth)
    return Constraint(origin=origin, directions=np.eye(len(free))[:, free])


def ridge_direction(experiment: Experiment, covariance: Floats, quantity: Quantity) -> Floats:
    """Return the change of all parameters with one sigma of a quantity, shape (n,).

    Parameters
    ----------
    experiment : Experiment
        Names and values.
    covariance : ndarray, shape (n_free, n_free)
        Of the free parameters.
    quantity : {"mass", "radius", "compactness"}
        Which quantity.
    """
    row = experiment.directions()[("mass", "radius", "compactness").index(quantity)]
    along = covariance @ row
    sigma = math.sqrt(max(float(row @ along), 0.0))
    full = np.zeros(len(experiment.parameters))
    if sigma > 0.0:
        full[experiment.is_free] = along / sigma
    return full


def _interval(points: tuple[ProfilePoint, ...], truth: float, rise: float) -> Interval:
    upper = [point for point in points if point.value >= truth]
    lower = [point for point in reversed(points) if point.value <= truth]
    return Interval(lower=_crossing(lower, rise, -math.inf), upper=_crossing(upper, rise, math.inf))


def _crossing(points: list[ProfilePoint], rise: float, missing: float) -> float:
    """Value at which the root of the rise, nearly straight, crosses that of the level."""
    level = math.sqrt(rise)
    roots = [math.sqrt(max(point.rise, 0.0)) for point in points]
    for index in range(1, len(points)):
        if roots[index] >= level:
            start, end = points[index - 1].value, points[index].value
            share = (level - roots[index - 1]) / (roots[index] - roots[index - 1])
            return start + share * (end - start)
    return missing
