"""Read a mapping under a declarative table of fields, noting every fault."""

from __future__ import annotations

import difflib
import re
from typing import Final

from exptime.documents.faults import Faults
from exptime.documents.fields import Field
from exptime.documents.nodes import Mapping, Node, Scalar, Sequence
from exptime.documents.values import Values
from exptime.errors import Fault, InputError, OutOfRangeError
from exptime.quantities import read_quantity, read_range

LONGEST_NAME: Final = 200
MOST_ITEMS: Final = 1000
_BOOLEANS: Final = {"true": True, "yes": True, "false": False, "no": False}
_CONTROL: Final = re.compile(r"[\x00-\x1f\x7f-\x9f\u2028\u2029]")


def read_fields(mapping: Mapping, fields: tuple[Field, ...], faults: Faults) -> Values:
    """Return the values of a mapping under a table of fields.

    Parameters
    ----------
    mapping : Mapping
        What the document holds.
    fields : tuple of Field
        The keys that may stand there. A field of kind uncertainty comes after ``value``.
    faults : Faults
        Where everything wrong is noted: unknown keys with the nearest valid name, missing keys,
        units, ranges, choices.

    Returns
    -------
    Values
        The keys that were understood.
    """
    known = {field.key: field for field in fields}
    for key in mapping.entries:
        if key not in known:
            faults.add("unknown key.", mapping.place_of(key), _nearest(key, tuple(known)))
    values = Values(place=mapping.place)
    for field in fields:
        node = mapping.get(field.key)
        if node is None:
            if field.is_required:
                remedy = f"Write for example {field.key}: {field.example}"
                faults.add("this key is missing.", mapping.place.inside(field.key), remedy)
            continue
        values.places[field.key] = mapping.place_of(field.key)
        if field.kind == "mapping":
            values.groups[field.key] = _read_groups(node, field, faults)
        else:
            _read_scalar(node, field, values, faults)
    return values


def _read_groups(node: Node, field: Field, faults: Faults) -> tuple[Values, ...]:
    """Return the mappings that stand at a key, one or several."""
    if not isinstance(node, Sequence):
        if field.many == "list":
            remedy = f"Begin each entry with a dash: - {field.example}"
            faults.add("a list is wanted here.", node.place, remedy)
            return ()
        return _read_group(node, field, faults)
    if field.many == "one":
        faults.add("a list is not allowed here.", node.place, f"Write {field.key}: {field.example}")
        return ()
    if not node.items:
        remedy = "Remove the key, or list at least one entry."
        faults.add("the list is empty.", node.place, remedy)
    if len(node.items) > MOST_ITEMS:
        faults.add(f"the list has more than {MOST_ITEMS} entries.", node.place)
        return ()
    return tuple(group for item in node.items for group in _read_group(item, field, faults))


def _read_group(node: Node, field: Field, faults: Faults) -> tuple[Values, ...]:
    """Return the one mapping that a node holds or stands for; empty when it is neither."""
    if isinstance(node, Scalar) and field.scalar_key:
        entries: dict[str, Node] = {field.scalar_key: node}
        lines = {field.scalar_key: node.place.line}
        node = Mapping(entries=entries, key_lines=lines, place=node.place)
    if not isinstance(node, Mapping):
        keys = ", ".join(f"{inner.key}: …" for inner in field.fields[:2])
        is_blank = isinstance(node, Scalar) and not node.text.strip()
        what = "the key has no value." if is_blank else "keys and values are wanted here."
        faults.add(what, node.place, f"Write for example {field.example or f'{{{keys}}}'}")
        return ()
    return (read_fields(node, field.fields, faults),)


