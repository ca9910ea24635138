"""Figures against exposure: the share of geometries that reach each goal, and precision."""

from __future__ import annotations

import math
from functools import partial
from typing import TYPE_CHECKING

import numpy as np

from exptime.arrays import Floats
from exptime.information.precision import Quantity as QuantityName
from exptime.report.digits import duration, percent
from exptime.report.drawing import (
    COLORS,
    DASHES,
    FAINT,
    INK,
    Picture,
    legend_above,
    new_figure,
    picture,
    plain_log_axis,
    time_axis,
)
from exptime.report.goals import Cost, costs, requested_exposure_s
from exptime.report.sentences import headline, margin_words
from exptime.report.tables import SHOWN
from exptime.report.words import NAMES
from exptime.study.records import Forecast, QuantityCurve

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure


def share_picture(forecast: Forecast) -> Picture | None:
    """Return the share of the geometries that reach each goal; None for known geometry."""
    if forecast.is_geometry_known:
        return None
    margin = margin_words(forecast)
    caption = (
        "Share of the geometries that reach each goal, against exposure"
        + (f" ({margin})" if margin else "")
        + f". Thin lines: half, 84 per cent, and {duration(requested_exposure_s(forecast))}, the "
        + ("" if len(forecast.exposures_s) == 1 else "longest ")
        + "exposure requested."
    )
    return picture(
        "share",
        partial(_draw_share, forecast),
        caption=caption,
        alternative=f"Rising steps. {headline(forecast)}",
    )


def precision_picture(forecast: Forecast) -> Picture | None:
    """Return precision against exposure with its spread and the goals; None if all is fixed."""
    quantities = _quantities(forecast)
    if not quantities:
        return None
    spread = (
        "" if forecast.is_geometry_known else "; band: the 16–84 per cent range over the geometries"
    )
    median = "" if forecast.is_geometry_known else ", median"
    is_one = len(forecast.exposures_s) == 1
    line, dotted = ("Disc", "Square") if is_one else ("Line", "Dotted")
    caption = (
        "One sigma over the value, against exposure. "
        f"{line}: from the data{median}{spread}. {dotted}: "
        "with the flat priors on mass and radius as well. Grey lines with their numbers: the "
        "goals. Open circles: prior-limited, no measurement."
    )
    names = " and ".join(NAMES[each] for each in quantities)
    last = [
        f"{NAMES[each]} {_percent_words(forecast.curve(each))}"
        for each in quantities
        if not forecast.curve(each).is_prior_limited[-1]
    ]
    end = duration(requested_exposure_s(forecast))
    alternative = f"Curves of the precision in {names}, falling with exposure."
    if last:
        alternative += f" At {end}: {', '.join(last)}."
    return picture(
        "precision",
        partial(_draw_precision, forecast, quantities),
        caption=caption,
        alternative=alternative,
    )


def _quantities(forecast: Forecast) -> tuple[QuantityName, ...]:
    wanted = {cost.goal.quantity for cost in costs(forecast)} | {"radius", "mass"}
    return tuple(
        quantity
        for quantity in SHOWN
        if quantity in wanted and forecast.curve(quantity).prior_sigma != 0.0
    )


def _percent_words(curve: QuantityCurve) -> str:
    relative = float(curve.data_sigma.p50[-1]) / curve.fiducial
    return f"{percent(relative)} per cent" if math.isfinite(relative) else "unconstrained"


def _draw_share(forecast: Forecast) -> Figure:
    every = costs(forecast)
    start, end = _time_range(forecast, every)
    figure = new_figure(2.9)
    axes = figure.add_subplot()
    time_axis(axes, start, end)
    for level in (50.0, 84.0):
        axes.axhline(level, color=FAINT, linewidth=0.6)
    axes.axvline(requested_exposure_s(forecast), color=FAINT, linewidth=0.6)
    for number, cost in enumerate(every):
        times = np.sort(cost.required_s[np.isfinite(cost.required_s)])
        shares = np.array([100.0 * cost.share_by(float(time)) for time in times])
        before = 100.0 * cost.share_by(start)
        inside = (times > start) & (times <= end)
        last = shares[inside][-1] if inside.any() else before
        axes.step(
            np.concatenate([[start], times[inside], [end]]),
            np.concatenate([[before], shares[inside], [last]]),
            where="post",
            color=COLORS[number % len(COLORS)],
            linestyle=DASHES[number % len(DASHES)],
            label=f"{cost.goal.quantity} {percent(cost.goal.precision)} %",
        )
    axes.set_ylim(0.0, 102.0)
    axes.set_yticks([0.0, 16.0, 50.0, 84.0, 100.0])
    axes.set_ylabel("share of the geometries (%)")
    legend_above(axes, min(3, len(every)))
    return figure


