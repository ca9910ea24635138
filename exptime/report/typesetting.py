"""Parts of a text report: titles, lists, tables, and lines of so many columns."""

from __future__ import annotations

import io
from collections.abc import Iterable
from typing import TYPE_CHECKING

from exptime.report.tables import Facts, Table
from exptime.report.words import printable

if TYPE_CHECKING:
    from rich.console import RenderableType


def heading(title: str) -> list[RenderableType]:
    """Return a title, underlined."""
    from rich.text import Text

    return [Text(title), Text("─" * len(title))]


def paragraphs(sentences: Iterable[str]) -> list[RenderableType]:
    """Return sentences with an empty line after each."""
    from rich.text import Text

    return [part for sentence in sentences for part in (Text(printable(sentence)), Text(""))]


def listed(title: str, sentences: Iterable[str]) -> list[RenderableType]:
    """Return a list under its title; nothing where it is empty."""
    from rich.table import Table as Grid
    from rich.text import Text

    rows = Grid.grid(padding=(0, 1, 0, 0))
    rows.add_column()
    rows.add_column(overflow="fold")
    for sentence in sentences:
        rows.add_row(Text("-"), Text(printable(sentence)))
    return [*heading(title), rows, Text("")] if rows.row_count else []


def fact_list(title: str, facts: Facts) -> list[RenderableType]:
    """Return labels and values under a title."""
    from rich.table import Table as Grid
    from rich.text import Text

    rows = Grid.grid(padding=(0, 2, 0, 0))
    rows.add_column(overflow="fold", max_width=28)
    rows.add_column(overflow="fold")
    for label, value in facts:
        rows.add_row(Text(printable(label)), Text(printable(value)))
    return [*heading(title), rows, Text("")]


def grid(table: Table) -> list[RenderableType]:
    """Return a table under its caption."""
    from rich import box
    from rich.table import Table as Grid
    from rich.text import Text

    rows = Grid(box=box.SIMPLE_HEAD, show_edge=False, pad_edge=False, padding=(0, 1))
    for index, title in enumerate(table.header):
        is_word = index == 0 or title == "remark"
        rows.add_column(Text(title), justify="left" if is_word else "right", overflow="fold")
    for row in table.rows:
        rows.add_row(*(Text(printable(cell)) for cell in row))
    caption = [Text(table.caption), Text("")] if table.caption else []
    return [*caption, rows, Text("")]


def render(parts: Iterable[RenderableType], width: int) -> str:
    """Return the parts as text, no line longer than the width."""
    from rich.console import Console

    stream = io.StringIO()
    console = Console(
        file=stream,
        width=width,
        force_terminal=False,
        color_system=None,
        highlight=False,
        markup=False,
        emoji=False,
        legacy_windows=False,
    )
    for part in parts:
        console.print(part)
    lines = [line.rstrip() for line in stream.getvalue().splitlines()]
    return "\n".join(lines).rstrip() + "\n"
