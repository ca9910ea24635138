"""Broken files end in a clear message and status 2, whatever the command."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.cli.running import Run, run
from tests.cli.targets import AREA, DRAWN, INSTRUMENT, KNOWN, changed

SYNTAX = {
    "open brace": changed(DRAWN, ("uncertainty: 12 pc}", "uncertainty: 12 pc")),
    "tab": changed(DRAWN, ("mass: {", "\tmass: {")),
    "alias": DRAWN + "radius: &a 12 km\ninclination: *a\n",
    "tag": changed(DRAWN, ("name: Unknown", "name: !!python/name:os.system Unknown")),
    "depth": "name: " + "[" * 3000,
    "list": "- name: a\n- name: b\n",
    "empty": "",
    "control": "name: a\x00b\n",
    "two documents": DRAWN + "---\n" + DRAWN,
}
UNITS = {
    "none": (changed(DRAWN, ("317 Hz", "317")), "spin_frequency"),
    "unknown": (changed(DRAWN, ("260 pc", "260 parsek")), "distance"),
    "wrong kind": (changed(DRAWN, ("1.0e20 cm-2", "1.0e20 cm")), "column_density"),
    "energy for flux": (changed(DRAWN, ("2.2e-13 erg s-1 cm-2", "2.2 keV")), "flux"),
    "band without": (changed(DRAWN, ("0.5-2.0 keV", "0.5-2.0")), "flux.band"),
    "angle in km": (changed(KNOWN, ("inclination: 57 deg", "inclination: 57 km")), "inclination"),
}
RANGES = {
    "not a number": (changed(DRAWN, ("317 Hz", "nan Hz")), "spin_frequency"),
    "infinite": (changed(DRAWN, ("260 pc", "inf pc")), "distance"),
    "overflow": (changed(DRAWN, ("260 pc", "1e400 pc")), "distance"),
    "break-up": (changed(DRAWN, ("317 Hz", "1900 Hz")), "spin_frequency"),
    "compact": (changed(KNOWN, ("12.2 km", "7 km")), "compact"),
    "negative": (changed(DRAWN, ("value: 1.5 Msun", "value: -1.5 Msun")), "mass"),
    "fraction": (changed(DRAWN, ("value: 0.45", "value: 1.4")), "pulsed_fraction"),
    "band backwards": (changed(DRAWN, ("0.3-1.5 keV", "1.5-0.3 keV")), "pulsed_fraction.band"),
}
KEYS = {
    "misspelt": (changed(DRAWN, ("spin_frequency", "spin_freqency")), "spin_frequency"),
    "twice": (DRAWN + "distance: 300 pc\n", "distance"),
    "missing": (changed(DRAWN, ("column_density: 1.0e20 cm-2\n", "")), "column_density"),
    "no definition": (changed(DRAWN, ("definition: peak-to-trough, ", "")), "definition"),
    "unknown definition": (changed(DRAWN, ("peak-to-trough", "peak-to-peak")), "peak-to-trough"),
    "no frame": (changed(DRAWN, (", frame: surface", "")), "frame"),
    "empty spots": (DRAWN + "hot_spots: []\n", "hot_spots"),
    "spots without inclination": (changed(KNOWN, ("inclination: 57 deg\n", "")), "inclination"),
    "both spins": (DRAWN + "spin_period: 3.15 ms\n", "spin_period"),
}
PROFILES = {
    "no area": (changed(INSTRUMENT, ("effective_area: area.csv\n", "")), AREA, "effective_area"),
    "missing table": (changed(INSTRUMENT, ("area.csv", "other.csv")), AREA, "other.csv"),
    "negative area": (INSTRUMENT, changed(AREA, ("900", "-900")), "area.csv"),
    "words in the table": (INSTRUMENT, changed(AREA, ("900", "many")), "area.csv"),
    "energies out of order": (INSTRUMENT, changed(AREA, ("4.0,", "0.1,")), "area.csv"),
    "area beside the channels": (INSTRUMENT, "energy_kev,area_cm2\n5,10\n6,10\n", "channels"),
    "misspelt key": (changed(INSTRUMENT, ("channels", "chanels")), AREA, "channels"),
    "knowledge": (changed(INSTRUMENT, ("10 %", "perhaps")), AREA, "background_knowledge"),
    "channel width": (changed(INSTRUMENT, ("100 eV", "0 eV")), AREA, "width"),
    "matrix": (INSTRUMENT + "redistribution: response.rmf\n", AREA, "redistribution"),
}
UNREACHABLE = {
    "first harmonic at the pole": changed(DRAWN, ("peak-to-trough", "first-harmonic"))
    + "inclination: {value: 0 deg, uncertainty: 0 deg}\n",
    "seen from the pole": DRAWN + "inclination: {value: 0 deg, uncertainty: 0 deg}\n",
    "more than the surface": changed(DRAWN, ("2.2e-13", "2.2e-8")),
    "too cold": changed(DRAWN, ("value: 0.12 keV", "value: 0.01 keV")),
    "too far": changed(DRAWN, ("value: 260 pc, uncertainty: 12 pc", "value: 900 kpc")),
}


def _check(text: str) -> Run:
    """Check a target from standard input, and the form of whatever message comes."""
    shown = run("check", "-", given=text)
    _assert_civil(shown)
    return shown


def _assert_civil(shown: Run) -> None:
    """Assert status 2, an empty answer, and messages of the program and nothing else."""
    assert (shown.status, shown.output) == (2, "")
    lines = shown.errors.splitlines()
    assert lines
    for line in lines:
        assert line.startswith("exptime: ")
        assert "Traceback" not in line
        assert "internal error" not in line
        assert len(line) < 500


@pytest.mark.parametrize("text", SYNTAX.values(), ids=SYNTAX)
def test_what_is_no_yaml_mapping_is_one_message(text: str, empty_folder: Path) -> None:
    """Bombs and depths included."""
    _check(text)


@pytest.mark.parametrize(("text", "word"), UNITS.values(), ids=UNITS)
def test_a_wrong_unit_names_its_key(text: str, word: str, empty_folder: Path) -> None:
    """One fault, with the key and an example."""
    shown = _check(text)
    assert word in shown.errors
    assert len(shown.errors.splitlines()) == 1


@pytest.mark.parametrize(("text", "word"), RANGES.values(), ids=RANGES)
def test_a_value_out_of_range_names_its_key(text: str, word: str, empty_folder: Path) -> None:
    """The message holds the key or the reason."""
    assert word in _check(text).errors


@pytest.mark.parametrize(("text", "word"), KEYS.values(), ids=KEYS)
def test_a_wrong_key_is_named(text: str, word: str, empty_folder: Path) -> None:
    """With the nearest valid name where there is one."""
    assert word in _check(text).errors


@pytest.mark.parametrize(("profile", "area", "word"), PROFILES.values(), ids=PROFILES)
def test_a_broken_instrument_names_file_or_key(
    profile: str, area: str, word: str, empty_folder: Path
) -> None:
    """Of the description or of the table that it names."""
    Path("target.yaml").write_text(KNOWN, encoding="utf-8")
    Path("profile.yaml").write_text(profile, encoding="utf-8")
    Path("area.csv").write_text(area, encoding="utf-8")
    shown = run("check", "target.yaml", "-i", "profile.yaml")
    _assert_civil(shown)
    assert word in shown.errors


def test_the_instrument_of_these_tests_is_sound(empty_folder: Path) -> None:
    """Each of the faults above is the only one."""
    Path("profile.yaml").write_text(INSTRUMENT, encoding="utf-8")
    Path("area.csv").write_text(AREA, encoding="utf-8")
    for text in (KNOWN, DRAWN):
        shown = run("check", "-", "-i", "profile.yaml", given=text)
        assert (shown.status, shown.errors) == (0, "")


@pytest.mark.parametrize("text", UNREACHABLE.values(), ids=UNREACHABLE)
def test_a_request_that_no_geometry_meets_is_explained(text: str, empty_folder: Path) -> None:
    """Status 2 and a way out, after the search."""
    shown = run("forecast", "-", "-i", "soft-concentrator", "--draws", "8", given=text)
    _assert_civil(shown)


def test_every_fault_of_both_files_is_told_at_once(empty_folder: Path) -> None:
    """Three in the target, one in the instrument: four lines."""
    text = changed(
        DRAWN, ("317 Hz", "317"), ("260 pc", "260 parsek"), ("frame: surface", "frame: observer")
    )
    Path("profile.yaml").write_text(PROFILES["misspelt key"][0], encoding="utf-8")
    Path("area.csv").write_text(AREA, encoding="utf-8")
    shown = run("check", "-", "-i", "profile.yaml", given=text)
    _assert_civil(shown)
    lines = shown.errors.splitlines()
    assert len([line for line in lines if "profile.yaml" not in line]) == 3
    assert [line for line in lines if "profile.yaml" in line]
