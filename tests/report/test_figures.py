"""Figures show the numbers of the record, the same way every time."""

from __future__ import annotations

import hashlib
import math
import re
import subprocess
import sys
from collections.abc import Callable
from dataclasses import replace
from xml.etree import ElementTree

import numpy as np
import pytest

from exptime.report import data_figures, ellipses, figures
from exptime.report.drawing import COLORS, VARIABLES, Picture
from exptime.study.records import Forecast
from tests.report import results
from tests.report.results import STATES

MAKERS: dict[str, Callable[[Forecast], Picture | None]] = {
    "share": figures.share_picture,
    "precision": figures.precision_picture,
    "ellipses": ellipses.ellipse_picture,
    "pulse": data_figures.pulse_picture,
    "spectrum": data_figures.spectrum_picture,
}


def drawn(name: str, forecast: Forecast) -> Picture:
    picture = MAKERS[name](forecast)
    assert picture is not None
    return picture


@pytest.mark.parametrize("state", ["margin", "no-goal", "partly-reached", "partly-beforehand"])
def test_figures_are_well_formed(state: str) -> None:
    """Each is one svg element with words for those who cannot see it, and a caption."""
    forecast = STATES[state]()
    for name, make in MAKERS.items():
        picture = make(forecast)
        if picture is None:
            continue
        root = ElementTree.fromstring(picture.svg)  # noqa: S314  our own text
        assert root.tag == "svg"
        assert root.get("role") == "img"
        assert root.get("aria-label") == picture.alternative
        assert picture.name == name
        assert picture.caption.endswith(".")
        assert "nan" not in picture.svg.lower().replace("dominan", "")


def test_figures_without_meaning_are_left_out() -> None:
    """No shares of one geometry, no ellipse of an infinite covariance, no counts of no source."""
    dark = results.expected()
    dark = replace(dark, source_per_s=np.zeros_like(dark.source_per_s))
    assert figures.share_picture(results.known_geometry()) is None
    assert ellipses.ellipse_picture(results.unconstrained()) is None
    assert data_figures.pulse_picture(replace(results.normal(), expected=dark)) is None
    assert data_figures.spectrum_picture(replace(results.normal(), expected=dark)) is None


def test_fixed_mass_and_radius_leave_no_precision_to_draw() -> None:
    """Nothing is free, and nothing is drawn."""
    base = results.normal()
    forecast = replace(
        base,
        mass=replace(base.mass, prior_sigma=0.0),
        radius=replace(base.radius, prior_sigma=0.0),
        compactness=replace(base.compactness, prior_sigma=0.0),
    )
    assert figures.precision_picture(forecast) is None


@pytest.mark.parametrize("name", MAKERS)
def test_figures_load_nothing_and_leak_nothing(name: str) -> None:
    """No address, no style sheet that reaches the page, no fixed colour, no stray id."""
    svg = drawn(name, results.normal()).svg
    assert "http" not in svg
    assert "<style" not in svg
    assert "font-family" not in svg
    assert not re.findall(r"#[0-9a-f]{6}", svg)
    ids = re.findall(r' id="([^"]+)"', svg)
    assert len(ids) == len(set(ids))
    assert all(each.startswith(f"{name}-") for each in ids)
    assert set(re.findall(r'href="#([^"]+)"', svg)) <= set(ids)
    assert set(re.findall(r"url\(#([^)]+)\)", svg)) <= set(ids)


def test_the_same_numbers_give_the_same_file_in_any_process() -> None:
    """Byte for byte, whatever the order of hashes."""
    program = (
        "import hashlib\nfrom tests.report.test_figures import MAKERS, drawn\n"
        "from tests.report.results import normal\n"
        "print(hashlib.sha256(''.join(drawn(x, normal()).svg for x in MAKERS).encode())"
        ".hexdigest())"
    )
    here = hashlib.sha256(
        "".join(drawn(name, results.normal()).svg for name in MAKERS).encode()
    ).hexdigest()
    there = subprocess.run(
        [sys.executable, "-c", program], capture_output=True, text=True, check=True, timeout=120
    )
    assert there.stdout.strip() == here


def test_a_users_own_settings_change_nothing_and_are_kept() -> None:
    """Figures look the same inside a session that has settings of its own."""
    import matplotlib

    plain = drawn("share", results.normal()).svg
    with matplotlib.rc_context({"axes.grid": True, "font.size": 30.0, "svg.hashsalt": "mine"}):
        assert drawn("share", results.normal()).svg == plain
        assert matplotlib.rcParams["axes.grid"] is True
        assert matplotlib.rcParams["svg.hashsalt"] == "mine"


