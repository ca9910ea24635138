"""What a goal costs, margin included, as every report words and draws it."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Final

import numpy as np

from exptime.arrays import Floats
from exptime.geometry.resampling import weighted_quantiles
from exptime.study.records import Forecast, Goal, GoalResult

DEFAULT_GOAL: Final = Goal(quantity="radius", precision=0.05)
LONGEST_EXPOSURE_S: Final = 1e8
_QUANTILES: Final = np.array([0.16, 0.50, 0.84])


@dataclass(frozen=True, slots=True, kw_only=True)
class Cost:
    """A goal and the exposure that it takes, margin included.

    Parameters
    ----------
    goal : Goal
        The wanted precision.
    required_s : ndarray, shape (n_geometries,)
        Exposure for every geometry, s; zero where what is known already does it, infinite where
        not reached.
    weights : ndarray, shape (n_geometries,)
        Shares of the geometries; they sum to one.
    p16, p50, p84 : float
        Weighted quantiles, s.
    longest_s : float
        Exposure up to which required ones were looked for, s.
    is_asked : bool
        False where no goal was asked for and one stands in its place.
    """

    goal: Goal
    required_s: Floats
    weights: Floats
    p16: float
    p50: float
    p84: float
    longest_s: float
    is_asked: bool = True

    def share_by(self, exposure_s: float) -> float:
        """Return the share of the geometries that reach the goal by an exposure."""
        return float(self.weights[self.required_s <= exposure_s * (1.0 + 1e-12)].sum())

    @property
    def is_ever_reached(self) -> bool:
        """Whether any geometry reaches the goal in the range looked at."""
        return bool(np.isfinite(self.required_s).any())

    @property
    def is_met_beforehand(self) -> bool:
        """Whether what is known already meets the goal for every geometry."""
        return self.share_beforehand >= 1.0 - 1e-9

    @property
    def share_beforehand(self) -> float:
        """Share of the geometries for which what is known already meets the goal."""
        return float(self.weights[self.required_s <= 0.0].sum())


def costs(forecast: Forecast) -> tuple[Cost, ...]:
    """Return the goals asked for, or the default one, with what they cost.

    Parameters
    ----------
    forecast : Forecast
        The answer of the main job.

    Notes
    -----
    Where no goal was asked for, 5 per cent in radius is read off each geometry's data_sigma
    between the exposures forecast (straight lines in logarithms); beyond them nothing is said.
    """
    weights = np.array([geometry.weight for geometry in forecast.geometries])
    if forecast.goals:
        return tuple(_asked(result, weights, forecast.margin) for result in forecast.goals)
    return (_default(forecast, weights),)


def is_prior_limited(forecast: Forecast, cost: Cost) -> bool:
    """Say whether a goal is met, at the median geometry, by the prior more than by the data.

    Parameters
    ----------
    forecast : Forecast
        The answer of the main job.
    cost : Cost
        Of one of its goals; its median exposure is judged.

    Notes
    -----
    Information grows with exposure, so that the exposures forecast on both sides decide where
    they agree. Between them, and beyond them, one sigma at the goal is compared with the prior:
    with a flat one as it is, for the data's sigma leaves it out; with a Gaussian one over the
    root of 2, where prior and all else tell as much.
    """
    curve = forecast.curve(cost.goal.quantity)
    flags = np.array(curve.is_prior_limited)
    exposure_s = cost.p50 / (1.0 + forecast.margin)
    before = flags[forecast.exposures_s <= exposure_s * (1.0 + 1e-9)]
    after = flags[forecast.exposures_s >= exposure_s * (1.0 - 1e-9)]
    if before.size and not before[-1]:
        return False
    if after.size and after[0]:
        return True
    given = {"mass": forecast.target.mass, "radius": forecast.target.radius}.get(cost.goal.quantity)
    is_gaussian = given is not None and given.uncertainty is not None
    equal = curve.prior_sigma / math.sqrt(2.0) if is_gaussian else curve.prior_sigma
    return cost.goal.precision * abs(curve.fiducial) > equal


def requested_exposure_s(forecast: Forecast) -> float:
    """Return the exposure that sentences and figures speak of: the longest asked for, s."""
    return float(forecast.exposures_s[-1])


def exposure_factor_at_half_brightness(forecast: Forecast) -> float:
    """Return how many times the exposure grows when the source is half as bright.

    Returns
    -------
    float
        From 2, where background is negligible, to 4, where it dominates.

    Notes
    -----
    A cell of source rate s over background b tells of relative changes of the source as
    s²/(s + b) per second. The factor is the ratio of the sums over all cells of the median
    geometry, with s and with s/2. How the information divides between phases and energies, and
    what is not known of the background, does not enter: an estimate.
    """
    source = np.maximum(forecast.expected.source_per_s, 0.0)
    background = forecast.expected.background_per_s
    now, faint = _brightness_information(source, background), 0.0
    if now > 0.0:
        faint = _brightness_information(0.5 * source, background)
    return now / faint if faint > 0.0 else math.nan


def _brightness_information(source: Floats, background: Floats) -> float:
    total = source + background
    return float(np.sum(source[source > 0.0] ** 2 / total[source > 0.0]))


def _asked(result: GoalResult, weights: Floats, margin: float) -> Cost:
    factor, spread = 1.0 + margin, result.exposure_s
    return Cost(
        goal=result.goal,
        required_s=result.required_s * factor,
        weights=weights,
        p16=float(spread.p16) * factor,
        p50=float(spread.p50) * factor,
        p84=float(spread.p84) * factor,
        longest_s=LONGEST_EXPOSURE_S,
    )


def _default(forecast: Forecast, weights: Floats) -> Cost:
    times = forecast.exposures_s
    required = np.array(
        [
            _crossing(
                times,
                geometry.data_sigma_radius_km,
                DEFAULT_GOAL.precision * geometry.star.radius_km,
            )
            for geometry in forecast.geometries
        ]
    )
    factor = 1.0 + forecast.margin
    p16, p50, p84 = (weighted_quantiles(required, weights, _QUANTILES) * factor).tolist()
    return Cost(
        goal=DEFAULT_GOAL,
        required_s=required * factor,
        weights=weights,
        p16=p16,
        p50=p50,
        p84=p84,
        longest_s=float(times[-1]),
        is_asked=False,
    )


def _crossing(times: Floats, sigma: Floats, wanted: float) -> float:
    """Return the time at which a falling curve reaches a level; infinite beyond its end."""
    reached = np.flatnonzero(sigma <= wanted)
    if not reached.size:
        return math.inf
    after = int(reached[0])
    if after == 0 or not np.isfinite(sigma[after - 1]):
        return float(times[after])
    slope = np.log(sigma[after] / sigma[after - 1]) / np.log(times[after] / times[after - 1])
    return float(times[after - 1] * (wanted / sigma[after - 1]) ** (1.0 / slope))
