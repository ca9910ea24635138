"""Between texts with a unit, `astropy.units.Quantity` and plain floats: the only place.

Texts come from files and from the command line, quantities from the Python interface. Inside the
program everything is a float in a unit that its name tells.
"""

from __future__ import annotations

import difflib
import math
import re
import warnings
from collections.abc import Iterable
from typing import TYPE_CHECKING, Final

from exptime.errors import Fault, InputError, UnitsError

if TYPE_CHECKING:
    from astropy.units import Quantity, UnitBase

LONGEST_TEXT: Final = 200
"""No honest quantity is longer; bounds the work of every parser below."""

_NUMBER: Final = r"(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d+)?"
_QUANTITY: Final = re.compile(rf"\s*([+-]?{_NUMBER})\s*(.*?)\s*", re.ASCII)
_RANGE: Final = re.compile(
    rf"\s*({_NUMBER})\s*([^\d\s.+-][^\d+-]*?)?\s*(?:-|\.\.|to\b)\s*({_NUMBER})\s*(.*?)\s*", re.ASCII
)
_NOT_FINITE: Final = re.compile(r"\s*[+-]?(?:nan|inf(?:inity)?)\b.*", re.IGNORECASE)
_COUNTS: Final = re.compile(r"\b(?:counts?|cts)\b")
_PHOTONS: Final = re.compile(r"\b(?:photons?|phot)\b")
_LONG_EXPONENT: Final = re.compile(r"\d{4,}|\*\*\s*\d{3,}|\^\s*\d{3,}")
_COMMON_UNITS: Final = (
    *("keV", "eV", "Hz", "kHz", "ms", "us", "ns", "s", "ks", "Ms", "d", "h", "yr", "km", "m", "cm"),
    *("pc", "kpc", "Msun", "deg", "rad", "K", "cm-2", "cm2", "erg s-1 cm-2", "ct s-1", "%"),
)
_EXAMPLES: Final = {
    "keV": "0.1 keV", "Hz": "317 Hz", "s": "100 ks", "km": "12 km", "pc": "260 pc",
    "Msun": "1.4 Msun", "rad": "60 deg", "cm-2": "1e20 cm-2", "erg s-1 cm-2": "2e-13 erg s-1 cm-2",
    "": "0.05", "ct s-1": "0.3 ct s-1", "cm2": "900 cm2", "d": "20 d",
}  # fmt: skip


def read_quantity(
    text: str, unit: str, *, example: str = "", is_temperature: bool = False
) -> float:
    """Return the number that a text with a unit means, in the unit wanted.

    Parameters
    ----------
    text : str
        For example ``"100 ks"``, ``"2.2e-13 erg s-1 cm-2"``, ``"5 %"``.
    unit : str
        Unit wanted, as astropy writes it; empty for a plain number, which may be in per cent.
    example : str
        What a good text looks like, for the message; a usual one when empty.
    is_temperature : bool
        Accept a temperature in kelvin where an energy kT is wanted.

    Returns
    -------
    float
        Finite, in `unit`.

    Raises
    ------
    UnitsError
        When the unit is missing, unknown or of another kind.
    InputError
        When there is no number, or not a finite one.

    Examples
    --------
    >>> read_quantity("300 eV", "keV")
    0.3
    >>> read_quantity("5 %", "")
    0.05
    """
    text = _plain(text)
    remedy = f"Write for example {example or example_of(unit)}."
    if len(text) > LONGEST_TEXT:
        raise InputError(Fault(f"a text of {len(text)} characters is no quantity.", "", remedy))
    if _NOT_FINITE.fullmatch(text):
        raise InputError(Fault(f"{text!r} is not a finite number.", "", remedy))
    if "±" in text or "+/-" in text or "+-" in text:
        what = f"{text!r} holds an uncertainty."
        raise InputError(Fault(what, "", "Give it apart: {value: …, uncertainty: …}."))
    found = _QUANTITY.fullmatch(text)
    if not found:
        raise InputError(Fault(f"{text!r} does not start with a number.", "", remedy))
    return _convert(float(found[1]), found[2], text, unit, remedy, is_temperature)


