"""Named columns of numbers, and the checks that every table of a curve needs."""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from typing import Final

import numpy as np

from exptime.arrays import Floats
from exptime.documents.faults import Faults
from exptime.errors import InputError, UnitsError
from exptime.quantities import unit_factor

MOST_FAULTS: Final = 5
"""Faults told of one column; a wrong file would tell thousands."""


@dataclass(frozen=True, slots=True)
class Wanted:
    """A column that a table should have.

    Parameters
    ----------
    name : str
        Name, found whatever its case.
    unit : str
        Unit wanted; also the one assumed where the table tells none.
    aliases : tuple of str
        Other names it may go by.
    is_required : bool
        Absence is a fault.
    """

    name: str
    unit: str
    aliases: tuple[str, ...] = ()
    is_required: bool = True


@dataclass(frozen=True, slots=True, kw_only=True)
class RawColumn:
    """A column as its file holds it.

    Parameters
    ----------
    name : str
        Name in the file; empty where it has none.
    numbers : ndarray, shape (n,)
        As written.
    unit : str
        Unit as written; empty where none is.
    """

    name: str
    numbers: Floats
    unit: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Column:
    """A column in the unit wanted.

    Parameters
    ----------
    name : str
        The name wanted.
    values : ndarray, shape (n,)
        Finite, in `unit`.
    unit : str
        The unit wanted.
    unit_source : str
        How the unit was decided, e.g. ``"energy in keV as its header says"``.
    """

    name: str
    values: Floats
    unit: str
    unit_source: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Table:
    """The wanted columns of one file.

    Parameters
    ----------
    columns : dict of str to Column
        By the name wanted; optional ones may be missing.
    header : dict of str to str
        Further keys of the header, as text.
    file : str
        Path as given.
    rows : tuple of int
        Line (text) or row number (FITS) of every row.
    row_word : str
        What those numbers count: "line" or "row".
    part : str
        The extension, for a FITS file.
    """

    columns: dict[str, Column]
    header: dict[str, str] = field(default_factory=dict)
    file: str
    rows: tuple[int, ...] = ()
    row_word: str = "line"
    part: str = ""

    def values(self, name: str) -> Floats:
        """Return the numbers of a column."""
        return self.columns[name].values

    def where(self, name: str, row: int | None = None) -> str:
        """Return the place of a column, or of one of its cells, for messages."""
        line = "" if row is None else f"{self.row_word} {self.rows[row]}"
        parts = [self.file, self.part, line, f"column {name}"]
        return ", ".join(part for part in parts if part)

    @property
    def unit_sources(self) -> str:
        """How the unit of every column was decided, in one line."""
        return "; ".join(column.unit_source for column in self.columns.values())


def choose_columns(
    raw: tuple[RawColumn, ...], wanted: tuple[Wanted, ...], place: str, faults: Faults
) -> dict[str, Column]:
    """Return the wanted columns in the wanted units.

    Columns are found by name or alias whatever the case, with or without a unit at the end of
    the name (``energy_kev``). Where no column has a name they are taken in the order wanted.

    Parameters
    ----------
    raw : tuple of RawColumn
        What the file holds.
    wanted : tuple of Wanted
        What is wanted.
    place : str
        File and extension, for messages.
    faults : Faults
        Where missing columns and wrong units are noted.
    """
    columns: dict[str, Column] = {}
    names = ", ".join(column.name for column in raw)
    is_nameless = not any(column.name for column in raw)
    for index, want in enumerate(wanted):
        if is_nameless:
            found = raw[index] if index < len(raw) else None
            suffix = ""
        else:
            found, suffix = _find(raw, want)
        if found is not None:
            column = _in_unit(found, suffix, want, place, faults)
            if column is not None:
                columns[want.name] = column
        elif want.is_required:
            remedy = f"It has: {names}." if names else f"It has {len(raw)} columns."
            faults.add(f"there is no column {want.name}.", place, remedy)
    return columns


def _find(raw: tuple[RawColumn, ...], want: Wanted) -> tuple[RawColumn | None, str]:
    """Return the column wanted and the unit that its name ends with, if any."""
    for name in (want.name, *want.aliases):
        for column in raw:
            if column.name.lower() == name.lower():
                return column, ""
    for name in (want.name, *want.aliases):
        for column in raw:
            if column.name.lower().startswith(f"{name.lower()}_"):
                suffix = column.name[len(name) + 1 :]
                if _suffix_unit(suffix) is not None:
                    return column, suffix
    return None, ""


def _suffix_unit(suffix: str) -> str | None:
    """Return the unit that the end of a column's name tells; None where it is no unit."""
    spellings = {"kev": "keV", "ev": "eV", "mev": "MeV", "hz": "Hz", "percent": "%"}
    return spellings.get(suffix.lower()) or (
        suffix if re.fullmatch(r"(cm2|cm|km|s|ms|ks|ct|counts|deg|rad)", suffix) else None
    )


def _in_unit(
    raw: RawColumn, suffix: str, want: Wanted, place: str, faults: Faults
) -> Column | None:
    """Return the column in the unit wanted, saying how its unit was decided."""
    shown = want.unit or "plain numbers"
    if raw.unit:
        given, source = raw.unit, f"{want.name} in {raw.unit} as its header says"
    elif suffix:
        given = _suffix_unit(suffix) or want.unit
        source = f"{want.name} in {given} as the column name {raw.name} says"
    else:
        given = want.unit
        source = f"{want.name} taken to be {'' if not want.unit else 'in '}{shown}: none is told"
    try:
        factor = 1.0 if given == want.unit else unit_factor(given, want.unit)
    except UnitsError as error:
        where = f"{place}, column {raw.name or want.name}"
        faults.absorb(error, where)
        return None
    return Column(name=want.name, values=raw.numbers * factor, unit=want.unit, unit_source=source)


def check_column(
    table: Table,
    name: str,
    faults: Faults,
    *,
    is_rising: bool = False,
    is_not_falling: bool = False,
    is_positive: bool = False,
    is_not_negative: bool = False,
    kind: type[InputError] = InputError,
) -> None:
    """Note every cell of a column that breaks a rule; a column that is missing passes.

    Parameters
    ----------
    table : Table
        The table.
    name : str
        The column.
    faults : Faults
        Where faults are noted, each with its row.
    is_rising, is_not_falling : bool
        Every value is above, or not below, the one before it.
    is_positive, is_not_negative : bool
        Every value is above, or not below, zero.
    kind : type of InputError
        Class of the faults.
    """
    if name not in table.columns:
        return
    values = table.values(name)
    steps = np.diff(values)
    rules = (
        (is_rising, np.flatnonzero(~(steps > 0)) + 1, "does not rise from the row before"),
        (is_not_falling, np.flatnonzero(~(steps >= 0)) + 1, "falls below the row before"),
        (is_positive, np.flatnonzero(~(values > 0)), "is not above zero"),
        (is_not_negative, np.flatnonzero(~(values >= 0)), "is negative"),
    )
    for is_asked, broken, words in rules:
        if is_asked:
            for row in broken[:MOST_FAULTS]:
                what = f"{values[row]:g} {words}{_and_more(len(broken))}."
                faults.add(what, table.where(name, int(row)), "Correct or sort the table.", kind)


def _and_more(count: int) -> str:
    """Return how many rows break the same rule, where not all are told."""
    return f" (so in {count} rows)" if count > MOST_FAULTS else ""
