"""The figure of a verification: how the deviance rises along each profile."""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING, Final

import numpy as np

from exptime.report.drawing import (
    COLORS,
    DASHES,
    FAINT,
    INK,
    Picture,
    legend_above,
    new_figure,
    picture,
)
from exptime.report.proof import verdict_sentence
from exptime.report.tables import SHOWN
from exptime.study.profile import RISES, Profile
from exptime.study.verify_records import CheckedGeometry, Verification

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

_HIGHEST: Final = 5.0
_WIDEST: Final = 4.2


def profile_picture(verification: Verification) -> Picture:
    """Return the deviance along each profile in bounds from the truth, with the parabola.

    Parameters
    ----------
    verification : Verification
        One panel is drawn for each of its geometries.
    """
    names = ", ".join(geometry.label for geometry in verification.geometries)
    panels = "" if len(verification.geometries) == 1 else f" Panels: {names}."
    return picture(
        "profiles",
        partial(_draw, verification),
        caption="Rise of the deviance when a quantity is held away from the truth and everything "
        "else refitted, against the distance in bounds. Grey: the parabola that the bound "
        "stands for, and the rises that end the 68 and 95 per cent intervals. Open circles: "
        f"within hard limits.{panels}",
        alternative=f"Curves about a parabola. {verdict_sentence(verification)}",
    )


def _draw(verification: Verification) -> Figure:
    count = len(verification.geometries)
    figure = new_figure(0.7 + 2.2 * count)
    panels = figure.subplots(count, 1, sharex=True, squeeze=False)[:, 0]
    for axes, geometry in zip(panels, verification.geometries, strict=True):
        _draw_geometry(axes, geometry)
        if count > 1:
            axes.annotate(
                geometry.label, (0.01, 0.97), xycoords="axes fraction", ha="left", va="top",
                color=INK, fontsize=8.5,
            )  # fmt: skip
    legend_above(panels[0], 3)
    panels[-1].set_xlabel("distance from the truth, in bounds")
    return figure


def _draw_geometry(axes: Axes, geometry: CheckedGeometry) -> None:
    away = np.linspace(-_WIDEST, _WIDEST, 121)
    axes.plot(away, away**2, color=FAINT, linewidth=2.6, zorder=1)
    for rise in RISES:
        axes.axhline(rise, color=FAINT, linewidth=0.6)
    for profile in geometry.profiles:
        number = SHOWN.index(profile.quantity)
        axes.plot(
            *_curve(profile),
            color=COLORS[number],
            linestyle=DASHES[number],
            label=profile.quantity,
        )
    for profile in geometry.bounded_profiles:
        number = SHOWN.index(profile.quantity)
        axes.plot(
            *_curve(profile),
            linestyle="",
            marker="o",
            markersize=3.6,
            markerfacecolor="none",
            markeredgewidth=0.8,
            markeredgecolor=COLORS[number],
        )
    axes.set_xlim(-_WIDEST, _WIDEST)
    axes.set_ylim(0.0, _HIGHEST)
    axes.set_yticks([0.0, *RISES], ["0", "1", "3.84"])
    axes.set_ylabel("rise of the deviance")


def _curve(profile: Profile) -> tuple[list[float], list[float]]:
    return (
        [(point.value - profile.truth) / profile.bound for point in profile.points],
        [point.rise for point in profile.points],
    )
