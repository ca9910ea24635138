"""Tables of numbers as text: ECSV, CSV and columns set apart by blanks.

Read line by line, so that a fault can name its line; the header of an ECSV file goes through
the same guarded YAML reader as every other document.
"""

from __future__ import annotations

import csv
import re
from dataclasses import dataclass
from typing import Final

import numpy as np

from exptime.documents.columns import MOST_FAULTS, RawColumn, Table, Wanted, choose_columns
from exptime.documents.faults import Faults
from exptime.documents.files import read_text
from exptime.documents.nodes import Mapping, Scalar, Sequence, scalars
from exptime.documents.yaml_reader import parse_yaml
from exptime.errors import InputError

_NUMBER: Final = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eEdD][+-]?\d+)?", re.ASCII)
_NOT_FINITE: Final = re.compile(r"[+-]?(nan|inf|infinity)", re.IGNORECASE)
_NAME_AND_UNIT: Final = re.compile(r"\s*([^\s(\[]*)\s*(?:[(\[]\s*(.*?)\s*[)\]])?\s*")
_HEADER_PAIR: Final = re.compile(r"\s*([A-Za-z][\w ]{0,60}?)\s*[:=]\s*(\S.*?)\s*")
MOST_ROWS: Final = 1_000_000


@dataclass(frozen=True, slots=True)
class _Lines:
    """A text table taken apart: comments, and cells with their line numbers."""

    comments: list[str]
    rows: list[list[str]]
    numbers: list[int]


def read_table(path: str, wanted: tuple[Wanted, ...], faults: Faults) -> Table | None:
    """Return the wanted columns of a text table.

    ECSV is known by its first line; a table with commas (or semicolons) is CSV; all else is
    columns set apart by blanks. A first row that is not all numbers names the columns, with a
    unit in round or square brackets where it likes: ``energy (keV), area (cm2)``. Without such
    a row columns are taken in the order wanted.

    Parameters
    ----------
    path : str
        Path of the file.
    wanted : tuple of Wanted
        The columns.
    faults : Faults
        Where faults are noted, each with file, line and column.

    Returns
    -------
    Table or None
        None when something is wrong; the reasons are noted then.
    """
    before = len(faults)
    try:
        text = read_text(path)
    except InputError as error:
        faults.absorb(error)
        return None
    if text.startswith("# %ECSV"):
        header, raw, lines = _read_ecsv(text, path, faults)
    else:
        header, raw, lines = _read_plain(text, path, faults)
    if len(faults) > before:
        return None
    if not lines:
        faults.add("the table has no rows.", path, "Add at least two rows of numbers.")
        return None
    columns = choose_columns(raw, wanted, path, faults)
    if len(faults) > before:
        return None
    return Table(columns=columns, header=header, file=path, rows=tuple(lines))


_Parts = tuple[dict[str, str], tuple[RawColumn, ...], list[int]]


def _read_ecsv(text: str, path: str, faults: Faults) -> _Parts:
    """Return header keys, columns and line numbers of an ECSV text."""
    yaml_lines = [
        line[2:] if line.startswith("# ") and not line.startswith("# %ECSV") else ""
        for line in text.split("\n")
    ]
    while yaml_lines and not yaml_lines[-1]:
        yaml_lines.pop()
    root = parse_yaml("\n".join(yaml_lines), path, faults, allow_tags=True)
    if root is None:
        return {}, (), []
    delimiter_node = root.get("delimiter")
    delimiter = delimiter_node.text if isinstance(delimiter_node, Scalar) else " "
    if delimiter not in (" ", ","):
        faults.add(f"{delimiter!r} is no delimiter of ECSV.", path, "Use a blank or a comma.")
        return {}, (), []
    lines = _split(text, delimiter)
    if not lines.rows:
        return {}, (), []
    units = _ecsv_units(root)
    names = [(name, units.get(name, "")) for name in lines.rows[0]]
    raw = _columns(names, lines.rows[1:], lines.numbers[1:], path, faults)
    return _ecsv_meta(root), raw, lines.numbers[1:]


def _ecsv_units(root: Mapping) -> dict[str, str]:
    """Return the unit of every column that the header gives one."""
    units = {}
    described = root.get("datatype")
    for item in described.items if isinstance(described, Sequence) else ():
        if isinstance(item, Mapping):
            name, unit = item.get("name"), item.get("unit")
            if isinstance(name, Scalar) and isinstance(unit, Scalar):
                units[name.text] = unit.text
    return units


