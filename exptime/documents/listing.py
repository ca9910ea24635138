"""The list of keys of a document, made from its table of fields."""

from __future__ import annotations

from exptime.documents.fields import Field


def render_markdown(fields: tuple[Field, ...]) -> str:
    """Return a table of fields as a Markdown table, keys below keys with dots.

    Parameters
    ----------
    fields : tuple of Field
        The table.

    Returns
    -------
    str
        Ends with a line end.
    """
    lines = ["| key | example | allowed | if absent | meaning |", "|---|---|---|---|---|"]
    for path, field in walk(fields):
        allowed = " or ".join(f"`{choice}`" for choice in field.choices) or field.bounds
        absent = "an error" if field.is_required else field.default
        example = f"`{field.example}`" if field.example else ""
        cells = (f"`{path}`", example, allowed, absent, field.meaning)
        lines.append(f"| {' | '.join(cell.replace('|', chr(92) + '|') for cell in cells)} |")
    return "\n".join(lines) + "\n"


def walk(fields: tuple[Field, ...], prefix: str = "") -> list[tuple[str, Field]]:
    """Return every field with its key path, depth first; lists show as ``key[]``.

    The ``value`` for which a bare scalar stands is left out: its parent shows it.
    """
    found: list[tuple[str, Field]] = []
    for field in fields:
        path = f"{prefix}{field.key}{'[]' if field.many == 'list' else ''}"
        value = next((inner for inner in field.fields if inner.key == field.scalar_key), None)
        shown = field
        if value is not None:
            shown = _with_bounds(field, value)
        found.append((path, shown))
        inner = tuple(each for each in field.fields if each is not value)
        found.extend(walk(inner, f"{path}."))
    return found


def _with_bounds(field: Field, value: Field) -> Field:
    """Return a mapping that shows the range of the value a bare scalar stands for."""
    from dataclasses import replace

    return replace(
        field,
        minimum=value.minimum,
        maximum=value.maximum,
        excludes_minimum=value.excludes_minimum,
        unit=value.unit,
        choices=value.choices,
    )
