"""Files written whole or not at all."""

from __future__ import annotations

import os
from pathlib import Path

import pytest

from exptime.documents.writing import refuse_unwritable, write_bytes, write_text
from exptime.errors import InputError, WriteError


def test_text_is_written_as_utf8(tmp_path: Path) -> None:
    """And nothing else is left in the folder."""
    path = tmp_path / "a.txt"
    write_text(str(path), "µ\n")
    assert path.read_bytes() == b"\xc2\xb5\n"
    assert os.listdir(tmp_path) == ["a.txt"]


def test_existing_file_is_replaced_only_when_allowed(tmp_path: Path) -> None:
    """Its permissions stay."""
    path = tmp_path / "a.txt"
    path.write_text("old")
    path.chmod(0o600)
    with pytest.raises(InputError, match="exists already"):
        write_text(str(path), "new", overwrite=False)
    assert path.read_text() == "old"
    write_text(str(path), "new")
    assert path.read_text() == "new"
    assert path.stat().st_mode & 0o777 == 0o600
    assert os.listdir(tmp_path) == ["a.txt"]


def test_new_file_is_written_without_overwrite(tmp_path: Path) -> None:
    """The careful way leaves one file too."""
    path = tmp_path / "a.txt"
    write_text(str(path), "new", overwrite=False)
    assert path.read_text() == "new"
    assert os.listdir(tmp_path) == ["a.txt"]


@pytest.mark.parametrize("broken", ["replace", "fsync"])
def test_failed_write_leaves_the_old_file(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, broken: str
) -> None:
    """A full disk at any moment: old content, no neighbour."""
    path = tmp_path / "a.txt"
    path.write_text("old")

    def fail(*_: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, broken, fail)
    with pytest.raises(WriteError, match="No space left"):
        write_bytes(str(path), b"new")
    assert path.read_text() == "old"
    assert os.listdir(tmp_path) == ["a.txt"]


def test_file_made_in_the_meantime_is_not_replaced(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Between the first look and the last step somebody else may write."""
    path = tmp_path / "a.txt"
    real = os.fsync

    def meddle(handle: int) -> None:
        path.write_text("theirs")
        real(handle)

    monkeypatch.setattr(os, "fsync", meddle)
    with pytest.raises(InputError, match="exists already"):
        write_text(str(path), "ours", overwrite=False)
    assert path.read_text() == "theirs"
    assert os.listdir(tmp_path) == ["a.txt"]


def test_link_is_followed(tmp_path: Path) -> None:
    """The file behind it is replaced, the link stays."""
    path, link = tmp_path / "a.txt", tmp_path / "link.txt"
    path.write_text("old")
    link.symlink_to(path)
    write_text(str(link), "new")
    assert link.is_symlink()
    assert path.read_text() == "new"


def test_impossible_paths_are_told_before_the_work(tmp_path: Path) -> None:
    """Folders, missing folders, paths that are none."""
    for path, words in (
        (str(tmp_path), "a folder"),
        (str(tmp_path / "none" / "a.txt"), "folder does not exist"),
        (str(tmp_path / ("x" * 5000)), "cannot be"),
        ("a\x00b", "cannot be"),
    ):
        with pytest.raises((InputError, WriteError), match=words):
            write_text(path, "x")
    refuse_unwritable(str(tmp_path / "a.txt"), overwrite=False)
    assert os.listdir(tmp_path) == []


def test_a_pipe_is_written_to_and_not_replaced(tmp_path: Path) -> None:
    """A device such as /dev/null must never become a plain file."""
    pipe = tmp_path / "pipe"
    os.mkfifo(pipe)
    reader = os.open(pipe, os.O_RDONLY | os.O_NONBLOCK)
    try:
        write_text(str(pipe), "text")
        assert os.read(reader, 10) == b"text"
    finally:
        os.close(reader)
    assert pipe.is_fifo()