def read_range(text: str, unit: str, *, example: str = "") -> tuple[float, float]:
    """Return both ends of a range such as ``"0.5-2.0 keV"`` or ``"300 eV to 2 keV"``.

    The order is not checked here; a unit after the first number may be left out.

    Parameters
    ----------
    text : str
        Two numbers not below zero, joined by ``-``, ``..`` or ``to``.
    unit : str
        Unit wanted.
    example : str
        What a good text looks like, for the message.

    Returns
    -------
    tuple of float
        Finite, in `unit`.

    Raises
    ------
    UnitsError, InputError
        As `read_quantity`.
    """
    text = _plain(text)
    remedy = f"Write for example {example or '0.5-2.0 keV'}."
    if len(text) > LONGEST_TEXT:
        raise InputError(Fault(f"a text of {len(text)} characters is no range.", "", remedy))
    found = _RANGE.fullmatch(text)
    if not found:
        raise InputError(Fault(f"{text!r} is no range of two numbers and a unit.", "", remedy))
    upper_unit = found[4]
    lower_unit = found[2] or upper_unit
    lower = _convert(float(found[1]), lower_unit.strip(), text, unit, remedy, False)
    return lower, _convert(float(found[3]), upper_unit, text, unit, remedy, False)


def from_quantity(value: object, unit: str, name: str, *, is_temperature: bool = False) -> float:
    """Return a Quantity, or a text with a unit, as a float in the unit wanted.

    Parameters
    ----------
    value : astropy.units.Quantity, str or number
        A number without a unit is taken only where `unit` is empty.
    unit : str
        Unit wanted.
    name : str
        Name of the argument, for messages.
    is_temperature : bool
        Accept kelvin where an energy kT is wanted.

    Raises
    ------
    UnitsError
        When the unit is missing or of another kind.
    InputError
        When the value is no single finite number.
    """
    if isinstance(value, str):
        try:
            return read_quantity(value, unit, is_temperature=is_temperature)
        except InputError as error:
            raise type(error)(Fault(f.what, name, f.remedy) for f in error.faults) from None
    remedy = f"Give for example {example_of(unit)!r}, or the same as an astropy Quantity."
    number = getattr(value, "value", value)
    given_unit = getattr(value, "unit", None)
    try:
        plain = float(number)  # type: ignore[arg-type]  # anything else ends in the except below
    except (TypeError, ValueError, OverflowError):
        raise InputError(Fault(f"{value!r} is no single number.", name, remedy)) from None
    given_text = "" if given_unit is None else given_unit.to_string()
    try:
        return _convert(plain, given_text, str(value), unit, remedy, is_temperature)
    except InputError as error:
        raise type(error)(Fault(f.what, name, f.remedy) for f in error.faults) from None


def from_quantities(value: object, unit: str, name: str) -> tuple[float, ...]:
    """Return an array Quantity, or one or several of what `from_quantity` takes, as floats.

    Parameters
    ----------
    value : astropy.units.Quantity, str, number or iterable of them
        At least one.
    unit, name : str
        As `from_quantity`, which tells the errors too.
    """
    is_single = isinstance(value, str) or getattr(value, "shape", None) == ()
    if is_single or not isinstance(value, Iterable):
        return (from_quantity(value, unit, name),)
    numbers = tuple(from_quantity(each, unit, name) for each in value)
    if not numbers:
        raise InputError(Fault("at least one value is wanted.", name, "The list is empty."))
    return numbers


def to_quantity(value: object, unit: str) -> Quantity:
    """Return a float or an array of floats as a Quantity in the unit that its name tells."""
    from astropy import units

    return units.Quantity(value, _unit(unit))


