"""Broken instrument descriptions: what is wrong, where, and how to mend it."""

from __future__ import annotations

import gzip
from pathlib import Path

import numpy as np
import pytest
from astropy.io import fits

from exptime.errors import Fault, ProfileError
from exptime.instrument.reader import read_instrument
from tests.instrument.conftest import AREA, GOOD, Changes, write

KEYS: list[tuple[Changes, str, str, str]] = [
    ({"name": None}, "name", "missing", "name:"),
    ({"effective_area": None}, "effective_area", "missing", "area.ecsv"),
    ({"channels": None}, "channels", "missing", "width"),
    ({"chanels": "1"}, "chanels", "unknown key", "channels"),
    ({"channels": "{band: 0.3-2 keV}"}, "channels.width", "missing", "50 eV"),
    ({"channels": "{band: 0.3-2, width: 50 eV}"}, "channels.band", "no unit", "keV"),
    ({"channels": "{band: 2-0.3 keV, width: 50 eV}"}, "channels.band", "not rise", "first"),
    ({"channels": "{band: 0.3-2 keV, width: 5 keV}"}, "channels.width", "exceeds", "narrower"),
    ({"channels": "{band: 0.3-9 keV, width: 2 eV}"}, "channels.width", "more than 4096", "wider"),
    ({"channels": "{band: 0.3-2 keV, width: 0 eV}"}, "channels.width", "out of range", "0.001"),
    ({"channels": "{band: 0.3-200 keV, width: 1 keV}"}, "channels.band", "out of range", "80"),
    ({"channels": "{band: 9-12 keV, width: 1 keV}"}, "channels", "outside the table", "units"),
    ({"redistribution": "{fwhm: 80 eV, at: 1 keV}"}, "redistribution", "law is missing", "sqrt"),
    ({"redistribution": "{fwhm: 80, at: 1 keV, law: sqrt}"}, "redistribution.fwhm", "unit", "eV"),
    ({"redistribution": "{fwhm: 80 eV, at: 1 keV, law: root}"}, "redistribution.law", "not known",
     "sqrt"),
    ({"redistribution": "{fwhm: 80 eV, at: 0 keV, law: sqrt}"}, "redistribution.at", "range", "0"),
    ({"redistribution": "response.rmf"}, "redistribution", "not supported yet", "fwhm"),
    ({"background": "{rate: 0.4 s-1}"}, "background", "photon_index is missing", "0.7"),
    ({"background": "{photon_index: 1}"}, "background", "rate is missing", "0.3 s-1"),
    ({"background": "{file: b.csv, rate: 1 s-1, photon_index: 1}"}, "background", "either", "rate"),
    ({"background": "{rate: -1 s-1, photon_index: 1}"}, "background.rate", "out of range", "0"),
    ({"background": "nothing.csv"}, "background", "no such file", "path"),
    ({"background_knowledge": "some"}, "background_knowledge", "no knowledge", "10 %"),
    ({"background_knowledge": "-10 %"}, "background_knowledge", "no knowledge", "10 %"),
    ({"background_knowledge": "{scale: 10 %, level: known}"}, "background_knowledge", "one kind",
     "10 %"),
    ({"background": None, "background_knowledge": "some"}, "background_knowledge", "no know", "%"),
    ({"time_resolution": "1"}, "time_resolution", "no unit", "100 ns"),
    ({"time_uncertainty": "-1 us"}, "time_uncertainty", "out of range", "0 to 1000 s"),
    ({"area_uncertainty": "300 %"}, "area_uncertainty", "out of range", "0 to 1"),
    ({"observing_efficiency": "140 %"}, "observing_efficiency", "out of range", "up to 1"),
    ({"observing_efficiency": "0 %"}, "observing_efficiency", "out of range", "above 0"),
    ({"phase_bins": "3"}, "phase_bins", "out of range", "4 to 256"),
    ({"phase_bins": "32.5"}, "phase_bins", "whole number", "32"),
    ({"effective_area": "other.csv"}, "effective_area", "no such file", "path"),
    ({"effective_area": "."}, "effective_area", "folder", "file"),
]  # fmt: skip

TABLES = [
    ("0.2, 100\n1.0, many\n", "line 2", "not a finite number"),
    ("0.2, 100\n1.0, nan\n", "line 2", "not a finite number"),
    ("0.2, 100\n1.0\n", "line 2", "1 cells"),
    ("0.2, 100\n0.2, 50\n", "line 2", "does not rise"),
    ("2.0, 100\n1.0, 50\n", "line 2", "does not rise"),
    ("0.2, 100\n1.0, -50\n", "line 2", "negative"),
    ("0.0, 100\n1.0, 50\n", "line 1", "not above zero"),
    ("0.2, 100\n", "area.csv", "single row"),
    ("energy, colour\n0.2, 100\n1.0, 50\n", "area.csv", "no column area"),
    ("energy (s), area (cm2)\n0.2, 100\n1.0, 50\n", "column energy", "a time"),
    ("energy (keV), area (furlong)\n0.2, 100\n1.0, 50\n", "column area", "furlong"),
    ("0.2, 0.3, 100\n0.3, 0.4, 50\n", "area.csv", "more than one way"),
    ("energy_low,energy_high,area\n0.2,0.3,10\n0.4,0.5,10\n", "line 3", "ends at 0.3 keV"),
    ("energy_low,energy_high,area\n0.2,0.3,10\n0.3,0.2,10\n", "line 3", "no width"),
    ("energy_low (keV),energy_high (keV),area (s)\n0.2,0.3,10\n0.3,0.4,10\n", "area", "a time"),
    ("energy,area\n0.2,0\n9.0,0\n", "effective_area", "zero everywhere"),
    ("", "area.csv", "no rows"),
]


