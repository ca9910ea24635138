"""YAML as plain text with lines, and everything it refuses."""

from __future__ import annotations

import io
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from exptime.documents.faults import Faults
from exptime.documents.nodes import Mapping, Scalar, Sequence, scalars
from exptime.documents.yaml_reader import parse_yaml, read_yaml


def parse(text: str) -> Mapping:
    """Return a document that must be free of faults."""
    faults = Faults()
    root = parse_yaml(text, "f.yaml", faults)
    assert faults.found == ()
    assert root is not None
    return root


def test_scalars_stay_text() -> None:
    """Nothing is turned into a boolean, a time, a number or null."""
    root = parse("a: No\nb: 12:30:45\nc: 1.0e20\nd: 0x10\ne: ~\nf: 2026-01-01\n")
    assert [node.text for node in scalars(root)] == [
        *("No", "12:30:45", "1.0e20", "0x10", "~", "2026-01-01")
    ]


def test_every_value_knows_line_and_key() -> None:
    """Places name file, line and key path, also inside lists and braces."""
    root = parse("a: 1\nb:\n  - {c: 2}\n  -\n    c: 3\n")
    assert [str(node.place) for node in scalars(root)] == [
        "f.yaml, line 1, a",
        "f.yaml, line 3, b[0].c",
        "f.yaml, line 5, b[1].c",
    ]
    assert isinstance(root.get("a"), Scalar)
    assert isinstance(root.get("b"), Sequence)


@pytest.mark.parametrize(
    ("text", "where", "what"),
    [
        ("a: [1, 2\n", "f.yaml, line 2", "not valid YAML"),
        ("a:\n\tb: 1\n", "f.yaml, line 2", "a tab stands"),
        ("a: b: c\n", "f.yaml, line 1", "not valid YAML"),
        ('a: "open\n', "f.yaml, line 2", "not valid YAML"),
        ("a: 1\n b: 2\n", "f.yaml, line 2", "not valid YAML"),
        ("a: {b: 1\nc: 2\n", "f.yaml, line 2", "not valid YAML"),
        ("a: 1\n---\nb: 2\n", "f.yaml, line 2", "more than one document"),
        ("a: &x 1\nb: *x\n", "f.yaml, line 1", "anchors and aliases"),
        ("b: *x\n", "f.yaml, line 1", "anchors and aliases"),
        ("a: !!python/object/apply:os.system [ls]\n", "f.yaml, line 1", "the tag"),
        ("a: !own 1\n", "f.yaml, line 1", "the tag"),
        ("a: " + "[" * 3000, "f.yaml, line 1", "20 levels"),
        ("a: " + "{b: " * 3000, "f.yaml, line 1", "20 levels"),
        ("a: 1\na: 2\n", "f.yaml, line 2, a", "stands twice; first in line 1"),
        ("b: {a: 1, a: 2}\n", "f.yaml, line 1, b.a", "stands twice"),
        ("? [1, 2]\n: 3\n", "f.yaml, line 1", "a key must be a word"),
        ("", "f.yaml", "empty"),
        ("# only a comment\n", "f.yaml", "empty"),
        ("- 1\n- 2\n", "f.yaml, line 1", "no keys"),
        ("hello\n", "f.yaml, line 1", "no keys"),
        ("a: \x07\n", "f.yaml, line 1", "control character"),
        ("a: [" + "1," * 25_000 + "1]", "f.yaml, line 1", "more than 20000"),
        ("a: " + "x" * 1_000_001, "f.yaml", "larger than 1 MB"),
    ],
)
def test_broken_text_is_told_with_its_line(text: str, where: str, what: str) -> None:
    """One fault, its place, and what is wrong."""
    faults = Faults()
    parse_yaml(text, "f.yaml", faults)
    assert len(faults) == 1
    fault = faults.found[0]
    assert fault.where == where
    assert what in fault.what


def test_alias_bomb_is_refused_before_it_is_built() -> None:
    """Nine levels of nine would be 4e8 values."""
    lines = ["a0: &a0 [x,x,x,x,x,x,x,x,x]"]
    lines += [f"a{k}: &a{k} [{','.join([f'*a{k - 1}'] * 9)}]" for k in range(1, 10)]
    faults = Faults()
    assert parse_yaml("\n".join(lines), "f.yaml", faults) is None
    assert "anchors and aliases" in faults.found[0].what


def test_byte_order_mark_and_windows_line_ends_are_harmless(tmp_path: Path) -> None:
    """The same values and lines as without."""
    path = tmp_path / "f.yaml"
    path.write_bytes(b"\xef\xbb\xbfa: 1\r\nb: 2\r\n")
    faults = Faults()
    root = read_yaml(str(path), faults)
    assert root is not None
    assert [(node.text, node.place.line) for node in scalars(root)] == [("1", 1), ("2", 2)]


@pytest.mark.parametrize(
    ("content", "what"),
    [
        (b"a: 1\nb: \xff\n", "not UTF-8"),
        ("a: 1\n".encode("utf-16"), "not UTF-8"),
        (b"a: " + b"x" * 1_000_001, "larger than 1 MB"),
        (b"", "empty"),
    ],
)
def test_bad_bytes_are_told(tmp_path: Path, content: bytes, what: str) -> None:
    """Encoding, size and emptiness."""
    path = tmp_path / "f.yaml"
    path.write_bytes(content)
    faults = Faults()
    assert read_yaml(str(path), faults) is None
    assert what in faults.found[0].what


def test_line_of_the_first_bad_byte_is_told(tmp_path: Path) -> None:
    """Line 2 holds it."""
    path = tmp_path / "f.yaml"
    path.write_bytes(b"a: 1\nb: \xff\n")
    faults = Faults()
    read_yaml(str(path), faults)
    assert faults.found[0].where == f"{path}, line 2"


def test_missing_file_and_folder_are_told(tmp_path: Path) -> None:
    """Neither is a traceback."""
    for path, what in ((tmp_path / "none.yaml", "no such file"), (tmp_path, "a folder")):
        faults = Faults()
        assert read_yaml(str(path), faults) is None
        assert what in faults.found[0].what
    faults = Faults()
    assert read_yaml("a\x00b", faults) is None
    assert "cannot be read" in faults.found[0].what


def test_dash_is_standard_input(monkeypatch: pytest.MonkeyPatch) -> None:
    """Bytes come from the standard input of the process."""
    stream = io.TextIOWrapper(io.BytesIO(b"a: 1\n"))
    monkeypatch.setattr("sys.stdin", stream)
    root = read_yaml("-", Faults())
    assert root is not None
    assert [str(node.place) for node in scalars(root)] == ["-, line 1, a"]


@settings(max_examples=300, deadline=None)
@given(st.text(max_size=200) | st.text(alphabet="ab:[]{}&*!|>-?\n\t '\"#,1", max_size=80))
def test_any_text_gives_a_document_or_faults(text: str) -> None:
    """Nothing is ever raised, and no document without a fault is missing."""
    faults = Faults()
    root = parse_yaml(text, "f.yaml", faults)
    assert root is not None or len(faults) > 0
