"""Refits kept in a file come back to the bit, and no foreign file is touched."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from exptime.documents.resume import keep_refits, read_refits
from exptime.errors import InputError

REFITS = {"given:0": [1.0, 0.1 + 0.2, 1e-300], "given:1": [0.0, -12.000000000000002, 3.0]}


def test_refits_come_back_to_the_bit(tmp_path: Path) -> None:
    """No digit is lost on the way through text."""
    path = str(tmp_path / "refits.json")
    assert read_refits(path, "mark") == {}
    keep_refits(path, "mark", REFITS)
    assert read_refits(path, "mark") == REFITS


def test_the_refits_of_another_run_are_refused(tmp_path: Path) -> None:
    """The message names the file and what differs."""
    path = str(tmp_path / "refits.json")
    keep_refits(path, "mark", REFITS)
    with pytest.raises(InputError, match="belong to another run"):
        read_refits(path, "other")


@pytest.mark.parametrize(
    "content",
    ["", "name: Demo\n", "[]", "{}", '{"schema": "exptime.forecast/1"}', "[" * 100_000, "\ud7ff"],
)
def test_a_foreign_file_is_refused_and_stays(tmp_path: Path, content: str) -> None:
    """Whatever it holds, it is not overwritten."""
    path = tmp_path / "mine"
    path.write_text(content, encoding="utf-8")
    with pytest.raises(InputError, match="keeps no refits"):
        read_refits(str(path), "mark")
    assert path.read_text(encoding="utf-8") == content


@pytest.mark.parametrize(
    "refits",
    [None, [], {"a": 1}, {"a": []}, {"a": [1.0]}, {"a": [1.0, "x"]}, {"a": [1.0, float("nan")]}],
)
def test_a_damaged_file_is_told(tmp_path: Path, refits: object) -> None:
    """Its own kind, but not whole."""
    path = tmp_path / "refits.json"
    path.write_text(
        json.dumps({"schema": "exptime.resume/1", "fingerprint": "mark", "refits": refits}),
        encoding="utf-8",
    )
    with pytest.raises(InputError, match="damaged"):
        read_refits(str(path), "mark")


def test_a_folder_that_is_not_there_is_told_before_the_work(tmp_path: Path) -> None:
    """Not after hours of refits."""
    with pytest.raises(InputError, match="folder"):
        read_refits(str(tmp_path / "none" / "refits.json"), "mark")
