"""The answer in words: what every report says first."""

from __future__ import annotations

import math
from typing import Final

from exptime.report.digits import duration, percent, share
from exptime.report.goals import Cost, costs, is_prior_limited, requested_exposure_s
from exptime.study.records import Forecast

CAUTION: Final = (
    "These figures guide a request. The observatory's own documents, calculators and staff govern "
    "effective areas, backgrounds, exposure, visibility and safety limits: check against them "
    "before you submit, and quote theirs where they differ."
)


def headline(forecast: Forecast) -> str:
    """Return the answer to the first goal in one sentence over the geometries.

    Parameters
    ----------
    forecast : Forecast
        The answer of the main job.

    Notes
    -----
    From data_sigma, which leaves out flat priors on mass and radius; the margin is in every
    exposure and share, and named.
    """
    return answers(forecast)[0]


def answers(forecast: Forecast) -> tuple[str, ...]:
    """Return one such sentence for every goal."""
    return tuple(_answer(forecast, cost) for cost in costs(forecast))


def notes_on_goals(forecast: Forecast) -> tuple[str, ...]:
    """Return what a reader has to know of the goals, beside their sentences."""
    notes = [
        "A precision is one standard deviation (68 per cent) divided by the value, from the data "
        "and every measured constraint, without the flat priors on mass and radius."
    ]
    every = costs(forecast)
    if not every[0].is_asked:
        notes.append(
            "No goal was asked for: 5 per cent in radius stands in its place, read off between "
            "the exposures forecast."
        )
    if any(0.0 < cost.share_beforehand and not cost.is_met_beforehand for cost in every):
        notes.append("Geometries that meet a goal beforehand count as reached by any exposure.")
    return tuple(notes)


def margin_words(forecast: Forecast) -> str:
    """Return words that name the margin; empty where there is none."""
    if forecast.margin <= 0.0:
        return ""
    return f"including a margin of {percent(forecast.margin)} per cent"


def _answer(forecast: Forecast, cost: Cost) -> str:
    goal = f"{percent(cost.goal.precision)} per cent in {cost.goal.quantity}"
    if cost.is_met_beforehand:
        return f"{goal}: known that well beforehand; no observation is needed for it."
    words = _known(forecast, cost) if forecast.is_geometry_known else _drawn(forecast, cost)
    margin = margin_words(forecast)
    if margin and cost.is_ever_reached:
        words += f" ({margin})"
    if 0.0 < cost.p50 < math.inf and is_prior_limited(forecast, cost):
        words = (
            "prior-limited, owed to what was known beforehand more than to the observation; "
            f"reached by {words}"
        )
    return f"{goal}: {words}."


def _drawn(forecast: Forecast, cost: Cost) -> str:
    limit = duration(cost.longest_s)
    if not cost.is_ever_reached:
        return f"no geometry reaches it within {limit}"
    requested = requested_exposure_s(forecast)
    by_then = share(cost.share_by(requested))
    reach = "reaches" if by_then == "none" else "reach"
    at = "at the requested" if len(forecast.exposures_s) == 1 else "at the longest requested"
    then = f"{at} {duration(requested)}, {by_then} {reach} it"
    if math.isinf(cost.p50):
        return f"half of the geometries do not reach it within {limit}; {then}"
    half = f"half of the geometries {_by(cost.p50)}"
    if math.isinf(cost.p84):
        return f"{half}, but 84 per cent not within {limit}; {then}"
    return f"{half}, 84 per cent {_by(cost.p84)}; {then}"


def _by(seconds: float) -> str:
    return f"by {duration(seconds, 2)}" if seconds > 0.0 else "beforehand"


def _known(forecast: Forecast, cost: Cost) -> str:
    if math.isinf(cost.p50):
        return f"not reached within {duration(cost.longest_s)} at the geometry given"
    requested = requested_exposure_s(forecast)
    verdict = "enough" if cost.p50 <= requested * (1.0 + 1e-12) else "not enough"
    which = "" if len(forecast.exposures_s) == 1 else "longest "
    return (
        f"{duration(cost.p50)} at the geometry given; the {which}requested "
        f"{duration(requested)} is {verdict}"
    )