def test_no_plotting_session_is_started() -> None:
    """pyplot, which keeps figures alive and looks for a screen, is never imported."""
    program = (
        "import sys\nfrom tests.report.test_figures import MAKERS, drawn\n"
        "from tests.report.results import normal\nfor x in MAKERS: drawn(x, normal())\n"
        "print('matplotlib.pyplot' in sys.modules)"
    )
    done = subprocess.run(
        [sys.executable, "-c", program], capture_output=True, text=True, check=True, timeout=120
    )
    assert done.stdout.strip() == "False"


@pytest.mark.parametrize(("factor", "forecast"), [(1.0, "normal"), (1.15, "margin")])
def test_the_share_curve_counts_geometries(factor: float, forecast: str) -> None:
    """At any time it is the share of geometries whose need, margin included, is met."""
    figure = figures._draw_share(STATES[forecast]())
    curve = next(line for line in figure.axes[0].lines if line.get_label() == "radius 5 %")
    times, shares = (np.asarray(each, float) for each in curve.get_data())
    need = factor * 1e6 * (results.SIGMAS_AT_1MS_KM / 0.6) ** 2
    for time in (1.1e5, 5e5, 1e6, 5e6):
        shown = shares[np.searchsorted(times, time, side="right") - 1]
        assert shown == pytest.approx(100.0 * np.mean(need <= time), abs=1e-9)


def test_the_ellipse_holds_68_per_cent_of_the_joint_probability() -> None:
    """Two hundred thousand draws from the covariance: 0.6827 within four standard errors."""
    forecast = results.normal()
    figure = ellipses._draw_ellipses(forecast, [4])
    radius, mass = (np.asarray(each, float) for each in figure.axes[0].lines[0].get_data())
    from matplotlib.path import Path

    outline = Path(np.stack([radius, mass], axis=1))
    draws = np.random.default_rng(1).multivariate_normal(
        [1.5, 12.0], forecast.covariance_mass_radius[4], size=200_000
    )
    inside = outline.contains_points(draws[:, ::-1]).mean()
    # The outline is a polygon of 180 sides: its area is short by 2e-4.
    assert inside == pytest.approx(0.6827, abs=4.0 * math.sqrt(0.6827 * 0.3173 / 200_000) + 1e-4)


def test_bars_are_the_noise_of_source_and_background() -> None:
    """Their lengths are the roots of all counts in the bin."""
    forecast = results.normal()
    bands = data_figures.energy_bands(forecast)
    figure = data_figures._draw_pulse(forecast, bands)
    per_bin = 1e6 / results.BINS
    for axes, band in zip(figure.axes, bands, strict=True):
        source = per_bin * forecast.expected.source_per_s[:, band].sum(axis=1)
        all_counts = source + per_bin * 0.002 * (band.stop - band.start)
        bars = axes.collections[0].get_segments()
        lengths = [segment[1, 1] - segment[0, 1] for segment in bars]
        np.testing.assert_allclose(lengths, 2.0 * np.sqrt(all_counts), rtol=1e-12)


def test_bands_share_the_counts_and_leave_no_channel_out() -> None:
    """Three neighbouring bands of about a third each."""
    forecast = results.normal()
    bands = data_figures.energy_bands(forecast)
    assert [band.start for band in bands[1:]] == [band.stop for band in bands[:-1]]
    assert (bands[0].start, bands[-1].stop) == (0, 27)
    counts = forecast.expected.source_per_s.mean(axis=0)
    parts = [counts[band].sum() / counts.sum() for band in bands]
    # No channel holds more than an eighth of the counts.
    assert max(abs(part - 1.0 / 3.0) for part in parts) < 0.125


def test_what_is_infinite_leaves_the_frame_upwards() -> None:
    """The band of a spread that is infinite above has no upper edge in sight."""
    base = results.normal()
    spread = replace(base.radius.data_sigma, p84=np.full(5, math.inf))
    forecast = replace(base, radius=replace(base.radius, data_sigma=spread))
    axes = figures._draw_precision(forecast, ("radius",)).axes[0]
    band = axes.collections[0].get_paths()[0].vertices
    assert band[:, 1].max() > axes.get_ylim()[1]


def test_colours_stand_apart_for_every_kind_of_colour_vision() -> None:
    """Lines of one figure differ in colour and dashes; each has its variable on the page."""
    from exptime.report.drawing import DASHES

    assert len(set(COLORS)) == len(COLORS)
    assert len({str(dash) for dash in DASHES}) == len(DASHES)
    assert set(COLORS) <= set(VARIABLES)
