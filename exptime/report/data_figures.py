"""Figures of the data to expect: the pulse in three bands, the spectrum over its background."""

from __future__ import annotations

from functools import partial
from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np

from exptime.arrays import Floats
from exptime.report.digits import duration, share
from exptime.report.drawing import (
    COLORS,
    DASHES,
    FAINT,
    Picture,
    legend_above,
    new_figure,
    picture,
    plain_log_axis,
)
from exptime.report.goals import requested_exposure_s
from exptime.study.records import Forecast

if TYPE_CHECKING:
    from matplotlib.figure import Figure

_BANDS = 3
_MANY = 2e4


def pulse_picture(forecast: Forecast) -> Picture | None:
    """Return the expected pulse in up to three bands; None where no counts are expected."""
    bands = energy_bands(forecast)
    if not bands:
        return None
    edges = forecast.expected.channel_edges_kev
    names = ", ".join(_band_name(edges, band) for band in bands)
    time = duration(requested_exposure_s(forecast))
    return picture(
        "pulse",
        partial(_draw_pulse, forecast, bands),
        caption=f"Expected source counts in each phase bin after {time}, in bands of about equal "
        f"counts ({names}). Bars: one sigma of the Poisson noise of source and background, often "
        f"smaller than the line. {_where(forecast)}",
        alternative=f"One rotation of the pulse in the bands {names}.",
    )


def spectrum_picture(forecast: Forecast) -> Picture | None:
    """Return the count spectrum over its background; None where no counts are expected."""
    source, background = _spectra(forecast)
    if not np.any(source > 0.0):
        return None
    edges = forecast.expected.channel_edges_kev
    above = source > background
    peak = float(edges[:-1][np.argmax(source)])
    alternative = f"The source spectrum peaks near {peak:.2g} keV."
    if not background.any():
        alternative += " There is no background."
    elif above.all():
        alternative += " It lies above the background in every channel."
    elif above.any():
        counts = source * np.diff(edges)
        part = share(float(counts[above].sum() / counts.sum()))
        alternative += f" Channels where it lies above the background hold {part} of its counts."
    else:
        alternative += " It lies below the background in every channel."
    return picture(
        "spectrum",
        partial(_draw_spectrum, forecast),
        caption="Expected count spectrum, averaged over the pulse, and its background. "
        + _where(forecast),
        alternative=alternative,
    )


def energy_bands(forecast: Forecast) -> list[slice]:
    """Return up to three ranges of channels of about equal source counts."""
    counts = np.maximum(forecast.expected.source_per_s, 0.0).mean(axis=0)
    if not counts.sum() > 0.0:
        return []
    risen = np.cumsum(counts) / counts.sum()
    inner = [int(np.searchsorted(risen, part / _BANDS)) + 1 for part in range(1, _BANDS)]
    ends = sorted({0, *inner, len(counts)})
    return [slice(low, high) for low, high in pairwise(ends) if counts[low:high].sum() > 0.0]


def _where(forecast: Forecast) -> str:
    return "Geometry as given." if forecast.is_geometry_known else "Median geometry."


def _band_name(edges: Floats, band: slice) -> str:
    return f"{edges[band.start]:.3g}-{edges[band.stop]:.3g} keV"


def _draw_pulse(forecast: Forecast, bands: list[slice]) -> Figure:
    data = forecast.expected
    figure = new_figure(0.5 + 1.25 * len(bands))
    panels = figure.subplots(len(bands), 1, sharex=True, squeeze=False)[:, 0]
    per_bin = requested_exposure_s(forecast) / len(data.phase)
    peak = per_bin * float(np.max(data.source_per_s))
    unit, thousands = (1e3, " (thousands)") if peak > _MANY else (1.0, "")
    for number, (panel, band) in enumerate(zip(panels, bands, strict=True)):
        source = per_bin * np.maximum(data.source_per_s[:, band], 0.0).sum(axis=1)
        noise = np.sqrt(source + per_bin * data.background_per_s[band].sum())
        source, noise = source / unit, noise / unit
        color = COLORS[number]
        edges = np.linspace(0.0, 1.0, len(data.phase) + 1)
        panel.stairs(source, edges, baseline=None, color=color, linewidth=1.3)
        panel.errorbar(data.phase, source, noise, fmt="none", ecolor=color, elinewidth=0.9)
        panel.set_xlim(0.0, 1.0)
        panel.set_ylim(0.0, 1.3 * float(np.max(source + noise)))
        panel.locator_params(axis="y", nbins=4)
        panel.ticklabel_format(axis="y", style="plain")
        panel.annotate(
            _band_name(data.channel_edges_kev, band),
            (1.0, 1.0),
            xycoords="axes fraction",
            xytext=(-2.0, -1.0),
            textcoords="offset points",
            ha="right",
            va="top",
            color=color,
        )
    panels[-1].set_xlabel("phase (rotations)")
    figure.supylabel(f"source counts per phase bin{thousands}", fontsize=10.2)
    return figure


def _draw_spectrum(forecast: Forecast) -> Figure:
    edges = forecast.expected.channel_edges_kev
    source, background = _spectra(forecast)
    figure = new_figure(2.9)
    axes = figure.add_subplot()
    axes.set_xscale("log")
    axes.set_yscale("log")
    peak = float(max(source.max(), background.max()))
    positive = np.concatenate([source[source > 0.0], background[background > 0.0]])
    bottom = max(0.5 * float(positive.min()), 1e-6 * peak)
    # A curve that falls below the axis leaves it instead of ending in the air.
    axes.stairs(
        np.maximum(source, 1e-3 * bottom),
        edges,
        baseline=None,
        color=COLORS[0],
        linewidth=1.5,
        label="source",
    )
    if background.any():
        axes.stairs(
            np.maximum(background, 1e-3 * bottom),
            edges,
            baseline=None,
            color=COLORS[1],
            linestyle=DASHES[1],
            linewidth=1.5,
            label="background",
        )
    axes.set_ylim(bottom, 2.0 * peak)
    axes.set_xlim(float(edges[0]), float(edges[-1]))
    plain_log_axis(axes.xaxis, float(edges[0]), float(edges[-1]))
    axes.grid(visible=True, axis="y", color=FAINT, alpha=0.25, linewidth=0.5)
    axes.set_xlabel("energy (keV)")
    axes.set_ylabel("counts s⁻¹ keV⁻¹")
    legend_above(axes, 2)
    return figure


def _spectra(forecast: Forecast) -> tuple[Floats, Floats]:
    """Return source and background, counts/s/keV in each channel."""
    data = forecast.expected
    widths = np.diff(data.channel_edges_kev)
    source = np.maximum(data.source_per_s, 0.0).mean(axis=0)
    return np.asarray(source / widths), np.asarray(data.background_per_s / widths)
