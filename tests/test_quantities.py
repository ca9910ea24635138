"""Texts with units, quantities and floats."""

from __future__ import annotations

import contextlib
import math

import numpy as np
import pytest
from astropy import units
from hypothesis import given, settings
from hypothesis import strategies as st

from exptime.errors import InputError, UnitsError
from exptime.quantities import (
    from_quantities,
    from_quantity,
    read_quantity,
    read_range,
    to_quantity,
    unit_factor,
)


@pytest.mark.parametrize(
    ("text", "unit", "expected"),
    [
        ("300 eV", "keV", 0.3),
        ("100ks", "s", 1e5),
        ("3Ms", "s", 3e6),
        ("1.5 d", "s", 129600.0),
        ("4.0 ms", "s", 4e-3),
        ("317 Hz", "Hz", 317.0),
        ("0.317 kHz", "Hz", 317.0),
        ("5 %", "", 0.05),
        ("0.05", "", 0.05),
        ("1.0e20 cm-2", "cm-2", 1e20),
        ("1e24 m-2", "cm-2", 1e20),
        ("2.2e-13 erg s-1 cm-2", "erg s-1 cm-2", 2.2e-13),
        ("2.2e-13 erg/s/cm^2", "erg s-1 cm-2", 2.2e-13),
        ("2e-16 W m-2", "erg s-1 cm-2", 2e-13),
        ("180 deg", "rad", math.pi),
        ("0.3 counts/s", "ct s-1", 0.3),
        ("0.3 s-1", "ct s-1", 0.3),
        ("0.09 m2", "cm2", 900.0),
        ("−0.5 keV", "keV", -0.5),
        ("1 kpc", "pc", 1000.0),
    ],
)
def test_text_becomes_number_in_wanted_unit(text: str, unit: str, expected: float) -> None:
    """Conversion factors are exact up to rounding."""
    assert read_quantity(text, unit) == pytest.approx(expected, rel=1e-14)


def test_kelvin_is_taken_only_for_temperatures() -> None:
    """1 keV/k is 1.16045181e7 K (CODATA 2018)."""
    kt = read_quantity("1.16045181e7 K", "keV", is_temperature=True)
    assert kt == pytest.approx(1.0, rel=1e-8)  # the digits of the constant as printed
    with pytest.raises(UnitsError, match="a temperature, not an energy"):
        read_quantity("1e6 K", "keV")


@pytest.mark.parametrize(
    ("text", "unit", "words"),
    [
        ("5", "keV", ["'5' has no unit", "0.1 keV"]),
        ("5 km", "keV", ["a length, not an energy", "0.1 keV"]),
        ("5 kev", "keV", ["not known", "Did you mean keV"]),
        ("60", "rad", ["has no unit", "60 deg"]),
        ("0.3 ct", "", ["in ct, not a plain number"]),
        ("5 mag", "keV", ["mag"]),
        ("3 keV**99999999", "keV", ["not known"]),
        ("3 m(", "km", ["not known"]),
        ("4 m ** (1/0)", "km", ["not known"]),
        ("5 keV", "", ["an energy, not a plain number", "0.05"]),
    ],
)
def test_wrong_unit_is_a_units_error_with_an_example(
    text: str, unit: str, words: list[str]
) -> None:
    """The message names both kinds and shows what to write."""
    with pytest.raises(UnitsError) as caught:
        read_quantity(text, unit)
    for word in words:
        assert word in str(caught.value)


@pytest.mark.parametrize(
    "text", ["nan keV", "inf keV", "-Infinity keV", "1e400 keV", "", "keV", "abc", "x" * 10**5]
)
def test_no_finite_number_is_an_input_error(text: str) -> None:
    """Texts that astropy would take, such as nan and 1e400, are refused."""
    with pytest.raises(InputError):
        read_quantity(text, "keV")


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("0.5-2.0 keV", (0.5, 2.0)),
        ("300 - 2000 eV", (0.3, 2.0)),
        ("300 eV to 2 keV", (0.3, 2.0)),
        ("300 eV-2 keV", (0.3, 2.0)),
        ("0.5..2 keV", (0.5, 2.0)),
        ("0.5–2.0 keV", (0.5, 2.0)),
        ("1e-1-2e0 keV", (0.1, 2.0)),
    ],
)
def test_range_has_two_ends(text: str, expected: tuple[float, float]) -> None:
    """Dash, dots or the word to join the ends; exponents keep their minus sign."""
    assert read_range(text, "keV") == pytest.approx(expected, rel=1e-14)


