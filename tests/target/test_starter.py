"""The starter file runs as it is and shows every key."""

from __future__ import annotations

import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from exptime.documents.listing import render_markdown, walk
from exptime.errors import InputError
from exptime.target.fields import TARGET_FIELDS
from exptime.target.reader import read_target_text
from exptime.target.starter import render_starter


def test_starter_is_a_good_target_without_hot_spots() -> None:
    """Geometries are drawn for it, and it says that it is invented."""
    text = render_starter("candidate")
    target = read_target_text(text)
    assert target.name == "candidate"
    assert target.hot_spots is None
    assert target.warnings == ()
    assert "invented" in text


@given(st.text(min_size=1, max_size=60))
def test_any_printable_name_is_quoted_safely(name: str) -> None:
    """The name comes back as it was; what cannot be printed is refused."""
    if name.strip() and name.strip().isprintable():
        assert read_target_text(render_starter(name)).name == name.strip()
    else:
        with pytest.raises(InputError):
            render_starter(name)


@pytest.mark.parametrize(
    "name", ["a: b", '"', "'", "#x", "- y", "No", "\\1", "{a}", "&a", "[bold]", "Å µ 星"]
)
def test_awkward_names_survive(name: str) -> None:
    """Everything that means something to YAML, to templates or to regular expressions."""
    assert read_target_text(render_starter(name)).name == name


def test_starter_shows_every_key() -> None:
    """In use or behind a comment sign."""
    text = render_starter("x")
    for path, field in walk(TARGET_FIELDS):
        assert re.search(rf"\b{field.key}\b", text), path


def test_every_commented_line_can_be_used() -> None:
    """Uncommented together they are a good target with hot spots."""
    lines = render_starter("x").splitlines()
    keys = {field.key for field in TARGET_FIELDS} - {"pulse_shape", "spin_period"}
    used = []
    for line in lines:
        bare = line.removeprefix("# ")
        is_key = line.startswith("# ") and bare.split(":")[0] in keys
        used.append(bare if is_key or line.startswith("#   - {colat") else line)
    target = read_target_text("\n".join(used))
    assert target.hot_spots is not None
    assert len(target.hot_spots) == 2
    assert target.emission.model == "limb-darkened"
    assert target.radius is not None


def test_key_list_has_every_key() -> None:
    """One row each."""
    text = render_markdown(TARGET_FIELDS)
    for path, _ in walk(TARGET_FIELDS):
        assert f"| `{path}` |" in text


def test_examples_of_the_table_are_good() -> None:
    """Each example can be written at its key."""
    by_key = {field.key: field for field in TARGET_FIELDS}
    base = render_starter("x")
    for key in ("spin_frequency", "mass", "radius", "inclination", "figure", "emission"):
        example = by_key[key].example
        text = re.sub(
            rf"^(# )?{key}:.*$", lambda _, k=key, e=example: f"{k}: {e}", base, flags=re.M
        )
        assert f"\n{key}: {example}\n" in text
        read_target_text(text)