def _ecsv_meta(root: Mapping) -> dict[str, str]:
    """Return every scalar of the header's meta block by its last key, in lower case."""
    meta = root.get("meta")
    if meta is None:
        return {}
    return {node.place.key.rsplit(".", 1)[-1].lower(): node.text for node in scalars(meta)}


def _read_plain(text: str, path: str, faults: Faults) -> _Parts:
    """Return header keys, columns and line numbers of CSV or blank-separated text."""
    data = [line for line in text.split("\n") if line.strip() and not line.startswith("#")]
    delimiter = next((mark for mark in (",", ";") if data and mark in data[0]), None)
    lines = _split(text, delimiter)
    header = {}
    for comment in lines.comments:
        pair = _HEADER_PAIR.fullmatch(comment)
        if pair:
            header[pair[1].lower().replace(" ", "_")] = pair[2]
    if not lines.rows:
        return header, (), []
    first = lines.rows[0]
    is_data = all(_NUMBER.fullmatch(cell) or _NOT_FINITE.fullmatch(cell) for cell in first)
    rows, numbers = lines.rows, lines.numbers
    names = [("", "")] * len(first)
    if not is_data:
        names = _names_and_units(first)
        if delimiter is None and any(mark in " ".join(first) for mark in "(["):
            names = _names_and_units(
                re.findall(r"[^\s(\[]+\s*(?:[(\[][^)\]]*[)\]])?", " ".join(first))
            )
        rows, numbers = rows[1:], numbers[1:]
    return header, _columns(names, rows, numbers, path, faults), numbers


def _names_and_units(cells: list[str]) -> list[tuple[str, str]]:
    """Return name and unit of every cell of a header row."""
    found = (_NAME_AND_UNIT.fullmatch(cell) for cell in cells)
    return [
        (match[1], match[2] or "") if match else (cell, "")
        for match, cell in zip(found, cells, strict=True)
    ]


def _split(text: str, delimiter: str | None) -> _Lines:
    """Return comments and rows of cells; None stands for any run of blanks."""
    lines = _Lines([], [], [])
    for number, line in enumerate(text.split("\n"), start=1):
        if line.lstrip().startswith("#"):
            lines.comments.append(line.lstrip("# \t"))
            continue
        if not line.strip():
            continue
        if delimiter is None:
            cells = line.split()
        else:
            try:
                cells = next(csv.reader([line], delimiter=delimiter, skipinitialspace=True), [])
            except csv.Error:
                cells = line.split(delimiter)
        lines.rows.append([cell.strip() for cell in cells])
        lines.numbers.append(number)
    return lines


def _columns(
    names: list[tuple[str, str]],
    rows: list[list[str]],
    numbers: list[int],
    path: str,
    faults: Faults,
) -> tuple[RawColumn, ...]:
    """Return the columns as numbers, noting the cells that are none."""
    if len(rows) > MOST_ROWS:
        faults.add(f"the table has more than {MOST_ROWS} rows.", path, "Is it the right file?")
        return ()
    cells = np.full((len(rows), len(names)), np.nan)
    told = 0
    for index, (row, line) in enumerate(zip(rows, numbers, strict=True)):
        if told >= MOST_FAULTS:
            break
        if len(row) != len(names):
            what = f"the row has {len(row)} cells where {len(names)} are wanted."
            faults.add(what, f"{path}, line {line}", "Complete the row or remove it.")
            told += 1
            continue
        for column, cell in enumerate(row):
            number = _number(cell)
            if number is None:
                name = names[column][0] or str(column + 1)
                shown = f"{cell[:40]!r} is not a finite number." if cell else "the cell is empty."
                faults.add(shown, f"{path}, line {line}, column {name}", "Write a number.")
                told += 1
            else:
                cells[index, column] = number
    return tuple(
        RawColumn(name=name, numbers=cells[:, column], unit=unit)
        for column, (name, unit) in enumerate(names)
    )


def _number(cell: str) -> float | None:
    """Return the finite number of a cell, or None."""
    if not _NUMBER.fullmatch(cell):
        return None
    number = float(cell.replace("d", "e").replace("D", "e"))
    return number if np.isfinite(number) else None