def _read_scalar(node: Node, field: Field, values: Values, faults: Faults) -> None:
    """Read one scalar into the values, or note why not."""
    if not isinstance(node, Scalar):
        remedy = f"Write for example {field.key}: {field.example}"
        faults.add("one plain value is wanted here.", node.place, remedy)
        return
    text = node.text.strip()
    values.written[field.key] = text
    if not text:
        key = node.place.key.rsplit(".", 1)[-1]
        remedy = f"Write for example {key}: {field.example}, or remove the key."
        faults.add("the key has no value.", node.place, remedy)
        return
    try:
        if field.kind == "text":
            values.texts[field.key] = _text(text, field)
        elif field.kind == "choice":
            values.texts[field.key] = _choice(text, field)
        elif field.kind == "boolean":
            values.flags[field.key] = _boolean(text)
        elif field.kind == "range":
            values.ranges[field.key] = _range(text, field)
        else:
            number = _number(text, field, values)
            if number is not None:
                values.numbers[field.key] = number
    except InputError as error:
        faults.absorb(error, node.place)


def _number(text: str, field: Field, values: Values) -> float | None:
    """Return a quantity, uncertainty or integer in its range; None without its value."""
    if field.kind == "integer":
        number = _integer(text, field)
    elif field.kind == "uncertainty":
        found = _uncertainty(text, field, values)
        if found is None:
            return None
        number = found
    else:
        number = read_quantity(
            text, field.unit, example=field.example, is_temperature=field.is_temperature
        )
    if not field.allows(number):
        raise OutOfRangeError(_outside(text, field))
    return number


def _uncertainty(text: str, field: Field, values: Values) -> float | None:
    """Return an uncertainty in the unit of the value beside it; per cent are of that value."""
    value = values.number("value")
    if text.endswith("%"):
        share = read_quantity(text, "", example=field.example)
        return None if value is None else share * abs(value)
    if re.fullmatch(r"0+(\.0*)?", text):
        return 0.0
    return read_quantity(
        text, field.unit, example=f"5 % or {field.example}", is_temperature=field.is_temperature
    )


def _integer(text: str, field: Field) -> float:
    """Return a whole number as a float."""
    if not re.fullmatch(r"[+-]?\d{1,15}", text, re.ASCII):
        remedy = f"Write for example {field.key}: {field.example}"
        raise InputError(Fault(f"{text!r} is not a whole number.", "", remedy))
    return float(int(text))


def _range(text: str, field: Field) -> tuple[float, float]:
    """Return both ends of a range, ordered and allowed."""
    lower, upper = read_range(text, field.unit, example=field.example)
    if not lower < upper:
        remedy = f"Write the lower end first, for example {field.example}."
        raise OutOfRangeError(Fault(f"{text!r} does not rise.", "", remedy))
    if not (field.allows(lower) and field.allows(upper)):
        raise OutOfRangeError(_outside(text, field))
    return lower, upper


def _outside(text: str, field: Field) -> Fault:
    """Return the fault of a number outside its range."""
    reason = f" {field.reason}" if field.reason else ""
    return Fault(f"{text!r} is out of range.", "", f"Allowed: {field.bounds}.{reason}")


def _text(text: str, field: Field) -> str:
    """Return a name or path that can be printed."""
    if len(text) > LONGEST_NAME or _CONTROL.search(text):
        what = f"a text of one line with at most {LONGEST_NAME} characters is wanted."
        raise InputError(Fault(what, "", f"Write for example {field.key}: {field.example}"))
    return text


def _choice(text: str, field: Field) -> str:
    """Return one of the allowed words."""
    if text in field.choices:
        return text
    raise InputError(Fault(f"{text[:80]!r} is not known here.", "", _nearest(text, field.choices)))


def _boolean(text: str) -> bool:
    """Return true or false."""
    if text.lower() not in _BOOLEANS:
        raise InputError(
            Fault(f"{text[:80]!r} is neither true nor false.", "", "Write true or false.")
        )
    return _BOOLEANS[text.lower()]


def _nearest(word: str, known: tuple[str, ...]) -> str:
    """Return the remedy for an unknown word: the nearest known one, or all of them."""
    low = {name.lower(): name for name in known}
    near = difflib.get_close_matches(word[:80].lower().replace("-", "_"), low, n=1, cutoff=0.6)
    near = near or difflib.get_close_matches(word[:80].lower(), low, n=1, cutoff=0.6)
    hint = f"Did you mean {low[near[0]]}? " if near else ""
    return f"{hint}Allowed: {', '.join(known)}."
