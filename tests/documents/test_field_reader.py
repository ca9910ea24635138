"""Mappings read under a table of fields."""

from __future__ import annotations

import pytest

from exptime.documents.faults import Faults
from exptime.documents.field_reader import read_fields
from exptime.documents.fields import Field, measured, uncertainty
from exptime.documents.listing import render_markdown
from exptime.documents.values import Values
from exptime.documents.yaml_reader import parse_yaml
from exptime.errors import InputError, OutOfRangeError, ProfileError, UnitsError

TABLE = (
    Field(key="name", kind="text", meaning="Name", example="A", is_required=True),
    measured("mass", "Msun", "Mass", example="1.4 Msun", minimum=0.5, maximum=3.0),
    measured(
        "share",
        "",
        "A fraction",
        example="0.5",
        minimum=0.0,
        maximum=1.0,
        with_uncertainty=uncertainty(may_be_zero=False),
        many="one or list",
    ),
    Field(key="colour", kind="choice", meaning="Colour", choices=("red", "dark_green")),
    Field(key="shiny", kind="boolean", meaning="Whether it shines", example="true"),
    Field(key="bins", kind="integer", meaning="Bins", example="16", minimum=2, maximum=64),
    Field(key="band", kind="range", meaning="Band", example="1-2 keV", unit="keV", minimum=0.1),
    Field(
        key="spots",
        kind="mapping",
        meaning="Spots",
        example="{size: 3 deg}",
        many="list",
        fields=(Field(key="size", kind="quantity", meaning="Size", unit="rad", example="3 deg"),),
    ),
)


def read(text: str) -> tuple[Values, Faults]:
    """Return values and faults of a document under the table."""
    faults = Faults()
    root = parse_yaml(text, "f.yaml", faults)
    assert root is not None
    return read_fields(root, TABLE, faults), faults


def good(text: str) -> Values:
    """Return the values of a document that must be free of faults."""
    values, faults = read(f"name: x\n{text}")
    assert faults.found == ()
    return values


def test_scalar_stands_for_a_mapping_with_value() -> None:
    """Both forms give the same number."""
    for text in ("mass: 1.5 Msun", "mass: {value: 1.5 Msun}"):
        group = good(text).group("mass")
        assert group is not None
        assert group.number("value") == 1.5
        assert group.number("uncertainty") is None


@pytest.mark.parametrize(
    ("text", "expected"),
    [("0.1 Msun", 0.1), ("10 %", 0.15), ("0", 0.0), ("0 Msun", 0.0), ("0.0", 0.0)],
)
def test_uncertainty_has_a_unit_or_is_relative(text: str, expected: float) -> None:
    """Per cent are of the value; a bare zero is plain enough."""
    group = good(f"mass: {{value: 1.5 Msun, uncertainty: {text}}}").group("mass")
    assert group is not None
    assert group.number("uncertainty") == pytest.approx(expected, rel=1e-14)


def test_other_kinds_are_read() -> None:
    """Choice, boolean, integer, range, list and one-or-list."""
    values = good(
        "colour: red\nshiny: Yes\nbins: 16\nband: 500-2000 eV\n"
        "spots: [{size: 180 deg}]\nshare: [0.5, {value: 20 %, uncertainty: 50 %}]"
    )
    assert values.text("colour") == "red"
    assert values.flag("shiny") is True
    assert values.number("bins") == 16
    assert values.range("band") == (0.5, 2.0)
    assert values.list("spots")[0].number("size") == pytest.approx(3.141592653589793)
    assert [share.number("value") for share in values.list("share")] == [0.5, 0.2]
    assert values.list("share")[1].number("uncertainty") == pytest.approx(0.1)
    assert values.group("mass") is None
    assert not values.is_given("mass")


