"""What stands behind an option becomes numbers or a fault."""

from __future__ import annotations

from collections.abc import Callable
from itertools import pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st

from exptime.cli import options
from exptime.errors import InputError


def test_a_range_is_13_exposures_evenly_spaced_in_logarithm() -> None:
    """Ends are exact, ratios equal to rounding."""
    exposures = options.read_exposures("100ks..3Ms")
    assert len(exposures) == 13
    assert (exposures[0], exposures[-1]) == (1e5, 3e6)
    ratios = [upper / lower for lower, upper in pairwise(exposures)]
    assert max(ratios) == pytest.approx(min(ratios), rel=1e-12)
    assert ratios[0] == pytest.approx(30.0 ** (1 / 12), rel=1e-12)


def test_the_first_end_of_a_range_may_lack_its_unit() -> None:
    """`100..300 ks` is in kiloseconds at both ends."""
    assert options.read_exposures("100..300 ks") == options.read_exposures("100 ks..300 ks")


@pytest.mark.parametrize(
    ("text", "exposures"),
    [
        ("1Ms", (1e6,)),
        ("300ks,1Ms", (3e5, 1e6)),
        ("1 Ms, 300 ks, 1000 ks", (3e5, 1e6)),
        ("100, 300 ks, 1, 2 Ms", (1e5, 3e5, 1e6, 2e6)),
        ("2 d", (172800.0,)),
    ],
)
def test_a_list_of_exposures_is_sorted_without_repeats(
    text: str, exposures: tuple[float, ...]
) -> None:
    """A number without a unit takes the unit of the next that has one."""
    assert options.read_exposures(text) == exposures


@given(st.floats(1.0, 1e5), st.floats(1.001, 1e3))
def test_every_range_increases_and_keeps_its_ends(lower: float, ratio: float) -> None:
    """Whatever the ends, the points increase between them."""
    upper = lower * ratio
    exposures = options.read_exposures(f"{lower!r} s..{upper!r} s")
    assert exposures[0] == lower
    assert exposures[-1] == upper
    assert all(before < after for before, after in pairwise(exposures))


def test_energies_keep_their_order() -> None:
    """Energies come back in keV as they were asked for."""
    assert options.read_energies("1 keV, 300 eV") == (1.0, 0.3)
    assert options.read_energies("0.3,0.5,1 keV") == (0.3, 0.5, 1.0)


@pytest.mark.parametrize(
    ("text", "goal"),
    [
        ("radius 5 %", ("radius", 0.05)),
        ("radius 5%", ("radius", 0.05)),
        ("Mass = 0.1", ("mass", 0.1)),
        ("compactness: 2.5 %", ("compactness", 0.025)),
    ],
)
def test_goals_are_a_quantity_and_a_share(text: str, goal: tuple[str, float]) -> None:
    """Per cent and plain shares mean the same."""
    assert options.read_goal(text) == goal


def test_a_margin_is_a_share() -> None:
    """Nothing up to three times as long."""
    assert options.read_margin("15 %") == pytest.approx(0.15)
    assert options.read_margin("0") == 0.0


@pytest.mark.parametrize(
    ("reader", "text", "message"),
    [
        (
            options.read_goal,
            "radis 5 %",
            "'radis 5 %' names no quantity. Did you mean radius? "
            "Goals are about mass, radius, compactness.",
        ),
        (
            options.read_goal,
            "radius 0.5 km",
            "'0.5 km' is a length, not a plain number. "
            "A precision is one standard deviation over the value, such as 5 %.",
        ),
        (
            options.read_goal,
            "radius",
            "'radius' is no quantity with a precision. Write for example 'radius 5 %'.",
        ),
        (
            options.read_goal,
            "radius 0 %",
            "'radius 0 %' is not between 0 and 100 %. Write for example 'radius 5 %'.",
        ),
        (options.read_margin, "15", "'15' is not between 0 and 200 %. Write for example 15 %."),
        (
            options.read_exposures,
            "3Ms..100ks",
            "'3Ms..100ks' does not go upwards. Write for example 100ks..3Ms, or 300ks,1Ms.",
        ),
        (
            options.read_exposures,
            "0 s",
            "'0 s' is not between 1 s and 1e8 s. Write for example 100ks..3Ms, or 300ks,1Ms.",
        ),
        (options.read_exposures, "300", "'300' has no unit. Write for example 300ks,1Ms."),
        (
            options.read_exposures,
            "nan s",
            "'nan s' is not a finite number. Write for example 300ks,1Ms.",
        ),
        (
            options.read_exposures,
            "1 keV",
            "'1 keV' is an energy, not a time. Write for example 300ks,1Ms.",
        ),
        (
            options.read_exposures,
            "",
            "'' does not start with a number. Write for example 300ks,1Ms.",
        ),
        (options.read_energies, "0 keV", "'0 keV' holds an energy that is not above zero."),
        (
            options.read_file_name,
            "../..",
            "'../..' makes no file name. Use letters and digits, for example demo.",
        ),
    ],
    ids=lambda value: value if isinstance(value, str) and len(value) < 15 else "",
)
def test_a_wrong_value_says_what_and_how_to_mend_it(
    reader: Callable[[str], object], text: str, message: str
) -> None:
    """The whole message is compared."""
    with pytest.raises(InputError) as caught:
        reader(text)
    assert str(caught.value) == message


@pytest.mark.parametrize("text", ["1.5", "", "x", "-3", "9" * 5000, "1e3"])
def test_a_number_of_draws_is_a_whole_number_within_bounds(text: str) -> None:
    """Anything else is a fault, however long."""
    with pytest.raises(InputError):
        options.read_whole(text, 1, 1000)


@pytest.mark.parametrize(
    ("name", "stem"),
    [
        ("demo", "demo"),
        ("demo.yaml", "demo"),
        ("Candidate A", "Candidate-A"),
        ("../../etc/passwd", "etc-passwd"),
        ("étoile", "étoile"),
        ("<b>[red]x", "b-red-x"),
    ],
)
def test_a_name_becomes_a_file_name(name: str, stem: str) -> None:
    """No path, no markup, no hidden file."""
    assert options.read_file_name(name) == stem
