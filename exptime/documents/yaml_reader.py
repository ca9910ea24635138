"""YAML read as plain text scalars with line numbers, and nothing that YAML can do besides.

Anchors, aliases, tags and deep nesting are refused before anything is built.
"""

from __future__ import annotations

from dataclasses import replace
from typing import Final

import yaml

from exptime.documents.faults import Faults
from exptime.documents.files import LARGEST_YAML, decode, read_bytes
from exptime.documents.nodes import Mapping, Node, Place, Scalar, Sequence
from exptime.errors import Fault, InputError

DEEPEST: Final = 20
MOST_EVENTS: Final = 20_000
"""Bounds the time of the pure-Python parser; no honest file comes near."""


def read_yaml(path: str, faults: Faults) -> Mapping | None:
    """Return the mapping that a YAML file holds.

    Parameters
    ----------
    path : str
        Path; ``"-"`` for standard input.
    faults : Faults
        Where faults are noted.

    Returns
    -------
    Mapping or None
        None when the file cannot be read at all; the reason is noted then.
    """
    try:
        content = read_bytes(path, LARGEST_YAML)
        return parse_yaml(decode(content, path), path, faults)
    except InputError as error:
        faults.absorb(error)
        return None


def parse_yaml(text: str, file: str, faults: Faults, *, allow_tags: bool = False) -> Mapping | None:
    """Return the mapping that a YAML text holds; see `read_yaml`.

    Parameters
    ----------
    text : str
        YAML.
    file : str
        Name for messages.
    faults : Faults
        Where faults are noted.
    allow_tags : bool
        Pass over explicit tags (headers of tables carry them); values stay text all the same.
    """
    try:
        if len(text) > LARGEST_YAML:
            raise InputError(Fault(f"the text is larger than {LARGEST_YAML / 1e6:g} MB.", file))
        _refuse_what_is_not_plain(text, file, allow_tags)
        root = yaml.compose(text, Loader=yaml.BaseLoader)
    except InputError as error:
        faults.absorb(error)
        return None
    except yaml.YAMLError as error:
        _note_syntax(error, text, file, faults)
        return None
    if root is None or (isinstance(root, yaml.ScalarNode) and not root.value.strip()):
        faults.add("the file is empty.", file, "Write keys and values, one per line.")
        return None
    node = _node(root, Place(file), faults)
    if not isinstance(node, Mapping):
        remedy = 'Write lines such as "name: Candidate A".'
        faults.add("the file holds no keys with values.", Place(file, 1), remedy)
        return None
    # A key that is missing from the whole document stands in no line.
    return replace(node, place=Place(file))


def _refuse_what_is_not_plain(text: str, file: str, allow_tags: bool) -> None:
    """Raise for anchors, aliases, tags, deep nesting and endless files; builds nothing."""
    depth = 0
    for number, event in enumerate(yaml.parse(text, Loader=yaml.BaseLoader)):
        where = str(Place(file, event.start_mark.line + 1 if event.start_mark else 0))
        if isinstance(event, yaml.AliasEvent) or getattr(event, "anchor", None) is not None:
            what = "anchors and aliases (& and *) are not allowed."
            raise InputError(Fault(what, where, "Write the value out, or put it in quotes."))
        tag: str | None = getattr(event, "tag", None)
        if tag is not None and not allow_tags:
            what = f"the tag {tag} is not allowed."
            raise InputError(Fault(what, where, "Remove it, or put the value in quotes."))
        depth += isinstance(event, yaml.CollectionStartEvent)
        depth -= isinstance(event, yaml.CollectionEndEvent)
        if depth > DEEPEST:
            raise InputError(Fault(f"more than {DEEPEST} levels are nested.", where))
        if number > MOST_EVENTS:
            raise InputError(Fault(f"there are more than {MOST_EVENTS} values and keys.", where))


def _note_syntax(error: yaml.YAMLError, text: str, file: str, faults: Faults) -> None:
    """Note what the parser says, in its line, with the usual causes as remedy."""
    line = 0
    if isinstance(error, yaml.reader.ReaderError):
        line = text.count("\n", 0, error.position) + 1
        faults.add("there is a control character.", Place(file, line), "Remove it.")
        return
    problem, remedy = "it cannot be parsed", "Check indentation, colons, quotes and brackets."
    if isinstance(error, yaml.MarkedYAMLError):
        mark = error.problem_mark or error.context_mark
        line = mark.line + 1 if mark else 0
        problem = error.problem or error.context or problem
    if "'\\t'" in problem:
        problem, remedy = "a tab stands where YAML wants spaces", "Indent with spaces."
    elif "expected a single document" in (getattr(error, "context", "") or ""):
        problem, remedy = "there is more than one document", "Remove the line '---' between them."
    faults.add(f"this is not valid YAML: {problem}.", Place(file, line), remedy)


def _node(node: yaml.Node, place: Place, faults: Faults) -> Node:
    """Return a composed node as our own; duplicate keys are noted, the first one counts."""
    line = node.start_mark.line + 1
    place = Place(place.file, place.line or line, place.key)
    if isinstance(node, yaml.SequenceNode):
        items = (
            _node(item, place.item(index, item.start_mark.line + 1), faults)
            for index, item in enumerate(node.value)
        )
        return Sequence(items=tuple(items), place=place)
    if not isinstance(node, yaml.MappingNode):
        return Scalar(text=str(node.value), place=place)
    entries: dict[str, Node] = {}
    key_lines: dict[str, int] = {}
    for key_node, value_node in node.value:
        key_line = key_node.start_mark.line + 1
        if not isinstance(key_node, yaml.ScalarNode):
            here = Place(place.file, key_line, place.key)
            faults.add("a key must be a word.", here, "Check colons and brackets.")
            continue
        key = str(key_node.value)
        here = place.inside(key, key_line)
        if key in entries:
            what = f"the key stands twice; first in line {key_lines[key]}."
            faults.add(what, here, "Remove one of the two.")
            continue
        key_lines[key] = key_line
        entries[key] = _node(value_node, here, faults)
    return Mapping(entries=entries, key_lines=key_lines, place=place)
