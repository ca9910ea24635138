"""What `check` and `instruments` show, from records built by hand."""

from __future__ import annotations

import json
from dataclasses import replace

import numpy as np
import pytest

from exptime.instrument.records import (
    BackgroundKnowledge,
    EffectiveArea,
    Instrument,
    Redistribution,
)
from exptime.report.inputs import Checked, InstrumentList, describe
from exptime.target.records import Entry, Measured, Target

TARGET = Target(
    name="[b]Candidate[/b] <A>",
    file="-",
    spin_hz=300.0,
    column_density=Measured(value=1e20),
    distance=Measured(value=300.0, uncertainty=60.0),
    entries=(
        Entry(key="name", text="[b]Candidate[/b] <A>", line=1),
        Entry(key="spin_frequency", text="300 Hz", line=2),
    ),
    assumptions=("The radius was not given: it is free over a range that takes two lines here.",),
    warnings=("The flux disagrees.",),
)
INSTRUMENT = Instrument(
    id="mine/profile.yaml",
    name="Mine (invented)",
    area=EffectiveArea(
        energies_kev=np.array([0.2, 1.0, 4.0]),
        area_cm2=np.array([500.0, 900.0, 300.0]),
        source="points, linear between them",
    ),
    redistribution=Redistribution(fwhm_kev=0.085, at_kev=1.0, law="sqrt"),
    channel_edges_kev=np.linspace(0.3, 3.0, 28),
    background_per_s=np.full(27, 0.01),
    background_knowledge=BackgroundKnowledge(kind="fraction", fraction=0.1),
    time_resolution_s=1e-7,
    time_uncertainty_s=2e-6,
    area_uncertainty=0.03,
    observing_efficiency=0.45,
)

EXPECTED = """\
Target [b]Candidate[/b] <A> (standard input)

  name            [b]Candidate[/b] <A>
  spin_frequency  300 Hz

Instrument mine/profile.yaml

  name                  Mine (invented)
  effective area        up to 900 cm2 at 1 keV; table from 0.2 to 4 keV
  channels              27 from 0.3 to 3 keV
  redistribution        85 eV full width at half maximum at 1 keV, growing as
                        the root of energy
  background            0.27 ct/s, one level per 0.2 keV known to 10 %
  timing                bins of 100 ns, clock good to 2 us
  area uncertainty      3 %
  observing efficiency  45 %
  phase bins            32
  area table            points, linear between them

Assumed

  - The radius was not given: it is free over a range that takes two lines here.

Warnings

  - The flux disagrees.

No fault found. Nothing was computed.
"""


def test_check_shows_both_files_assumptions_and_warnings() -> None:
    """The whole text; what looks like markup stays as it is."""
    assert Checked(target=TARGET, instrument=INSTRUMENT).to_text(80) == EXPECTED


@pytest.mark.parametrize("width", [50, 80, 100])
def test_no_line_is_wider_than_asked(width: int) -> None:
    """Whatever the terminal."""
    text = Checked(target=TARGET, instrument=INSTRUMENT).to_text(width)
    text += InstrumentList(instruments=(INSTRUMENT,)).to_text(width)
    assert max(map(len, text.splitlines())) <= width


def test_check_without_an_instrument_shows_the_target_alone() -> None:
    """In the document it is null."""
    checked = Checked(target=replace(TARGET, warnings=()))
    assert "Instrument" not in checked.to_text()
    assert "Warnings" not in checked.to_text()
    document = json.loads(checked.to_json())
    assert document["schema"] == "exptime.check/1"
    assert document["instrument"] is None
    assert document["target"]["given"][1] == {
        "key": "spin_frequency",
        "text": "300 Hz",
        "line": 2,
    }


def test_the_list_of_instruments_holds_id_and_name() -> None:
    """As numbers in the document, as words in the text."""
    listed = InstrumentList(instruments=(INSTRUMENT,))
    (entry,) = json.loads(listed.to_json())["instruments"]
    assert entry["id"] == "mine/profile.yaml"
    assert entry["name"] == "Mine (invented)"
    assert entry["background_per_s"] == pytest.approx(0.27, rel=1e-12)
    assert listed.to_text().startswith("mine/profile.yaml\n  name            Mine (invented)\n")


@pytest.mark.parametrize(
    ("change", "label", "words"),
    [
        ({"redistribution": Redistribution()}, "redistribution", "perfect"),
        (
            {"background_knowledge": BackgroundKnowledge(kind="unknown")},
            "background",
            "0.27 ct/s, one free level in each channel",
        ),
        (
            {"background_knowledge": BackgroundKnowledge(kind="scale", fraction=0.2)},
            "background",
            "0.27 ct/s, one common factor known to 20 %",
        ),
        (
            {"background_knowledge": BackgroundKnowledge(kind="known")},
            "background",
            "0.27 ct/s, known exactly",
        ),
        ({"area_uncertainty": 0.0}, "area uncertainty", "none"),
        ({"observing_efficiency": None}, "observing efficiency", "not stated"),
        (
            {"time_resolution_s": 0.0, "time_uncertainty_s": 0.002},
            "timing",
            "bins of 0 s, clock good to 2 ms",
        ),
    ],
)
def test_each_state_of_an_instrument_has_its_words(
    change: dict[str, object], label: str, words: str
) -> None:
    """Nothing is said that the description does not hold."""
    assert dict(describe(replace(INSTRUMENT, **change)))[label] == words  # type: ignore[arg-type]
