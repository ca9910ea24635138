"""The figure of mass and radius together."""

from __future__ import annotations

import math
from functools import partial
from typing import TYPE_CHECKING

import numpy as np

from exptime.arrays import Floats
from exptime.report.digits import duration
from exptime.report.drawing import (
    COLORS,
    DASHES,
    INK,
    Picture,
    legend_above,
    new_figure,
    picture,
)
from exptime.study.records import Forecast

if TYPE_CHECKING:
    from matplotlib.figure import Figure

_JOINT_68 = math.sqrt(-2.0 * math.log(1.0 - 0.6827))
"""Half axes, in standard deviations, of the ellipse that holds 68.27 per cent of two Gaussians."""


def ellipse_picture(forecast: Forecast) -> Picture | None:
    """Return ellipses of mass and radius at up to three exposures; None where there are none."""
    indices = [
        index
        for index in sorted(
            {0, (len(forecast.exposures_s) - 1) // 2, len(forecast.exposures_s) - 1}
        )
        if _is_proper(forecast.covariance_mass_radius[index])
    ]
    if not indices:
        return None
    times = ", ".join(duration(float(forecast.exposures_s[index])) for index in indices)
    where = "the geometry given" if forecast.is_geometry_known else "the median geometry"
    limited = [
        quantity
        for quantity in ("radius", "mass")
        if forecast.curve(quantity).is_prior_limited[indices[-1]]
    ]
    remark = f" The {' and the '.join(limited)} stays prior-limited." if limited else ""
    return picture(
        "ellipses",
        partial(_draw_ellipses, forecast, indices),
        caption=f"Mass and radius together at {where} after {times}, with every prior. Each "
        f"ellipse holds 68 per cent of the joint probability.{remark}",
        alternative=f"Ellipses of mass against radius that shrink with exposure ({times}).",
    )


def _is_proper(covariance: Floats) -> bool:
    return bool(np.all(np.isfinite(covariance)) and np.linalg.eigvalsh(covariance)[1] > 0.0)


def _draw_ellipses(forecast: Forecast, indices: list[int]) -> Figure:
    figure = new_figure(3.4)
    axes = figure.add_subplot()
    angle = np.linspace(0.0, 2.0 * math.pi, 181)
    circle = np.stack([np.cos(angle), np.sin(angle)])
    for number, index in enumerate(indices):
        values, vectors = np.linalg.eigh(forecast.covariance_mass_radius[index])
        half_axes = vectors * np.sqrt(np.clip(values, 0.0, None))
        mass, radius = _JOINT_68 * half_axes @ circle
        axes.plot(
            forecast.radius.fiducial + radius,
            forecast.mass.fiducial + mass,
            color=COLORS[number],
            linestyle=DASHES[number],
            label=duration(float(forecast.exposures_s[index])),
        )
    axes.plot(forecast.radius.fiducial, forecast.mass.fiducial, "+", color=INK, markersize=8)
    axes.set_xlabel("equatorial radius (km)")
    axes.set_ylabel("mass (Msun)")
    legend_above(axes, 3)
    return figure
