"""The script that makes the table of absorption."""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
import pytest

from exptime._resources import shipped_table
from exptime.tables import absorption
from exptime.tables.absorption import EDGE_WIDTH, METALS, compute, gas_cm2, metal_cm2

NAMES = {"energies_kev", "interstellar", "solar_1982", "edges_kev"}


def test_table_that_ships_is_the_one_the_script_makes() -> None:
    """To rounding: logarithms and powers may differ in the last digit between machines."""
    made = compute()
    with np.load(Path(str(shipped_table("absorption.npz")))) as shipped:
        assert set(shipped) == set(made) == NAMES
        for name in NAMES:
            np.testing.assert_allclose(shipped[name], made[name], rtol=1e-12)


def test_script_writes_the_file_named(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """And the file is small."""
    target = tmp_path / "made.npz"
    monkeypatch.setattr(sys, "argv", ["absorption", str(target)])
    absorption.main()
    assert target.stat().st_size < 30_000
    with np.load(target) as made:
        assert set(made) == NAMES


@pytest.mark.parametrize("name", ["interstellar", "solar_1982"])
def test_straight_lines_follow_the_atoms(name: str) -> None:
    """Between logarithms of cross-section times energy cubed, to 2e-4 anywhere."""
    table = compute()
    generator = np.random.default_rng(1)
    energies = np.exp(generator.uniform(np.log(0.03), np.log(30.0), 20_000))
    line = np.interp(np.log(energies), np.log(table["energies_kev"]), np.log(table[name]))
    np.testing.assert_allclose(np.exp(line) / energies**3, gas_cm2(name, energies), rtol=2.1e-4)


def test_every_edge_is_a_step_up_between_two_knots() -> None:
    """One part in 1e7 on either side of its energy."""
    table = compute()
    edges = table["edges_kev"]
    for name in ("interstellar", "solar_1982"):
        below, above = (gas_cm2(name, edges * (1.0 + side)) for side in (-EDGE_WIDTH, EDGE_WIDTH))
        assert (above > below).all()
    for edge in edges:
        for side in (-EDGE_WIDTH, EDGE_WIDTH):
            assert np.min(np.abs(table["energies_kev"] / (edge * (1.0 + side)) - 1.0)) < 1e-12


@pytest.mark.parametrize(
    ("symbol", "edge_kev"),
    [("C", 0.2842), ("N", 0.4099), ("O", 0.5431), ("Ne", 0.8702), ("Mg", 1.3030), ("Si", 1.8389),
     ("S", 2.472), ("Ar", 3.2059), ("Ca", 4.0385), ("Fe", 7.112), ("Ni", 8.3328)],
)  # fmt: skip
def test_every_k_edge_is_there(symbol: str, edge_kev: float) -> None:
    """K binding energies (from memory of the usual tables), to half an eV; the jump is large."""
    assert np.min(np.abs(compute()["edges_kev"] - edge_kev)) < 5e-4
    around = metal_cm2(symbol, np.array([edge_kev - 1e-3, edge_kev + 1e-3]))
    assert around[1] > 5.0 * around[0]


def test_both_sets_have_the_same_atoms() -> None:
    """Nineteen beside hydrogen and helium."""
    assert set(absorption.INTERSTELLAR) == set(absorption.SOLAR_1982)
    assert len(METALS) == 19
