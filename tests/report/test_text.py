"""Text reports: whole in every width, the answer first, users' strings harmless."""

from __future__ import annotations

import pytest
from rich.cells import cell_len

from exptime.report.sentences import answers
from exptime.report.text import counts_text, forecast_text, pulse_text
from tests.report import results
from tests.report.results import EVIL, STATES

EVERY_TEXT = {
    **{state: lambda width, state=state: forecast_text(STATES[state](), width) for state in STATES},
    "pulse": lambda width: pulse_text(results.pulse(EVIL, energies=20), width),
    "counts": lambda width: counts_text(results.counts(EVIL), width),
}


@pytest.mark.parametrize("width", [40, 80])
@pytest.mark.parametrize("name", EVERY_TEXT)
def test_no_line_is_wider_than_asked(name: str, width: int) -> None:
    """As many columns as were asked for, no more, and no spaces at the end of a line."""
    lines = EVERY_TEXT[name](width).splitlines()
    assert max(cell_len(line) for line in lines) <= width
    assert all(line == line.rstrip() for line in lines)


@pytest.mark.parametrize("name", EVERY_TEXT)
def test_no_number_is_cut_at_80_columns(name: str) -> None:
    """Nothing is shortened to dots, and nan or inf never stand for a number."""
    text = EVERY_TEXT[name](80)
    words = text.replace("(", " ").replace(")", " ").replace(",", " ").split()
    assert "…" not in text
    assert not {"nan", "inf", "-inf", "None"} & set(words)


@pytest.mark.parametrize("state", STATES)
def test_the_answer_comes_first(state: str) -> None:
    """The first paragraph is the sentence over geometries."""
    forecast = STATES[state]()
    first = forecast_text(forecast, 80).split("\n\n")[0]
    assert first.replace("\n", " ") == answers(forecast)[0]


def test_every_section_is_there() -> None:
    """Whatever was assumed, warned of, computed and doubted is printed."""
    text = forecast_text(results.hidden_spots(), 80)
    for title in (
        *("Warnings", "Exposure for each goal", "Geometry", "Counts", "Assumed"),
        *("How it was computed", "What could be wrong", "For the feasibility section"),
        *("This run", "Whose word counts"),
    ):
        assert f"\n{title}" in text
    assert "The radius was not given: a flat prior from 9 to 16 km." in text
    assert "The quantiles rest on 31 effective geometries, fewer than 50." in text
    assert "spots that never show         7" in text


def test_tables_show_the_numbers_of_the_record() -> None:
    """Two digits of sigma, its share of the value, and its range over the geometries."""
    lines = forecast_text(results.normal(), 80).splitlines()
    # At 1 Ms the geometries run evenly in logarithm from 0.15 to 3.0 km: median 0.67 km.
    assert next(line.split() for line in lines if line.startswith("1 Ms")) == [
        *("1", "Ms", "0.67", "5.6", "%", "0.24–1.9", "0.64")
    ]
    assert any(line.split()[:3] == ["radius", "5", "%"] for line in lines)


def test_prior_limited_entries_are_marked() -> None:
    """Every row of the mass carries the words, and so do the sentences."""
    text = forecast_text(results.prior_limited(), 80)
    mass = text.split("Mass: one sigma")[1].split("Compactness")[0]
    assert mass.count("prior-limited") == 5
    assert "not to be quoted as a measurement" in text.replace("\n", " ")


def test_what_is_unconstrained_is_called_so() -> None:
    """In the table of the radius no number stands for infinity."""
    text = forecast_text(results.unconstrained(), 80)
    radius = text.split("Equatorial radius")[1].split("Mass:")[0]
    assert radius.count("unconstrained") == 15
    assert "> 100 Ms" in text


def test_names_stay_as_they_are_but_steer_nothing() -> None:
    """Markup is text; escape characters and marks that turn the line are replaced."""
    text = forecast_text(results.evil_names(), 80)
    assert "<b>A</b> [red]x[/red] {{ 1 }} &" in text
    assert "\x1b" not in text
    assert "\u202e" not in text


def test_long_lists_of_exposures_are_thinned() -> None:
    """Thirteen of many, the first and the last among them."""
    from dataclasses import replace

    import numpy as np

    from exptime.report.tables import shown_exposures

    many = replace(results.normal(), exposures_s=np.geomspace(1e5, 1e6, 200))
    shown = shown_exposures(many)
    assert len(shown) == 13
    assert (shown[0], shown[-1]) == (0, 199)


def test_energies_that_do_not_fit_follow_below() -> None:
    """Every energy has its column in some block."""
    text = pulse_text(results.pulse(energies=20), 80)
    assert text.count("keV") >= 20
    assert text.count("phase  ") == 4
