"""Values that know where they stand: the parts of a document, each with file, line and key."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field


@dataclass(frozen=True, slots=True)
class Place:
    """Where something stands.

    Parameters
    ----------
    file : str
        Name of the file as given.
    line : int
        Line number from 1; 0 where there is none.
    key : str
        Key path such as ``"hot_spots[0].colatitude"``; empty for a whole document.
    """

    file: str
    line: int = 0
    key: str = ""

    def __str__(self) -> str:
        """Return the place as messages show it."""
        parts = [self.file, f"line {self.line}" if self.line else "", self.key]
        return ", ".join(part for part in parts if part)

    def inside(self, key: str, line: int = 0) -> Place:
        """Return the place of a key inside this one."""
        path = f"{self.key}.{key}" if self.key else key
        return Place(self.file, line or self.line, path)

    def item(self, index: int, line: int = 0) -> Place:
        """Return the place of an item of the list that stands here."""
        return Place(self.file, line or self.line, f"{self.key}[{index}]")


@dataclass(frozen=True, slots=True, kw_only=True)
class Scalar:
    """One value, as the text that was written."""

    text: str
    place: Place


@dataclass(frozen=True, slots=True, kw_only=True)
class Sequence:
    """A list of nodes."""

    items: tuple[Node, ...]
    place: Place


@dataclass(frozen=True, slots=True, kw_only=True)
class Mapping:
    """Keys and their nodes in file order; no key stands twice."""

    entries: dict[str, Node] = field(default_factory=dict)
    key_lines: dict[str, int] = field(default_factory=dict)
    place: Place

    def get(self, key: str) -> Node | None:
        """Return the node of a key, or None."""
        return self.entries.get(key)

    def place_of(self, key: str) -> Place:
        """Return the place of a key, present or not."""
        return self.place.inside(key, self.key_lines.get(key, 0))


Node = Scalar | Sequence | Mapping


def scalars(node: Node) -> Iterator[Scalar]:
    """Yield every scalar below a node in file order."""
    if isinstance(node, Scalar):
        yield node
    elif isinstance(node, Sequence):
        for item in node.items:
            yield from scalars(item)
    else:
        for value in node.entries.values():
            yield from scalars(value)