@pytest.mark.parametrize("text", ["0.5-2.0", "2 keV", "0.5-nan keV", "1-2 km", "-1-2 keV", "-", ""])
def test_bad_range_is_refused(text: str) -> None:
    """No unit, one number, no number, another kind, a negative end."""
    with pytest.raises(InputError):
        read_range(text, "keV")


@settings(max_examples=300, deadline=None)
@given(st.text(max_size=60) | st.from_regex(r"[0-9.eE+-]{1,8} ?[a-zA-Z0-9*/^() .%-]{0,20}"))
def test_any_text_gives_a_finite_number_or_an_input_error(text: str) -> None:
    """Nothing else is ever raised."""
    for unit in ("keV", ""):
        for read in (read_quantity, read_range):
            with contextlib.suppress(InputError):
                assert np.all(np.isfinite(read(text, unit)))


@given(st.floats(1e-30, 1e30), st.sampled_from(["keV", "km", "pc", "rad", "Msun", ""]))
def test_quantity_and_float_go_round(value: float, unit: str) -> None:
    """To a Quantity and back changes nothing."""
    assert from_quantity(to_quantity(value, unit), unit, "x") == value


def test_quantity_arguments_are_converted_and_checked() -> None:
    """Quantities, texts, and plain numbers where no unit is needed."""
    assert from_quantity(300 * units.eV, "keV", "energy") == pytest.approx(0.3, rel=1e-14)
    assert from_quantity("300 eV", "keV", "energy") == pytest.approx(0.3, rel=1e-14)
    assert from_quantity(0.25, "", "fraction") == 0.25
    assert from_quantity(25 * units.percent, "", "fraction") == pytest.approx(0.25, rel=1e-14)
    assert np.array_equal(to_quantity(np.arange(3.0), "km").to_value("m"), [0.0, 1e3, 2e3])


@pytest.mark.parametrize(
    "value", [12.0, 12 * units.s, "12", None, np.nan * units.km, np.arange(3) * units.km, object()]
)
def test_bad_argument_names_itself(value: object) -> None:
    """The message begins with the name of the argument."""
    with pytest.raises(InputError, match=r"^radius: "):
        from_quantity(value, "km", "radius")


def test_unit_factor_of_another_kind_is_refused() -> None:
    """Factors exist only within a kind."""
    assert unit_factor("m2", "cm2") == pytest.approx(1e4, rel=1e-14)
    assert unit_factor("photons", "ph") == 1.0
    with pytest.raises(UnitsError):
        unit_factor("keV", "cm2")


@pytest.mark.parametrize(
    "value",
    [
        [0.1, 1.0] * units.Ms,
        ["100 ks", "1 Ms"],
        (1e5 * units.s, "1 Ms"),
    ],
)
def test_several_quantities_become_floats(value: object) -> None:
    """An array with a unit, texts, or a mixture."""
    assert from_quantities(value, "s", "exposures") == pytest.approx((1e5, 1e6), rel=1e-14)


def test_one_quantity_is_several_of_one() -> None:
    """A text is not taken letter by letter."""
    assert from_quantities("1 Ms", "s", "exposures") == (1e6,)
    assert from_quantities(1 * units.ks, "s", "exposures") == (1e3,)
    for value in ([], [1.0], [1 * units.km], 5):
        with pytest.raises(InputError, match=r"^exposures: "):
            from_quantities(value, "s", "exposures")


@pytest.mark.parametrize("text", ["1.4 ± 0.1 Msun", "1.4 +/- 0.1 Msun", "1.4+-0.1 Msun"])
def test_uncertainty_inside_a_value_is_sent_to_its_key(text: str) -> None:
    """The remedy shows the form in braces."""
    with pytest.raises(InputError) as caught:
        read_quantity(text, "Msun")
    assert "uncertainty: …" in caught.value.faults[0].remedy
