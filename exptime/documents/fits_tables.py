"""Binary tables of FITS files, in native byte order, with faults in place of tracebacks."""

from __future__ import annotations

import io
import warnings
from typing import TYPE_CHECKING, Final

import numpy as np

from exptime.documents.columns import RawColumn, Table, Wanted, choose_columns
from exptime.documents.faults import Faults
from exptime.documents.files import LARGEST_FITS, first_bytes, read_bytes, unzip
from exptime.errors import InputError

if TYPE_CHECKING:
    from astropy.io.fits import BinTableHDU

_MAGIC: Final = b"SIMPLE  ="
_GZIP: Final = b"\x1f\x8b"


def is_fits(path: str) -> bool:
    """Say whether a file begins as FITS does (packed by gzip or not).

    Raises
    ------
    InputError
        When the file cannot be read.
    """
    name = path.lower()
    if name.endswith((".fits", ".fit", ".fits.gz", ".arf", ".rmf", ".pha", ".arf.gz")):
        return True
    begin = first_bytes(path, len(_MAGIC))
    return begin == _MAGIC or begin.startswith(_GZIP)


def read_fits_table(
    path: str,
    *,
    extensions: tuple[str, ...],
    classes: tuple[str, ...] = (),
    wanted: tuple[Wanted, ...],
    faults: Faults,
) -> Table | None:
    """Return the wanted columns of one binary table of a FITS file.

    Parameters
    ----------
    path : str
        Path of the file, packed by gzip or not.
    extensions : tuple of str
        Values of EXTNAME that the table may have.
    classes : tuple of str
        Values of any HDUCLASn keyword by which it is found where EXTNAME does not tell.
    wanted : tuple of Wanted
        The columns.
    faults : Faults
        Where faults are noted, each with file, extension and column.

    Returns
    -------
    Table or None
        Its header has every keyword in upper case as text. None when something is wrong.
    """
    try:
        content = unzip(read_bytes(path, LARGEST_FITS), path, LARGEST_FITS)
    except InputError as error:
        faults.absorb(error)
        return None
    if not content.startswith(_MAGIC):
        faults.add("this is not a FITS file.", path, "It should begin with SIMPLE  =.")
        return None
    before = len(faults)
    with warnings.catch_warnings(record=True) as caught:
        warnings.simplefilter("always")
        try:
            table = _read(content, path, extensions, classes, wanted, faults)
        except Exception as error:  # noqa: BLE001 - a damaged file can raise anything at all
            reason = (str(error).strip().split("\n") or [""])[0][:150]
            faults.add(f"the FITS file is damaged ({reason}).", path, "Copy or make it anew.")
            return None
    if any("truncated" in str(warning.message) for warning in caught):
        faults.add("the FITS file is cut short.", path, "Copy or make it anew.")
    return table if len(faults) == before else None


def _read(
    content: bytes,
    path: str,
    extensions: tuple[str, ...],
    classes: tuple[str, ...],
    wanted: tuple[Wanted, ...],
    faults: Faults,
) -> Table | None:
    """Return the table; may raise anything on a damaged file."""
    from astropy.io import fits

    with fits.open(io.BytesIO(content), memmap=False) as hdus:
        tables = [hdu for hdu in hdus if isinstance(hdu, fits.BinTableHDU)]
        names = [str(hdu.name) or "(unnamed)" for hdu in tables]
        hdu = _choose(tables, extensions, classes)
        if hdu is None:
            held = f"It has: {', '.join(names)}." if names else "It has no binary table at all."
            what = f"there is no extension {' or '.join(extensions)}."
            faults.add(what, path, held)
            return None
        part = f"extension {hdu.name or '(unnamed)'}"
        place = f"{path}, {part}"
        raw = _raw_columns(hdu, wanted, place, faults)
        header = {str(key).upper(): str(value) for key, value in hdu.header.items() if key}
        rows = tuple(range(1, len(hdu.data) + 1))
    if not rows:
        faults.add("the table has no rows.", place, "Is it the right extension?")
        return None
    columns = choose_columns(raw, wanted, place, faults)
    table = Table(columns=columns, header=header, file=path, rows=rows, row_word="row", part=part)
    for column in columns.values():
        broken = np.flatnonzero(~np.isfinite(column.values))
        if broken.size:
            where = table.where(column.name, int(broken[0]))
            faults.add(f"{broken.size} values are not finite.", where, "Make the file anew.")
    return table


def _choose(
    tables: list[BinTableHDU], extensions: tuple[str, ...], classes: tuple[str, ...]
) -> BinTableHDU | None:
    """Return the table by its name, else by its class keywords."""
    for name in extensions:
        for hdu in tables:
            if str(hdu.name).upper() == name.upper():
                return hdu
    for hdu in tables:
        told = {str(hdu.header.get(f"HDUCLAS{n}", "")).upper().strip() for n in range(1, 5)}
        if told & {name.upper() for name in classes}:
            return hdu
    return None


def _raw_columns(
    hdu: BinTableHDU, wanted: tuple[Wanted, ...], place: str, faults: Faults
) -> tuple[RawColumn, ...]:
    """Return the columns that hold one number per row; wanted ones of another form are noted."""
    asked = tuple(name.lower() for want in wanted for name in (want.name, *want.aliases))
    found = []
    for column in hdu.columns:
        if not column.name.lower().startswith(asked):
            # Only its name is of use, for the message about a missing one.
            found.append(RawColumn(name=column.name, numbers=np.zeros(0)))
            continue
        values = np.asarray(hdu.data[column.name])
        if values.ndim != 1 or values.dtype.kind not in "iuf":
            where = f"{place}, column {column.name}"
            faults.add("the column does not hold one number per row.", where)
            values = np.zeros(len(values))
        numbers = values.astype(np.float64)  # native byte order
        found.append(RawColumn(name=column.name, numbers=numbers, unit=str(column.unit or "")))
    return tuple(found)
