"""The command `verify` and the option `--verify`, from files to answers."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from tests.cli.running import run
from tests.cli.targets import AREA, INSTRUMENT

HELD = """\
name: Held source
spin_frequency: 290 Hz
column_density: {value: 1.1e20 cm-2, uncertainty: 0 cm-2}
distance: {value: 310 pc, uncertainty: 0 pc}
inclination: {value: 57 deg, uncertainty: 0 deg}
hot_spots:
  - colatitude: {value: 71 deg, uncertainty: 0 deg}
    longitude: {value: 0 deg, uncertainty: 0 deg}
    angular_radius: {value: 9 deg, uncertainty: 0 deg}
    temperature: {value: 0.13 keV, uncertainty: 0 keV}
"""
COMMAND = ("verify", "held.yaml", "-i", "profile.yaml", "--exposure", "1Ms", "--jobs", "1")


@pytest.fixture
def folder(empty_folder: Path) -> Path:
    """Return a working directory with a target of two free parameters and a small instrument."""
    for name, text in (("held.yaml", HELD), ("profile.yaml", INSTRUMENT), ("area.csv", AREA)):
        Path(name).write_text(text, encoding="utf-8")
    return empty_folder


def test_a_run_is_kept_and_taken_up_again(folder: Path) -> None:
    """The second run adds to what it finds in the file, and the answer holds all."""
    arguments = (*COMMAND, "--resume", "kept.json", "--format", "json", "--simulations")
    first = run(*arguments, "2")
    assert (first.status, first.errors) == (0, "")
    kept = json.loads(Path("kept.json").read_text(encoding="utf-8"))["refits"]
    assert len(kept) == 2
    more = json.loads(run(*arguments, "3").output)["geometries"][0]["simulations"]
    assert more["asked"] == 3
    now = json.loads(Path("kept.json").read_text(encoding="utf-8"))["refits"]
    assert len(now) == 3
    assert now | kept == now
    assert json.loads(first.output)["verdict"] == "holds"


def test_the_file_of_another_run_is_refused_and_stays(folder: Path) -> None:
    """One of another run and one that keeps no refits: told and not touched."""
    Path("kept.json").write_text(
        '{"schema": "exptime.resume/1", "fingerprint": "other", "refits": {}}', encoding="utf-8"
    )
    for file, what in (("kept.json", "another run"), ("held.yaml", "keeps no refits")):
        before = Path(file).read_text(encoding="utf-8")
        refused = run(*COMMAND, "--resume", file)
        assert (refused.status, refused.output) == (2, "")
        assert what in refused.errors
        assert file in refused.errors
        assert Path(file).read_text(encoding="utf-8") == before


@pytest.mark.parametrize(
    ("arguments", "says"),
    [
        (("--exposure", "100ks..1Ms"), "given twice"),
        (("--simulations", "-1"), "--simulations"),
        (("--simulations", "many"), "--simulations"),
        (("--resume", "-"), "--resume"),
        (("--resume", "x.json", "--output", "./x.json"), "same file"),
        (("--resume", "none/x.json"), "folder"),
    ],
)
def test_what_cannot_be_done_is_said_first(
    folder: Path, arguments: tuple[str, ...], says: str
) -> None:
    """Before any work, with status 2."""
    refused = run(*COMMAND, *arguments)
    assert refused.status == 2
    assert says in refused.errors


def test_one_exposure_is_wanted(folder: Path) -> None:
    """A range is none, and without any there is nothing to verify."""
    refused = run("verify", "held.yaml", "-i", "profile.yaml", "--exposure", "100ks..1Ms")
    assert refused.status == 2
    assert "one is wanted" in refused.errors
    assert run("verify", "held.yaml", "-i", "profile.yaml").status == 2


def test_a_forecast_takes_its_verdict_along(folder: Path) -> None:
    """At the longest exposure; simulations without --verify are refused."""
    forecast = ("forecast", "held.yaml", "-i", "profile.yaml", "--exposure", "300ks,1Ms")
    shown = run(*forecast, "--jobs", "1", "--verify", "--format", "json")
    assert (shown.status, shown.errors) == (0, "")
    summary = json.loads(shown.output)["verification"]
    assert summary["exposure_s"] == 1e6
    assert summary["verdict"] == "holds"
    assert summary["geometries"][0]["ratio"]["radius"] == pytest.approx(1.0, abs=0.01)
    refused = run(*forecast, "--simulations", "4")
    assert refused.status == 2
    assert "--verify" in refused.errors