def unit_factor(given: str, wanted: str) -> float:
    """Return the factor that brings numbers in one unit to another.

    Parameters
    ----------
    given, wanted : str
        Texts of units; both may be empty.

    Raises
    ------
    UnitsError
        When the given unit is unknown or of another kind.
    """
    remedy = f"Give it in {wanted or 'no unit at all'}."
    return _convert(1.0, given, f"the unit {given!r}", wanted, remedy, False)


def example_of(unit: str) -> str:
    """Return what a quantity in this unit looks like."""
    return _EXAMPLES.get(unit, f"1 {unit}")


def _plain(text: str) -> str:
    """Return the text with typographic minus signs and dashes made plain."""
    return text.translate({0x2212: "-", 0x2013: "-", 0x2014: "-"})


def _convert(
    number: float, given: str, text: str, wanted: str, remedy: str, is_temperature: bool
) -> float:
    """Return the number in the unit wanted, checked to be finite."""
    if not given and wanted:
        raise UnitsError(Fault(f"{text!r} has no unit.", "", remedy))
    factor = 1.0 if given == wanted else _factor(given, text, wanted, remedy, is_temperature)
    result = number * factor
    if not math.isfinite(result):
        raise InputError(Fault(f"{text!r} is not a finite number.", "", remedy))
    return result


def _factor(given: str, text: str, wanted: str, remedy: str, is_temperature: bool) -> float:
    """Return the factor from the unit given to the unit wanted."""
    if given == "%" and not wanted:
        return 0.01
    from astropy import units

    try:
        unit_given = _unit(given)
    except (ValueError, TypeError, ArithmeticError, RecursionError):
        near = difflib.get_close_matches(given, _COMMON_UNITS, n=1, cutoff=0.5)
        hint = f"Did you mean {near[0]}? {remedy}" if near else remedy
        raise UnitsError(Fault(f"the unit in {text!r} is not known.", "", hint)) from None
    unit_wanted = as_wanted = _unit(wanted)
    if not _has_counts(unit_given) and _has_counts(unit_wanted):
        unit_wanted = _without_counts(unit_wanted)
    try:
        equivalencies = units.temperature_energy() if is_temperature else []
        return float(unit_given.to(unit_wanted, equivalencies=equivalencies))
    except units.UnitConversionError:
        kinds = f"{_kind(unit_given)}, not {_kind(as_wanted)}"
        raise UnitsError(Fault(f"{text!r} is {kinds}.", "", remedy)) from None
    except (units.UnitTypeError, TypeError, ArithmeticError):
        what = f"the unit in {text!r} cannot be used here."
        raise UnitsError(Fault(what, "", remedy)) from None


def _unit(text: str) -> UnitBase:
    """Return the astropy unit of a text; ValueError where there is none."""
    from astropy import units

    if _LONG_EXPONENT.search(text):
        raise ValueError(text)
    text = _PHOTONS.sub("ph", _COUNTS.sub("ct", text))
    with warnings.catch_warnings():
        # More than one slash is discouraged by a standard but plain to every reader.
        warnings.simplefilter("ignore")
        return units.Unit(text)


def _has_counts(unit: UnitBase) -> bool:
    """Say whether counts or photons stand in a unit."""
    return any(base.name in ("ct", "ph") for base in getattr(unit, "bases", ()))


def _without_counts(unit: UnitBase) -> UnitBase:
    """Return the unit with counts and photons taken as plain numbers."""
    from astropy import units

    pairs = zip(unit.bases, unit.powers, strict=True)
    kept = [(base, power) for base, power in pairs if base.name not in ("ct", "ph")]
    return units.CompositeUnit(unit.scale, [base for base, _ in kept], [power for _, power in kept])


def _kind(unit: UnitBase) -> str:
    """Return the kind of a unit in words: physical type, or the unit itself."""
    kind = str(unit.physical_type)
    if kind == "dimensionless":
        return "a plain number"
    if kind == "unknown":
        return f"in {unit}"
    name = kind.split("/")[0]
    return f"{'an' if name[0] in 'aeiou' else 'a'} {name}"
