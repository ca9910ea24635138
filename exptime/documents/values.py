"""What was read under a table of fields: values by key, each with its place."""

from __future__ import annotations

from dataclasses import dataclass, field

from exptime.documents.nodes import Place


@dataclass(frozen=True, slots=True, kw_only=True)
class Values:
    """The keys of one mapping that were given and understood.

    A key that was given but is faulty stands in `given` alone; asking for it returns None, so
    that checks across keys can go on and every fault is found in one go.

    Parameters
    ----------
    numbers : dict
        Quantities, uncertainties and integers, in the unit of their field.
    texts : dict
        Texts and choices.
    flags : dict
        Booleans.
    ranges : dict
        Lower and upper end, in the unit of their field.
    groups : dict
        Mappings below this one; a field that may be a list always holds a tuple here.
    written : dict
        Scalars as written.
    places : dict
        Place of every key that was given.
    place : Place
        Place of the mapping itself.
    """

    numbers: dict[str, float] = field(default_factory=dict)
    texts: dict[str, str] = field(default_factory=dict)
    flags: dict[str, bool] = field(default_factory=dict)
    ranges: dict[str, tuple[float, float]] = field(default_factory=dict)
    groups: dict[str, tuple[Values, ...]] = field(default_factory=dict)
    written: dict[str, str] = field(default_factory=dict)
    places: dict[str, Place] = field(default_factory=dict)
    place: Place

    def is_given(self, key: str) -> bool:
        """Say whether the key stands in the document, faulty or not."""
        return key in self.places

    def place_of(self, key: str) -> Place:
        """Return the place of a key, present or not."""
        return self.places.get(key, self.place.inside(key))

    def number(self, key: str) -> float | None:
        """Return a number, or None."""
        return self.numbers.get(key)

    def text(self, key: str) -> str | None:
        """Return a text or choice, or None."""
        return self.texts.get(key)

    def flag(self, key: str) -> bool | None:
        """Return a boolean, or None."""
        return self.flags.get(key)

    def range(self, key: str) -> tuple[float, float] | None:
        """Return both ends of a range, or None."""
        return self.ranges.get(key)

    def group(self, key: str) -> Values | None:
        """Return the mapping below a key, or None."""
        found = self.groups.get(key, ())
        return found[0] if found else None

    def list(self, key: str) -> tuple[Values, ...]:
        """Return every mapping below a key; empty if none."""
        return self.groups.get(key, ())
