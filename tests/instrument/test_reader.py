"""Instrument descriptions: what is read, and how what is left out is understood."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from exptime.instrument.reader import read_instrument, shipped_instruments
from exptime.instrument.records import BackgroundKnowledge, Instrument, Redistribution
from tests.instrument.conftest import GOOD, write

Bench = Callable[..., Instrument]


def test_every_key_is_read(bench: Bench) -> None:
    """In the units of the program."""
    found = bench(
        time_uncertainty="200 ns",
        observing_efficiency="45 %",
        phase_bins="48",
    )
    assert found.name == GOOD["name"]
    assert found.redistribution == Redistribution(fwhm_kev=0.08, at_kev=1.0, law="sqrt")
    np.testing.assert_allclose(found.channel_edges_kev, 0.3 + 0.1 * np.arange(21), rtol=1e-14)
    assert found.background_per_s.sum() == pytest.approx(0.4, rel=1e-14)
    assert found.background_knowledge == BackgroundKnowledge(kind="fraction", fraction=0.1)
    assert found.time_resolution_s == pytest.approx(50e-6)
    assert found.time_uncertainty_s == pytest.approx(200e-9)
    assert found.area_uncertainty == pytest.approx(0.03)
    assert found.observing_efficiency == pytest.approx(0.45)
    assert found.phase_bins == 48
    assert found.warnings == ()
    assert found.assumptions == ()


def test_what_is_left_out_is_said(bench: Bench) -> None:
    """Perfect energies, no background, exact area and times; each with a sentence."""
    found = bench(
        redistribution=None,
        background=None,
        background_knowledge=None,
        time_resolution=None,
        area_uncertainty=None,
    )
    assert found.redistribution.law == "perfect"
    assert not found.background_per_s.any()
    assert found.background_knowledge.kind == "known"
    assert (found.time_resolution_s, found.area_uncertainty, found.phase_bins) == (0.0, 0.0, 32)
    assert found.observing_efficiency is None
    text = " ".join(found.assumptions)
    for word in ("redistribution", "background", "area_uncertainty", "time_resolution"):
        assert word in text
    assert len(found.assumptions) == 4


def test_knowledge_left_out_is_none_at_all(bench: Bench) -> None:
    """A background of which nothing is said has a free level in every channel."""
    found = bench(background_knowledge=None)
    assert found.background_knowledge.kind == "unknown"
    assert any("free in every channel" in sentence for sentence in found.assumptions)


@pytest.mark.parametrize(
    ("text", "kind", "fraction"),
    [
        ("known", "known", 0.0),
        ("unknown", "unknown", 0.0),
        ("10 %", "fraction", 0.1),
        ("0.25", "fraction", 0.25),
        ("0 %", "known", 0.0),
        ("{scale: 20 %}", "scale", 0.2),
        ("{scale: 0 %}", "known", 0.0),
    ],
)
def test_knowledge_of_the_background(bench: Bench, text: str, kind: str, fraction: float) -> None:
    """Every form of the key."""
    found = bench(background_knowledge=text).background_knowledge
    assert (found.kind, found.fraction) == (kind, pytest.approx(fraction))


@pytest.mark.parametrize("changes", [{"background": "none"}, {"background": None}])
def test_no_background_is_known(bench: Bench, changes: dict[str, str | None]) -> None:
    """Whatever is said of its level."""
    found = bench(background_knowledge="10 %", **changes)
    assert not found.background_per_s.any()
    assert found.background_knowledge.kind == "known"


@pytest.mark.parametrize("text", ["perfect", "{fwhm: 0 eV, at: 1 keV, law: constant}"])
def test_perfect_redistribution_can_be_written(bench: Bench, text: str) -> None:
    """By its word, or as a width of zero."""
    assert bench(redistribution=text).redistribution.law == "perfect"


@pytest.mark.parametrize(
    ("width", "count", "last"),
    [("100 eV", 20, 0.1), ("0.3 keV", 7, 0.2), ("0.35 keV", 6, 0.25), ("0.6 keV", 3, 0.8),
     ("2 keV", 1, 2.0)],
)  # fmt: skip
def test_last_channel_takes_the_rest_of_the_band(
    bench: Bench, width: str, count: int, last: float
) -> None:
    """A rest below half a width joins its neighbour; an uneven channel is told."""
    found = bench(channels=f"{{band: 0.3-2.3 keV, width: {width}}}")
    widths = np.diff(found.channel_edges_kev)
    assert len(widths) == count
    assert found.channel_edges_kev[-1] == 2.3
    assert widths[-1] == pytest.approx(last)
    is_even = abs(widths[-1] - widths[0]) < 1e-9
    assert any("does not divide" in warning for warning in found.warnings) != is_even


def test_folder_file_and_id_name_the_same_instrument(empty_folder: Path) -> None:
    """The id of a shipped one comes first; files inside are relative to the description."""
    folder = write(empty_folder / "a" / "b", {})
    by_folder, by_file = read_instrument(str(folder)), read_instrument(str(folder / "profile.yaml"))
    np.testing.assert_array_equal(by_folder.area.area_cm2, by_file.area.area_cm2)
    assert by_folder.id == str(folder)
    assert read_instrument("a/b").name == by_folder.name
    decoy = empty_folder / shipped_instruments()[0]
    write(decoy, {"name": "Decoy"})
    assert read_instrument(decoy.name).name != "Decoy"
    assert read_instrument(f"./{decoy.name}").name == "Decoy"


def test_channels_beyond_the_area_are_told(bench: Bench) -> None:
    """Outside its table the area is zero, and a warning says so."""
    found = bench(channels="{band: 0.1-2.1 keV, width: 100 eV}")
    assert [w for w in found.warnings if "0.2 to 8 keV" in w and "taken as zero" in w]
