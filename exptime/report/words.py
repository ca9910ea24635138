"""Users' strings made harmless, and small matters of language."""

from __future__ import annotations

from typing import Final

from exptime.information.precision import Quantity as QuantityName

NAMES: Final[dict[QuantityName, str]] = {
    "mass": "mass",
    "radius": "equatorial radius",
    "compactness": "compactness",
}
SYMBOLS: Final[dict[QuantityName, str]] = {"mass": "M", "radius": "R", "compactness": "GM/Rc²"}
UNITS: Final[dict[QuantityName, str]] = {"mass": "Msun", "radius": "km", "compactness": ""}


def printable(text: str) -> str:
    """Return text on one line, without characters that steer a terminal or turn the line."""
    return "".join(
        character if character.isprintable() else " " if character.isspace() else "\ufffd"
        for character in text
    )


def with_unit(number: str, quantity: QuantityName) -> str:
    """Return a number of a quantity with its unit, which compactness has not."""
    return f"{number} {UNITS[quantity]}".rstrip()
