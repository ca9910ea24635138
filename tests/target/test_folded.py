"""Folded profiles named by a target file."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from exptime.errors import InputError
from exptime.target.reader import read_target
from exptime.target.records import FoldedShape
from tests.target.conftest import DRAWN, document

PHASE = (np.arange(8) + 0.5) / 8
COUNTS = np.array([0.0, 100, 150, 220, 260, 210, 160, 110])


def profile(phase: np.ndarray, *columns: np.ndarray, head: str = "phase counts") -> str:
    """Return a blank-separated profile."""
    rows = [
        " ".join(f"{number:.12g}" for number in row) for row in zip(phase, *columns, strict=True)
    ]
    return "\n".join((head, *rows))


def read(folder: Path, text: str, entry: str = "background: 30") -> FoldedShape:
    """Return the shape of a target whose profile is the text."""
    (folder / "folded.txt").write_text(text)
    shape = f"[{{band: 0.5-2 keV, file: folded.txt, {entry}}}]"
    path = folder / "t.yaml"
    path.write_text(document(DRAWN, {"pulse_shape": shape}))
    (found,) = read_target(str(path)).pulse_shapes
    assert isinstance(found, FoldedShape)
    return found


def test_errors_are_roots_of_the_counts_where_none_are_given(tmp_path: Path) -> None:
    """At least one count, so that an empty bin has a weight."""
    shape = read(tmp_path, profile(PHASE, COUNTS))
    np.testing.assert_allclose(shape.phase, PHASE)
    np.testing.assert_array_equal(shape.counts, COUNTS)
    np.testing.assert_allclose(shape.error, np.sqrt(np.maximum(COUNTS, 1.0)))
    assert shape.background_per_bin == 30.0
    assert shape.band_kev == (0.5, 2.0)
    assert shape.file == str(tmp_path / "folded.txt")


def test_given_errors_are_kept(tmp_path: Path) -> None:
    """A third column."""
    error = np.linspace(5, 12, 8)
    shape = read(tmp_path, profile(PHASE, COUNTS, error, head="phase counts error"))
    np.testing.assert_allclose(shape.error, error)


@pytest.mark.parametrize("line", ["# background: 25", "# Background = 25 ct"])
def test_background_may_stand_in_the_header(tmp_path: Path, line: str) -> None:
    """The key of the entry is not needed then, and wins where it is there."""
    text = f"{line}\n{profile(PHASE, COUNTS)}"
    assert read(tmp_path, text, "instrument: array").background_per_bin == 25.0
    assert read(tmp_path, text).background_per_bin == 30.0


def test_ecsv_header_gives_units_and_background(tmp_path: Path) -> None:
    """As astropy writes it."""
    from astropy import units
    from astropy.table import QTable

    table = QTable({"phase": PHASE, "counts": COUNTS * units.ct})
    table.meta["background"] = 12.5
    table.write(tmp_path / "x.ecsv", format="ascii.ecsv")
    shape = read(tmp_path, (tmp_path / "x.ecsv").read_text(), "instrument: array")
    assert shape.background_per_bin == 12.5
    assert shape.instrument == "array"


@pytest.mark.parametrize(
    ("text", "entry", "what"),
    [
        (profile(PHASE, COUNTS), "instrument: a", "background counts per bin are missing"),
        ("# background: lots\n" + profile(PHASE, COUNTS), "instrument: a", "is no count"),
        (profile(PHASE, COUNTS), "background: 400", "not below the mean"),
        (profile(PHASE, -COUNTS), "background: 30", "negative"),
        (profile(PHASE, 0 * COUNTS), "background: 0", "not below the mean"),
        (profile(PHASE * 2, COUNTS), "background: 30", "outside 0 to 1"),
        (profile(PHASE / 2, COUNTS), "background: 30", "not 8 even steps"),
        (profile(PHASE[::-1], COUNTS), "background: 30", "not 8 even steps"),
        (profile(PHASE[:3], COUNTS[:3]), "background: 30", "3 bins"),
        (
            profile(PHASE, COUNTS, 0 * COUNTS, head="phase counts error"),
            "background: 30",
            "not above zero",
        ),
        (profile(PHASE, COUNTS, head="phase rate"), "background: 30", "no column counts"),
        (profile(PHASE, COUNTS, head="phase counts(km)"), "background: 30", "not in ct"),
    ],
)
def test_broken_profile_is_told(tmp_path: Path, text: str, entry: str, what: str) -> None:
    """With the file."""
    with pytest.raises(InputError) as caught:
        read(tmp_path, text, entry)
    assert any(what in fault.what for fault in caught.value.faults)
    assert all(
        "folded.txt" in fault.where or "pulse_shape" in fault.where for fault in caught.value.faults
    )


def test_missing_profile_is_told_where_it_is_named(tmp_path: Path) -> None:
    """Line and key of the target file."""
    path = tmp_path / "t.yaml"
    path.write_text(document(DRAWN, {"pulse_shape": "[{band: 1-2 keV, file: none.txt}]"}))
    with pytest.raises(InputError) as caught:
        read_target(str(path))
    (fault,) = caught.value.faults
    assert fault.where == f"{path}, line 8, pulse_shape[0].file ({tmp_path / 'none.txt'})"
