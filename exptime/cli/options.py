"""Read what stands behind an option: text to numbers, or a fault that names the option."""

from __future__ import annotations

import difflib
import re
from typing import Final

from exptime.errors import Fault, InputError
from exptime.quantities import read_quantity, read_range

QUANTITY_NAMES: Final = ("mass", "radius", "compactness")
RANGE_POINTS: Final = 13
"""Exposures in a range A..B."""

SHORTEST_EXPOSURE_S: Final = 1.0
LONGEST_EXPOSURE_S: Final = 1e8
"""Three years; what lies beyond is a slip of the unit."""

_MOST_VALUES: Final = 1000
_GOAL: Final = re.compile(r"\s*(\w+)[\s:=]+(\S.*?)\s*")


def read_exposures(text: str) -> tuple[float, ...]:
    """Return the exposures of ``--exposure`` in seconds, increasing, none twice.

    Parameters
    ----------
    text : str
        ``"100ks..3Ms"``, which is 13 exposures evenly spaced in logarithm, or a list such as
        ``"100, 300 ks, 1 Ms"``.

    Raises
    ------
    InputError
        When it cannot be read or an exposure is not between 1 s and 1e8 s.

    Examples
    --------
    >>> read_exposures("100, 300 ks, 1 Ms")
    (100000.0, 300000.0, 1000000.0)
    """
    remedy = "Write for example 100ks..3Ms, or 300ks,1Ms."
    if ".." in text:
        lower, upper = read_range(text, "s", example="100ks..3Ms")
        _check_exposures((lower, upper), text, remedy)
        if lower >= upper:
            raise InputError(Fault(f"{text!r} does not go upwards.", "", remedy))
        step = (upper / lower) ** (1.0 / (RANGE_POINTS - 1))
        return (lower, *(lower * step**k for k in range(1, RANGE_POINTS - 1)), upper)
    exposures = read_list(text, "s", "300ks,1Ms")
    _check_exposures(exposures, text, remedy)
    return tuple(sorted(set(exposures)))


def read_exposure(text: str) -> float:
    """Return a single exposure, seconds."""
    exposures = read_exposures(text)
    if len(exposures) != 1:
        what = f"{text!r} is {len(exposures)} exposures; one is wanted here."
        raise InputError(Fault(what, "", "Write for example 300 ks."))
    return exposures[0]


def _check_exposures(exposures: tuple[float, ...], text: str, remedy: str) -> None:
    for exposure in exposures:
        if not SHORTEST_EXPOSURE_S <= exposure <= LONGEST_EXPOSURE_S:
            what = f"{text!r} is not between 1 s and 1e8 s."
            raise InputError(Fault(what, "", remedy))


def read_energies(text: str) -> tuple[float, ...]:
    """Return the photon energies of ``--energies``, keV, in the order given.

    Examples
    --------
    >>> read_energies("300 eV, 0.5, 1 keV")
    (0.3, 0.5, 1.0)
    """
    energies = read_list(text, "keV", "0.3,0.5,1 keV")
    if min(energies) <= 0.0:
        raise InputError(Fault(f"{text!r} holds an energy that is not above zero."))
    return energies


def read_list(text: str, unit: str, example: str) -> tuple[float, ...]:
    """Return a comma list of quantities; one without a unit takes that of the next.

    Raises
    ------
    InputError
        When one of them cannot be read.
    """
    pieces = text.split(",")
    if len(pieces) > _MOST_VALUES:
        raise InputError(Fault(f"{len(pieces)} values are more than {_MOST_VALUES}."))
    numbers: list[float] = []
    following = ""
    for piece in reversed(pieces):
        written = re.fullmatch(r"\s*([+-]?[\d.]+(?:[eE][+-]?\d+)?)\s*(.*?)\s*", piece)
        if written is not None:
            following = written[2] or following
            piece = f"{written[1]} {following}".strip()
        numbers.append(read_quantity(piece, unit, example=example))
    return tuple(reversed(numbers))


def read_goal(text: str) -> tuple[str, float]:
    """Return the quantity and the precision of one ``--goal``.

    Examples
    --------
    >>> read_goal("radius 5 %")
    ('radius', 0.05)
    """
    remedy = "Write for example 'radius 5 %'."
    found = _GOAL.fullmatch(text)
    if not found:
        raise InputError(Fault(f"{text!r} is no quantity with a precision.", "", remedy))
    name, precision = found[1].lower(), found[2]
    if name not in QUANTITY_NAMES:
        near = difflib.get_close_matches(name, QUANTITY_NAMES, n=1)
        hint = f"Did you mean {near[0]}? " if near else ""
        remedy = f"{hint}Goals are about {', '.join(QUANTITY_NAMES)}."
        raise InputError(Fault(f"{text!r} names no quantity.", "", remedy))
    try:
        share = read_quantity(precision, "", example="5 %")
    except InputError as error:
        meaning = "A precision is one standard deviation over the value, such as 5 %."
        raise type(error)(Fault(each.what, "", meaning) for each in error.faults) from None
    if not 0.0 < share < 1.0:
        raise InputError(Fault(f"{text!r} is not between 0 and 100 %.", "", remedy))
    return name, share


def read_margin(text: str) -> float:
    """Return the share that ``--margin`` adds to required exposures.

    Examples
    --------
    >>> read_margin("15 %")
    0.15
    """
    margin = read_quantity(text, "", example="15 %")
    if not 0.0 <= margin <= 2.0:
        remedy = "Write for example 15 %."
        raise InputError(Fault(f"{text!r} is not between 0 and 200 %.", "", remedy))
    return margin


def read_whole(text: str, minimum: int, maximum: int) -> int:
    """Return a whole number within bounds."""
    try:
        number = int(text) if len(text) < 30 else -1
    except ValueError:
        raise InputError(Fault(f"{text[:40]!r} is no whole number.")) from None
    if not minimum <= number <= maximum:
        raise InputError(Fault(f"{text[:40]} is not between {minimum} and {maximum}."))
    return number


def read_file_name(name: str) -> str:
    """Return a name as the stem of a file name: letters, digits and ``. _ + -``.

    Examples
    --------
    >>> read_file_name("Candidate A")
    'Candidate-A'
    """
    stem = name.removesuffix(".yaml").removesuffix(".yml")
    stem = re.sub(r"[^\w.+-]+", "-", stem).lstrip(".-").rstrip(".-")[:100]
    if not stem:
        remedy = "Use letters and digits, for example demo."
        raise InputError(Fault(f"{name!r} makes no file name.", "", remedy))
    return stem
