"""Tables and facts of a forecast as ready words, the same for text and for the page."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Final

import numpy as np

from exptime.information.precision import Quantity as QuantityName
from exptime.report.digits import (
    decimals_of_uncertainty,
    duration,
    percent,
    precision,
    share_number,
    significant,
    uncertainty,
)
from exptime.report.goals import Cost, costs, requested_exposure_s
from exptime.report.sentences import margin_words
from exptime.report.words import NAMES, UNITS, printable, with_unit
from exptime.study.records import Forecast

SHOWN: Final[tuple[QuantityName, ...]] = ("radius", "mass", "compactness")
PRIOR_LIMITED: Final = "prior-limited"
_MOST_ROWS: Final = 16
_THINNED_ROWS: Final = 13

Facts = tuple[tuple[str, str], ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Table:
    """A table of words, ready to be set.

    Parameters
    ----------
    caption : str
        What it shows.
    header : tuple of str
        Titles of the columns.
    rows : tuple of tuple of str
        The first cell of each row names it.
    """

    caption: str
    header: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]


def shown_exposures(forecast: Forecast) -> list[int]:
    """Return the exposures that tables show: all, or thirteen where they are many."""
    count = len(forecast.exposures_s)
    if count <= _MOST_ROWS:
        return list(range(count))
    return sorted({round(each) for each in np.linspace(0, count - 1, _THINNED_ROWS)})


def precision_tables(forecast: Forecast) -> tuple[Table, ...]:
    """Return one table of precision against exposure for each quantity that is free."""
    return tuple(
        _precision_table(forecast, quantity)
        for quantity in SHOWN
        if forecast.curve(quantity).prior_sigma != 0.0
    )


def goals_table(forecast: Forecast) -> Table:
    """Return what each goal costs."""
    margin = margin_words(forecast)
    requested = duration(requested_exposure_s(forecast))
    caption = "Exposure for each goal" + (f", {margin}" if margin else "")
    if forecast.is_geometry_known:
        header: tuple[str, ...] = ("goal", "exposure")
        rows = tuple((_goal(cost), _time(cost, cost.p50, 3)) for cost in costs(forecast))
        return Table(caption=caption, header=header, rows=rows)
    return Table(
        caption=f"{caption}, by share of the geometries",
        header=("goal", "16 %", "50 %", "84 %", f"reached by {requested}"),
        rows=tuple(
            (
                _goal(cost),
                *(_time(cost, each) for each in (cost.p16, cost.p50, cost.p84)),
                share_number(cost.share_by(requested_exposure_s(forecast))),
            )
            for cost in costs(forecast)
        ),
    )


def shares_table(forecast: Forecast) -> Table:
    """Return the share of the geometries that reaches each goal at each exposure."""
    every = costs(forecast)
    margin = margin_words(forecast)
    return Table(
        caption="Share of the geometries that reaches each goal" + (f", {margin}" * bool(margin)),
        header=("exposure", *(_goal(cost) for cost in every)),
        rows=tuple(
            (duration(time), *(share_number(cost.share_by(time)) for cost in every))
            for time in forecast.exposures_s[shown_exposures(forecast)].tolist()
        ),
    )


def reading(forecast: Forecast) -> str:
    """Return how the tables of precision are read."""
    median = "" if forecast.is_geometry_known else "median over the geometries, "
    spread = "" if forecast.is_geometry_known else ", with its 16–84 per cent range"
    relative = (
        ""
        if forecast.is_geometry_known
        else " relative: to the value of the median geometry, in the caption; a goal is judged at "
        "each geometry's own value."
    )
    return (
        f"data sigma: {median}from the data and every measured constraint{spread}; sigma: "
        f"{median}with the flat priors on mass and radius as well. {PRIOR_LIMITED}: what was known "
        "beforehand says more than the data and all else; not to be quoted as a measurement."
        f"{relative}"
    )


def fixed_quantities(forecast: Forecast) -> tuple[str, ...]:
    """Return a sentence for each quantity that is held fixed and has no table."""
    return tuple(
        f"The {NAMES[quantity]} is held fixed, as the target file asks."
        for quantity in SHOWN
        if forecast.curve(quantity).prior_sigma == 0.0
    )


def key_facts(forecast: Forecast) -> Facts:
    """Return the few numbers that a reader looks for first."""
    every = costs(forecast)
    cost = next((each for each in every if not each.is_met_beforehand), every[0])
    requested = requested_exposure_s(forecast)
    pairs: list[tuple[str, str]] = []
    if forecast.is_geometry_known:
        pairs.append((f"{_goal(cost)} takes", _time(cost, cost.p50, 3)))
    else:
        pairs += [
            (f"{_goal(cost)}, half of the geometries", _time(cost, cost.p50)),
            ("84 per cent of them", _time(cost, cost.p84)),
            (f"reach it by {duration(requested)}", share_number(cost.share_by(requested))),
        ]
    signal = (
        f"{significant(forecast.source_per_s, 3)} / {significant(forecast.background_per_s, 3)}"
    )
    pairs.append(("source / background, counts/s", signal))
    return tuple(pairs)


def geometry_facts(forecast: Forecast) -> Facts:
    """Return what the forecast knows of the geometry."""
    pairs = []
    if forecast.is_geometry_known:
        pairs.append(("geometry", "as given in the target file"))
    else:
        pairs.append(
            (
                "geometries",
                f"{len(forecast.geometries)} of {forecast.candidates} candidates, worth "
                f"{significant(forecast.effective_geometries, 2)} of equal weight",
            )
        )
        pairs.append(("spots that never show", str(forecast.hidden_spots)))
    for fraction in forecast.pulsed_fractions:
        reached = fraction.reached
        low, middle, high = (float(each) for each in (reached.p16, reached.p50, reached.p84))
        pairs.append(
            (
                f"pulsed fraction ({printable(fraction.label)})",
                f"{significant(fraction.asked, 3)} ± {significant(fraction.uncertainty, 2)} "
                f"measured; {_range(low, middle, high, 3)} reached",
            )
        )
    title = "star" if forecast.is_geometry_known else "median geometry"
    pairs.append((title, _star(forecast)))
    spread = forecast.correlation_mass_radius
    low, middle, high = (float(each) for each in (spread.p16, spread.p50, spread.p84))
    words = significant(middle, 2) if low == high else _range(low, middle, high, 2)
    pairs.append(("correlation of mass and radius", words))
    return tuple(pairs)


def rate_facts(forecast: Forecast) -> Facts:
    """Return count rates, and counts of the exposure spoken of."""
    edges = forecast.expected.channel_edges_kev
    requested = requested_exposure_s(forecast)
    source, background = forecast.source_per_s, forecast.background_per_s
    where = "" if forecast.is_geometry_known else ", median geometry"
    return (
        *(("instrument", _instrument(each.name, each.id)) for each in forecast.instruments),
        ("band", f"{edges[0]:.3g}-{edges[-1]:.3g} keV"),
        ("source", f"{significant(source, 3)} counts/s{where}"),
        ("background", f"{significant(background, 3)} counts/s"),
        (
            f"counts in {duration(requested)}",
            f"{significant(source * requested, 3)} of the source, "
            f"{significant(background * requested, 3)} of the background",
        ),
    )


def run_facts(forecast: Forecast) -> Facts:
    """Return what is needed to make the same numbers again."""
    file = forecast.target.file
    return (
        ("target file", "standard input" if file == "-" else printable(file)),
        ("seed", str(forecast.seed)),
        *((printable(name), printable(version)) for name, version in forecast.versions.items()),
    )


def _precision_table(forecast: Forecast, quantity: QuantityName) -> Table:
    curve = forecast.curve(quantity)
    value, unit = curve.fiducial, UNITS[quantity]
    title = f"{NAMES[quantity][0].upper()}{NAMES[quantity][1:]}"
    caption = f"{title}: one sigma" + (f" in {unit}" if unit else "")
    caption += f", at {with_unit(significant(value, 3), quantity)}"
    spread_header = () if forecast.is_geometry_known else ("16–84 %",)
    rows: list[tuple[str, ...]] = []
    for index in shown_exposures(forecast):
        low, middle, high = (
            float(each[index])
            for each in (curve.data_sigma.p16, curve.data_sigma.p50, curve.data_sigma.p84)
        )
        spread = () if forecast.is_geometry_known else (_sigma_range(low, high, value),)
        rows.append(
            (
                duration(float(forecast.exposures_s[index])),
                uncertainty(middle, value),
                precision(middle, value),
                *spread,
                uncertainty(float(curve.sigma.p50[index]), value),
                PRIOR_LIMITED if curve.is_prior_limited[index] else "",
            )
        )
    header: tuple[str, ...] = (
        "exposure",
        "data sigma",
        "relative",
        *spread_header,
        "sigma",
        "remark",
    )
    if not any(curve.is_prior_limited[index] for index in shown_exposures(forecast)):
        header, rows = header[:-1], [row[:-1] for row in rows]
    return Table(caption=caption, header=header, rows=tuple(rows))


def _goal(cost: Cost) -> str:
    return f"{cost.goal.quantity} {percent(cost.goal.precision)} %"


def _time(cost: Cost, seconds: float, digits: int = 2) -> str:
    if seconds <= 0.0:
        return "none"
    if math.isinf(seconds):
        return f"> {duration(cost.longest_s)}"
    return duration(seconds, digits)


def _sigma_range(low: float, high: float, value: float) -> str:
    first, last = uncertainty(low, value), uncertainty(high, value)
    return first if first == last else f"{first}–{last}"


def _range(low: float, middle: float, high: float, digits: int) -> str:
    """Return a median with its quantiles, such as ``"0.60 [0.55, 0.65]"``."""
    if not all(math.isfinite(each) for each in (low, middle, high)):
        return significant(middle, digits)
    width = max(high - low, abs(middle) * 1e-3)
    places = max(0, decimals_of_uncertainty(width)) if width > 0.0 else digits
    return f"{middle:.{places}f} [{low:.{places}f}, {high:.{places}f}]"


def _star(forecast: Forecast) -> str:
    geometry = forecast.geometries[forecast.median_index]
    star = geometry.star
    inclination = math.degrees(math.acos(min(1.0, max(-1.0, star.cos_inclination))))
    spots = "; ".join(
        f"spot at colatitude {_degrees(spot.colatitude)}, longitude {_degrees(spot.longitude)}, "
        f"angular radius {_degrees(spot.angular_radius)}, kT {spot.temperature_kev:.3g} keV"
        for spot in geometry.spots
    )
    return (
        f"{significant(star.mass_msun, 3)} Msun, {significant(star.radius_km, 3)} km, inclination "
        f"{inclination:.1f} deg; {spots}"
    )


def _degrees(angle: float) -> str:
    return f"{math.degrees(angle):.1f} deg"


def _instrument(name: str, identifier: str) -> str:
    return printable(name) if name == identifier else f"{printable(name)} [{printable(identifier)}]"