def _time_range(forecast: Forecast, every: tuple[Cost, ...]) -> tuple[float, float]:
    """Return the exposures between which something happens."""
    finite = [
        time
        for cost in every
        for time in (cost.p16, cost.p50, cost.p84)
        if 0.0 < time <= cost.longest_s
    ]
    start = min([float(forecast.exposures_s[0]), *(0.7 * time for time in finite)])
    end = max([float(forecast.exposures_s[-1]), *(1.4 * time for time in finite)])
    if not every[0].is_asked:
        start, end = float(forecast.exposures_s[0]), float(forecast.exposures_s[-1])
    return (start, end) if end > 1.5 * start else (0.5 * start, 2.0 * start)


def _draw_precision(forecast: Forecast, quantities: tuple[QuantityName, ...]) -> Figure:
    figure = new_figure(0.6 + 2.0 * len(quantities))
    panels = figure.subplots(len(quantities), 1, sharex=True, squeeze=False)[:, 0]
    times = forecast.exposures_s
    start, end = float(times[0]), float(times[-1])
    if end <= start:
        start, end = 0.7 * start, 1.4 * end
    for panel, quantity in zip(panels, quantities, strict=True):
        time_axis(panel, start, end, only=None if len(times) > 1 else float(times[0]))
        panel.set_xlabel("")
        _draw_curve(panel, forecast, quantity)
    panels[-1].set_xlabel("good on-source time")
    return figure


def _draw_curve(axes: Axes, forecast: Forecast, quantity: QuantityName) -> None:
    curve, times = forecast.curve(quantity), forecast.exposures_s
    color = COLORS[SHOWN.index(quantity)]
    low, middle, high, held = (
        100.0 * values / abs(curve.fiducial)
        for values in (
            curve.data_sigma.p16,
            curve.data_sigma.p50,
            curve.data_sigma.p84,
            curve.sigma.p50,
        )
    )
    goals = [
        100.0 * cost.goal.precision for cost in costs(forecast) if cost.goal.quantity == quantity
    ]
    bottom, top = _limits(np.concatenate([low, middle, high, held, goals]))
    axes.set_yscale("log")
    axes.set_ylim(bottom, top)
    plain_log_axis(axes.yaxis, bottom, top)
    axes.set_ylabel(f"{quantity} (%)")
    marker = "o" if len(times) == 1 else None
    beyond = 10.0 * top
    if not forecast.is_geometry_known:
        floor, roof = (np.nan_to_num(each, nan=beyond, posinf=beyond) for each in (low, high))
        if len(times) == 1:
            axes.vlines(times, floor, roof, color=color, alpha=0.35, linewidth=6.0)
        else:
            axes.fill_between(times, floor, roof, color=color, alpha=0.16, linewidth=0.0)
    axes.plot(times, np.where(np.isfinite(middle), middle, beyond), color=color, marker=marker)
    axes.plot(
        times,
        held,
        color=color,
        linestyle=(0, (1.0, 1.6)),
        linewidth=1.2,
        marker="s" if marker else None,
        markerfacecolor="none",
    )
    limited = np.array(curve.is_prior_limited) & np.isfinite(middle)
    axes.plot(
        times[limited],
        middle[limited],
        linestyle="",
        marker="o",
        markersize=4.5,
        markerfacecolor="none",
        markeredgecolor=color,
    )
    if not np.isfinite(middle).any():
        words = "unconstrained by the data"
        axes.annotate(words, (0.5, 0.5), xycoords="axes fraction", ha="center", color=INK)
    for level in goals:
        axes.axhline(level, color=FAINT, linewidth=0.9)
        axes.annotate(
            f"{level:.3g} %",
            (1.0, level),
            xycoords=("axes fraction", "data"),
            xytext=(3.0, 0.0),
            textcoords="offset points",
            va="center",
            color=INK,
            fontsize=8.5,
        )


def _limits(values: Floats) -> tuple[float, float]:
    """Return the ends of a logarithmic axis that holds every finite value."""
    finite = values[np.isfinite(values) & (values > 0.0)]
    if not finite.size:
        return 1.0, 100.0
    low, high = float(finite.min()) / 1.25, float(finite.max()) * 1.25
    high = min(high, 300.0) if low < 100.0 else high
    return (low, high) if high > 3.0 * low else (low / 1.6, high * 1.6)
