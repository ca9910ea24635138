"""The instruments that ship: readable, invented, and of different character."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from exptime._resources import shipped_folder
from exptime.instrument.reader import read_instrument, shipped_instruments
from exptime.instrument.response import area_cm2, photon_nodes
from tests.makers import instrument_profiles

IDS = ("coarse-imager", "collimated-array", "soft-concentrator")


def test_ids_are_the_folders() -> None:
    """In alphabetical order."""
    assert shipped_instruments() == IDS


@pytest.mark.parametrize("name", IDS)
def test_shipped_instrument_is_read_without_doubt(name: str) -> None:
    """No warning, nothing left out, its background positive; and it says it is invented."""
    found = read_instrument(name)
    assert found.id == name
    assert found.warnings == ()
    assert found.assumptions == ()
    assert "invented" in found.name
    text = shipped_folder("instrument_profiles").joinpath(name, "profile.yaml")
    assert "invented instrument" in text.read_text(encoding="utf-8")
    assert (found.background_per_s > 0.0).all()
    assert 100 <= len(found.area.energies_kev) <= 200
    assert found.observing_efficiency is not None


@pytest.mark.parametrize("name", IDS)
def test_folding_needs_a_moderate_number_of_nodes(name: str) -> None:
    """A thousand, or a matrix of information would be slow."""
    nodes, _ = photon_nodes(read_instrument(name), np.array([0.2842, 0.5431, 7.112]))
    assert len(nodes) < 1000


def test_characters_differ() -> None:
    """Soft and precise; large, hard and noisy; quiet but slow."""
    imager, array, concentrator = (read_instrument(name) for name in IDS)
    at_1_kev = [area_cm2(i.area, np.array([1.0]))[0] for i in (imager, array, concentrator)]
    assert at_1_kev[2] > 3.0 * at_1_kev[0]
    assert at_1_kev[1] == 0.0
    assert array.area.area_cm2.max() > 3.0 * concentrator.area.area_cm2.max()
    assert array.background_per_s.sum() > 100.0 * concentrator.background_per_s.sum()
    assert concentrator.background_per_s.sum() > 10.0 * imager.background_per_s.sum()
    assert imager.time_resolution_s > 1e3 * concentrator.time_resolution_s
    assert {i.background_knowledge.kind for i in (imager, array, concentrator)} == {
        *("scale", "unknown", "fraction")
    }


def test_tables_are_those_of_the_script(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Line by line: the seven digits written hide differences of rounding."""
    monkeypatch.setattr(instrument_profiles, "FOLDER", tmp_path)
    instrument_profiles.main()
    made = sorted(tmp_path.rglob("*.ecsv"))
    assert len(made) == 4
    for path in made:
        shipped = shipped_folder("instrument_profiles").joinpath(*path.relative_to(tmp_path).parts)
        lines = shipped.read_text(encoding="utf-8").splitlines()
        for ours, theirs in zip(path.read_text(encoding="utf-8").splitlines(), lines, strict=True):
            if ours[:1].isdigit():
                np.testing.assert_allclose(
                    [float(cell) for cell in ours.split()],
                    [float(cell) for cell in theirs.split()],
                    rtol=2e-7,
                )
            else:
                assert ours == theirs
