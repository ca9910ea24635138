"""A paragraph ready for the feasibility section of a proposal."""

from __future__ import annotations

import math

from exptime.report.digits import (
    duration,
    percent,
    precision,
    requested_time,
    share,
    significant,
    value_with_uncertainty,
)
from exptime.report.goals import (
    LONGEST_EXPOSURE_S,
    Cost,
    costs,
    exposure_factor_at_half_brightness,
    is_prior_limited,
    requested_exposure_s,
)
from exptime.report.sentences import margin_words
from exptime.report.words import NAMES, printable
from exptime.study.records import Forecast


def feasibility(forecast: Forecast) -> str:
    """Return a paragraph that can be pasted into a proposal.

    Parameters
    ----------
    forecast : Forecast
        The answer of the main job; its first goal is the one argued for.
    """
    cost = costs(forecast)[0]
    sentences = [_rates(forecast), _basis(forecast)]
    goal = f"a precision of {percent(cost.goal.precision)} per cent (one sigma) in "
    goal += NAMES[cost.goal.quantity]
    if cost.p50 <= 0.0:
        whom = "" if cost.is_met_beforehand else f" for {_half(forecast)}"
        sentences.append(f"{_capital(goal)} is known beforehand{whom} and is not the aim here.")
    elif math.isfinite(cost.p50) and is_prior_limited(forecast, cost):
        sentences.append(
            f"{_capital(goal)} would be prior-limited: it would rest more on what is known "
            "beforehand than on this observation, which is therefore not claimed to measure it."
        )
    elif math.isinf(cost.p50):
        sentences.append(
            f"{_capital(goal)} is not reached within {duration(cost.longest_s)} for "
            f"{_half(forecast)}, and is not claimed."
        )
        sentences.append(_bought(forecast, cost))
    else:
        sentences += [_price(forecast, cost, goal), _bought(forecast, cost)]
        sentences.append(_fallback(forecast, cost))
    sentences.append(
        "These are Cramér-Rao bounds: a fit to real data may do worse where counts are few."
    )
    return " ".join(sentence for sentence in sentences if sentence)


def _rates(forecast: Forecast) -> str:
    target, edges = forecast.target, forecast.expected.channel_edges_kev
    names = " and ".join(printable(instrument.name) for instrument in forecast.instruments)
    distance = value_with_uncertainty(target.distance.value, target.distance.uncertainty or 0.0)
    return (
        f"We expect {significant(forecast.source_per_s, 3)} counts/s from "
        f"{printable(target.name)} over a background of "
        f"{significant(forecast.background_per_s, 2)} counts/s in {names} "
        f"({_energy(float(edges[0]))}-{_energy(float(edges[-1]))} keV), behind a column of "
        f"{significant(target.column_density.value, 2)} cm⁻² at {distance} pc."
    )


def _basis(forecast: Forecast) -> str:
    basis = "at the hot-spot geometry given"
    if not forecast.is_geometry_known:
        basis = (
            f"over {len(forecast.geometries)} hot-spot geometries drawn to reproduce what is "
            "measured of the source"
        )
    return (
        f"We forecast the precision from the Fisher information of a relativistic pulse model "
        f"{basis}, marginalised over every free parameter of star, spots, column and background."
    )


def _price(forecast: Forecast, cost: Cost, goal: str) -> str:
    margin = margin_words(forecast)
    margin = f", {margin}" if margin else ""
    time = f"{_capital(goal)} takes {requested_time(cost.p50)} of good exposure"
    if forecast.is_geometry_known:
        return f"{time}{margin}."
    if math.isinf(cost.p84):
        return (
            f"{time} for half of the geometries{margin}; for 84 per cent of them "
            f"{duration(cost.longest_s)} is not enough."
        )
    return (
        f"{time} for half of the geometries and {requested_time(cost.p84)} for 84 per cent of "
        f"them{margin}."
    )


def _bought(forecast: Forecast, cost: Cost) -> str:
    """Return what the exposure spoken of gives, whether or not it is the goal."""
    curve = forecast.curve(cost.goal.quantity)
    if curve.is_prior_limited[-1]:
        return ""
    name, time = NAMES[cost.goal.quantity], duration(requested_exposure_s(forecast))
    half = precision(float(curve.data_sigma.p50[-1]), curve.fiducial)
    if half == precision(math.inf, 1.0):
        return f"In {time} the {name} stays unconstrained for {_half(forecast)}."
    if forecast.is_geometry_known:
        return f"In {time} we expect the {name} to {_words(half)}."
    most = precision(float(curve.data_sigma.p84[-1]), curve.fiducial)
    tail = (
        f"to {_words(most)} or better for 84 per cent"
        if most != precision(math.inf, 1.0)
        else "while less than 84 per cent are constrained"
    )
    reached = share(cost.share_by(requested_exposure_s(forecast)))
    reached += " reaches" if reached == "none" else " reach"
    margin = ", margin included" if forecast.margin > 0.0 else ""
    return (
        f"In {time} we expect the {name} to {_words(half)} or better for half of the geometries, "
        f"{tail}; {reached} the goal{margin}."
    )


def _fallback(forecast: Forecast, cost: Cost) -> str:
    factor = exposure_factor_at_half_brightness(forecast)
    if not math.isfinite(factor):
        return ""
    beyond = ", more than was searched," if cost.p50 * factor > LONGEST_EXPOSURE_S else ""
    return (
        f"Were the source half as bright, the same would take about {significant(factor, 2)} "
        f"times as long, {requested_time(cost.p50 * factor)}{beyond} for {_half(forecast)}: an "
        "estimate from the count rates alone (2 times where background is negligible, 4 times "
        "where it dominates)."
    )


def _half(forecast: Forecast) -> str:
    return "the geometry assumed" if forecast.is_geometry_known else "half of the geometries"


def _words(share_of_value: str) -> str:
    return share_of_value.replace("%", "per cent")


def _energy(kev: float) -> str:
    return f"{kev:.3g}"


def _capital(text: str) -> str:
    return text[:1].upper() + text[1:]