@pytest.mark.parametrize(
    ("text", "where", "what", "remedy"),
    [
        ("color: red", "line 2, color", "unknown key", "Did you mean colour?"),
        ("Mass: 1 Msun", "line 2, Mass", "unknown key", "Did you mean mass?"),
        ("mass: {valu: 1 Msun, value: 1 Msun}", "line 2, mass.valu", "unknown key", "value?"),
        ("mass: {uncertainty: 5 %}", "line 2, mass.value", "missing", "value: 1.4 Msun"),
        ("mass: 1.5", "line 2, mass", "has no unit", "1.4 Msun"),
        ("mass: 1.5 km", "line 2, mass", "a length, not a mass", "1.4 Msun"),
        ("mass: 4 Msun", "line 2, mass", "out of range", "0.5 to 3 Msun"),
        ("mass: {value: 1 Msun, uncertainty: -5 %}", "line 2, mass.uncertainty", "out of", "0"),
        ("mass: {value: 1 Msun, uncertainty: 5 km}", "line 2, mass.uncertainty", "length", "5 %"),
        ("mass: {value: 1 Msun, uncertainty: 5}", "line 2, mass.uncertainty", "no unit", "5 %"),
        ("share: {value: 1, uncertainty: 0}", "line 2, share.uncertainty", "out of", "above 0"),
        ("mass:", "line 2, mass", "no value", "mass: 1.4 Msun"),
        ("mass: [1 Msun]", "line 2, mass", "list is not allowed", "mass: 1.4 Msun"),
        ("mass: {value: [1]}", "line 2, mass.value", "one plain value", "value: 1.4 Msun"),
        ("share: []", "line 2, share", "list is empty", "at least one"),
        ("spots: 3 deg", "line 2, spots", "a list is wanted", "dash"),
        ("spots: [3 deg]", "line 2, spots[0]", "keys and values", "{size: 3 deg}"),
        ("spots: [{}, {sise: 1 deg}]", "line 2, spots[1].sise", "unknown key", "size"),
        ("colour: dark-green", "line 2, colour", "not known", "Did you mean dark_green?"),
        ("shiny: maybe", "line 2, shiny", "neither true nor false", "true"),
        ("bins: 3.5", "line 2, bins", "not a whole number", "16"),
        ("bins: 1", "line 2, bins", "out of range", "2 to 64"),
        ("band: 2-1 keV", "line 2, band", "does not rise", "lower end first"),
        ("band: 0-1 keV", "line 2, band", "out of range", "at least 0.1 keV"),
        ('colour: "re\\nd"', "line 2, colour", "not known", "Allowed: red, dark_green"),
    ],
)
def test_fault_has_place_and_remedy(text: str, where: str, what: str, remedy: str) -> None:
    """What, where and how to mend it."""
    _, faults = read(f"name: x\n{text}")
    assert len(faults) == 1
    fault = faults.found[0]
    assert fault.where == f"f.yaml, {where}"
    assert what in fault.what
    assert remedy in fault.remedy


def test_every_fault_is_told_at_once() -> None:
    """Five faults, one error."""
    _, faults = read("nam: x\nmass: 9 Msun\nbins: x\nband: 1 keV\n")
    with pytest.raises(InputError) as caught:
        faults.raise_if_any()
    assert len(caught.value.faults) == 5
    assert {fault.where.rsplit(", ", 1)[-1] for fault in caught.value.faults} == {
        *("name", "nam", "mass", "bins", "band")
    }


@pytest.mark.parametrize(
    ("kinds", "chosen", "expected"),
    [
        ((OutOfRangeError, OutOfRangeError), None, OutOfRangeError),
        ((UnitsError,), None, UnitsError),
        ((UnitsError, OutOfRangeError), None, InputError),
        ((OutOfRangeError,), ProfileError, ProfileError),
    ],
)
def test_error_is_as_narrow_as_its_faults(
    kinds: tuple[type[InputError], ...],
    chosen: type[InputError] | None,
    expected: type[InputError],
) -> None:
    """A class chosen by the caller wins."""
    faults = Faults(chosen)
    for number, kind in enumerate(kinds):
        faults.add(f"fault {number}", "here", kind=kind)
    with pytest.raises(InputError) as caught:
        faults.raise_if_any()
    assert type(caught.value) is expected


def test_a_flood_of_faults_is_cut() -> None:
    """Fifty are told, the rest counted."""
    faults = Faults()
    for number in range(80):
        faults.add(f"fault {number}", "here")
    with pytest.raises(InputError, match="30 more faults"):
        faults.raise_if_any()


def test_table_renders_as_markdown() -> None:
    """Every key stands in its own row with range and unit people write."""
    text = render_markdown(TABLE)
    lines = text.splitlines()
    assert "| `mass` | `1.4 Msun` | 0.5 to 3 Msun |  | Mass |" in lines
    assert any(line.startswith("| `spots[].size` | `3 deg` |") for line in lines)
    assert any(line.startswith("| `share.uncertainty` |") for line in lines)
    assert all(line.count("|") == 6 for line in lines)


def test_angles_are_bounded_in_degrees() -> None:
    """Radians are for the program."""
    field = Field(
        key="a", kind="quantity", meaning="", unit="rad", minimum=0.0, maximum=3.141592653589793
    )
    assert field.bounds == "0 to 180 deg"
