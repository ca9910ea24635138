"""Tables as text: ECSV, CSV and blank-separated columns."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from astropy import units
from astropy.table import QTable
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from exptime.documents.columns import Table, Wanted, check_column
from exptime.documents.faults import Faults
from exptime.documents.text_tables import read_table

WANTED = (Wanted("energy", "keV"), Wanted("area", "cm2", aliases=("specresp",)))


def read(path: Path, text: str) -> tuple[Table | None, Faults]:
    """Return table and faults of a text written to a file."""
    path.write_text(text, encoding="utf-8")
    faults = Faults()
    return read_table(str(path), WANTED, faults), faults


@pytest.mark.parametrize("delimiter", [" ", ","])
def test_ecsv_written_by_astropy_is_read(tmp_path: Path, delimiter: str) -> None:
    """Units of the header are converted, its meta keys are kept as text."""
    path = tmp_path / "area.ecsv"
    energies, areas = np.array([300.0, 500.0, 2000.0]), np.array([0.01, 0.05, 0.02])
    table = QTable({"Energy": energies * units.eV, "AREA": areas * units.m**2})
    table.meta["background"] = 3.5
    table.meta["comment"] = ["made up"]
    table.write(path, format="ascii.ecsv", delimiter=delimiter)
    faults = Faults()
    found = read_table(str(path), WANTED, faults)
    assert faults.found == ()
    assert found is not None
    np.testing.assert_allclose(found.values("energy"), energies / 1e3, rtol=1e-14)
    np.testing.assert_allclose(found.values("area"), areas * 1e4, rtol=1e-14)
    assert found.header["background"] == "3.5"
    assert "energy in eV as its header says" in found.unit_sources


@pytest.mark.parametrize(
    ("text", "source"),
    [
        ("energy (keV), area (cm2)\n0.3,100\n2,50\n", "in keV as its header says"),
        ("Energy [eV];AREA [m2]\n300;0.01\n2000;0.005\n", "in eV as its header says"),
        ("energy_eV area_cm2\n300 100\n2000 50\n", "in eV as the column name energy_eV says"),
        ("# two columns\n0.3 100\n2 50\n", "taken to be in keV: none is told"),
        ("area energy\n100 0.3\n50\t2\n", "taken to be in keV: none is told"),
        ("energy (keV) specresp (cm2)\n0.3 1e2\n2 5.0D1\n", "in keV as its header says"),
        ('"energy","extra","area"\n0.3,7,100\n2,7,50\n', "taken to be in keV"),
        ("\ufeffenergy,area\r\n0.3,100\r\n\r\n2,50\r\n", "taken to be in keV"),
    ],
)
def test_units_are_decided_and_told(tmp_path: Path, text: str, source: str) -> None:
    """By header, by column name, or assumed; always the same numbers."""
    found, faults = read(tmp_path / "t.txt", text)
    assert faults.found == ()
    assert found is not None
    np.testing.assert_allclose(found.values("energy"), [0.3, 2.0], rtol=1e-14)
    np.testing.assert_allclose(found.values("area"), [100.0, 50.0], rtol=1e-14)
    assert source in found.columns["energy"].unit_source


def test_comments_give_header_keys(tmp_path: Path) -> None:
    """A pair of key and value in a comment counts as header."""
    found, _ = read(tmp_path / "t.txt", "# Background: 35\n# made up\n1 2\n2 3\n")
    assert found is not None
    assert found.header == {"background": "35"}


ECSV = "# %ECSV 1.0\n# ---\n# datatype:\n"
ECSV_COLUMNS = (
    "# - {name: energy, unit: keV, datatype: float64}\n# - {name: area, datatype: float64}\n"
)


@pytest.mark.parametrize(
    ("text", "where", "what"),
    [
        ("1 2\n2 x\n", ", line 2, column 2", "'x' is not a finite number"),
        ("energy,area\n1,2\n2,\n", ", line 3, column area", "empty"),
        ("1 2\n2 nan\n", ", line 2, column 2", "'nan' is not a finite number"),
        ("1 2\n2 1e999\n", ", line 2, column 2", "not a finite number"),
        ("1 2\n2\n", ", line 2", "1 cells where 2 are wanted"),
        ("energy,effective\n1,2\n", "", "no column area"),
        ("1\n2\n", "", "no column area"),
        ("energy (km), area\n1,2\n", ", column energy", "a length, not an energy"),
        ("energy (blob), area\n1,2\n", ", column energy", "not known"),
        ("", "", "no rows"),
        ("energy,area\n", "", "no rows"),
        (ECSV, "", "no rows"),
        (f"{ECSV}# - {{name: [energy\n1 2\n", ", line 4", "not valid YAML"),
        (f"{ECSV}{ECSV_COLUMNS}energy area\n1 2\n2 b\n", ", line 8, column area", "'b' is not"),
        (f"# %ECSV 1.0\n# ---\n# delimiter: x\n{ECSV_COLUMNS[:0]}1 2\n", "", "no delimiter"),
        ("# %ECSV 1.0\n# ---\n# a: " + "[" * 3000 + "\n1 2\n", ", line 3", "20 levels"),
    ],
)
def test_broken_table_is_told_with_its_cell(
    tmp_path: Path, text: str, where: str, what: str
) -> None:
    """File, line and column."""
    path = tmp_path / "t.txt"
    found, faults = read(path, text)
    assert found is None
    assert faults.found[0].where == f"{path}{where}"
    assert what in faults.found[0].what


def test_missing_column_names_those_that_are_there(tmp_path: Path) -> None:
    """The remedy lists them."""
    _, faults = read(tmp_path / "t.txt", "energy,effective\n1,2\n")
    assert faults.found[0].remedy == "It has: energy, effective."


def test_only_the_first_bad_cells_are_told(tmp_path: Path) -> None:
    """A thousand bad rows are one problem."""
    _, faults = read(tmp_path / "t.txt", "1 2\n" + "x y\n" * 1000)
    assert 1 < len(faults) < 10


@pytest.mark.parametrize(
    ("rule", "row", "what"),
    [
        ("is_rising", 3, "does not rise"),
        ("is_not_falling", 4, "falls below"),
        ("is_positive", 1, "not above zero"),
        ("is_not_negative", 5, "negative"),
    ],
)
def test_rules_of_a_column_name_the_row(tmp_path: Path, rule: str, row: int, what: str) -> None:
    """The first row that breaks each rule."""
    path = tmp_path / "t.txt"
    found, faults = read(path, "0 1\n1 1\n1 1\n0.5 1\n-1 1\n")
    assert found is not None
    check_column(found, "energy", faults, **{rule: True})
    assert faults.found[0].where == f"{path}, line {row}, column energy"
    assert what in faults.found[0].what


def test_good_columns_pass_every_rule(tmp_path: Path) -> None:
    """And a column that is missing is not looked at."""
    found, faults = read(tmp_path / "t.txt", "1 1\n2 1\n")
    assert found is not None
    check_column(found, "energy", faults, is_rising=True, is_positive=True)
    check_column(found, "error", faults, is_positive=True)
    assert faults.found == ()


@settings(
    max_examples=200, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
@given(st.text(max_size=120), st.booleans())
def test_any_text_gives_a_table_or_faults(tmp_path: Path, text: str, is_ecsv: bool) -> None:
    """Nothing is ever raised."""
    path = tmp_path / "t.txt"
    content = f"# %ECSV 1.0\n# ---\n{text}" if is_ecsv else text
    path.write_bytes(content.encode("utf-8", "surrogatepass"))
    faults = Faults()
    found = read_table(str(path), WANTED, faults)
    assert (found is None) == (len(faults) > 0)