def faults_of(folder: Path) -> tuple[Fault, ...]:
    """Return what the reader finds wrong."""
    with pytest.raises(ProfileError) as caught:
        read_instrument(str(folder))
    return caught.value.faults


@pytest.mark.parametrize(("changes", "where", "what", "remedy"), KEYS)
def test_broken_key_is_told(
    tmp_path: Path, changes: Changes, where: str, what: str, remedy: str
) -> None:
    """One fault, with the file, the key, and how to mend it."""
    faults = faults_of(write(tmp_path, changes))
    assert len(faults) == 1
    assert what in faults[0].what
    assert "profile.yaml" in faults[0].where
    assert where in faults[0].where
    assert remedy in faults[0].remedy


@pytest.mark.parametrize(("area", "where", "what"), TABLES)
def test_broken_table_of_the_area_is_told(tmp_path: Path, area: str, where: str, what: str) -> None:
    """With its line where there is one."""
    faults = faults_of(write(tmp_path, {}, area))
    assert len(faults) == 1
    assert what in faults[0].what
    assert where in faults[0].where
    assert "area" in faults[0].where


@pytest.mark.parametrize(
    ("text", "what"),
    [
        ("energy,rate\n0.2,1\n0.1,1\n", "does not rise"),
        ("energy,rate\n0.2,1\n3.0,-1\n", "negative"),
        ("energy,rate (ct)\n0.2,1\n3.0,1\n", "ct"),
        ("energy,rate\n0.2,1\n", "single row"),
        ("energy,counts_per_day\n0.2,1\n3,1\n", "no column rate"),
    ],
)
def test_broken_table_of_the_background_is_told(tmp_path: Path, text: str, what: str) -> None:
    """As for the area."""
    folder = write(tmp_path, {"background": "b.csv"})
    (folder / "b.csv").write_text(text, encoding="utf-8")
    faults = faults_of(folder)
    assert len(faults) == 1
    assert what in faults[0].what
    assert "b.csv" in faults[0].where


def test_everything_wrong_is_told_at_once(tmp_path: Path) -> None:
    """Keys, area and background of one description."""
    folder = write(
        tmp_path,
        {"phase_bins": "1000", "background": "gone.csv", "name": None, "typo": "1"},
        "energy,area\n0.2,1\n0.1,-1\n",
    )
    text = "\n".join(str(fault) for fault in faults_of(folder))
    for word in ("phase_bins", "gone.csv", "name", "typo", "does not rise", "negative"):
        assert word in text
    assert len(faults_of(folder)) == 6


@pytest.mark.parametrize(
    ("text", "what"),
    [
        ("name: [", "not valid YAML"),
        ("- a\n- b\n", "no keys"),
        ("", "empty"),
        ("name: &x a\nother: *x\n", "anchors and aliases"),
        ("name: a\nname: b\n", "twice"),
        ("name: " + "[" * 3000, "20 levels"),
    ],
)
def test_broken_syntax_is_told(tmp_path: Path, text: str, what: str) -> None:
    """As in a target file."""
    path = tmp_path / "mine.yaml"
    path.write_text(text, encoding="utf-8")
    faults = faults_of(path)
    assert what in faults[0].what or what in str(faults)
    assert "mine.yaml" in faults[0].where


def test_unknown_name_lists_what_ships(empty_folder: Path) -> None:
    """Neither an id nor a path; a folder without a description."""
    faults = faults_of(Path("no-such"))
    assert "no instrument description no-such" in faults[0].what
    assert "soft-concentrator" in faults[0].remedy
    (empty_folder / "hollow").mkdir()
    faults = faults_of(Path("hollow"))
    assert "no such file" in faults[0].what
    assert "profile.yaml" in faults[0].where


def test_response_and_spectrum_files_are_refused(tmp_path: Path) -> None:
    """A PHA file, by its content whatever its name; a packed text is no FITS file."""
    folder = write(tmp_path, {"background": "b.dat"})
    column = fits.Column("COUNTS", "J", array=np.arange(4))
    fits.BinTableHDU.from_columns([column], name="SPECTRUM").writeto(folder / "b.dat")
    faults = faults_of(folder)
    assert "PHA files are not supported yet" in faults[0].what
    folder = write(tmp_path, {"effective_area": "a.gz"})
    (folder / "a.gz").write_bytes(gzip.compress(AREA.encode()))
    assert "not a FITS file" in faults_of(folder)[0].what


def test_good_description_is_good(tmp_path: Path) -> None:
    """Or the tests above would prove nothing."""
    assert read_instrument(str(write(tmp_path, {}))).name == GOOD["name"]
