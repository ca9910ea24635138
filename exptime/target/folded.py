"""Archival folded profiles that a target file names."""

from __future__ import annotations

import re
from typing import Final

import numpy as np

from exptime.documents.columns import Table, Wanted, check_column
from exptime.documents.faults import Faults
from exptime.documents.files import beside
from exptime.documents.text_tables import read_table
from exptime.documents.values import Values
from exptime.target.records import FoldedShape

_WANTED: Final = (
    Wanted("phase", ""),
    Wanted("counts", "ct", aliases=("count",)),
    Wanted("error", "ct", aliases=("counts_error", "uncertainty"), is_required=False),
)
_BACKGROUND_KEYS: Final = ("background", "background_per_bin", "background_counts")
FEWEST_BINS: Final = 4
MOST_BINS: Final = 4096
PHASE_TOLERANCE: Final = 0.01
"""Of a bin: what the digits of a printed phase may be off by."""


def read_folded(entry: Values, document: str, faults: Faults) -> FoldedShape | None:
    """Return the folded profile that an entry of pulse_shape names.

    Parameters
    ----------
    entry : Values
        The entry, with its file.
    document : str
        Path of the target file.
    faults : Faults
        Where faults are noted.

    Returns
    -------
    FoldedShape or None
        None when something is wrong.
    """
    name, band = entry.text("file"), entry.range("band")
    if name is None:
        return None
    before = len(faults)
    path = beside(document, name)
    own = Faults()
    table = read_table(path, _WANTED, own)
    for fault in own.found:
        # A fault of the whole file is best mended where the file is named.
        where = f"{entry.place_of('file')} ({path})" if fault.where == path else fault.where
        faults.add(fault.what, where, fault.remedy)
    if table is None:
        return None
    _check_phase(table, faults)
    check_column(table, "counts", faults, is_not_negative=True)
    check_column(table, "error", faults, is_positive=True)
    background = _background(entry, table, faults)
    counts = table.values("counts")
    if len(faults) == before and background is not None and not counts.mean() > background:
        what = f"the background of {background:g} per bin is not below the mean of the counts."
        faults.add(what, table.where("counts"), "Give the background counts of one phase bin.")
    if len(faults) > before or band is None or background is None:
        return None
    if "error" in table.columns:
        error = table.values("error")
    else:
        error = np.sqrt(np.maximum(counts, 1.0))
    return FoldedShape(
        band_kev=band,
        phase=table.values("phase"),
        counts=counts,
        error=error,
        background_per_bin=background,
        file=path,
        instrument=entry.text("instrument"),
    )


def _check_phase(table: Table, faults: Faults) -> None:
    """Note phases that are not one turn of even bins."""
    phase = table.values("phase")
    bins = len(phase)
    where = table.where("phase")
    if not FEWEST_BINS <= bins <= MOST_BINS:
        what = f"the profile has {bins} bins."
        faults.add(what, where, f"Give {FEWEST_BINS} to {MOST_BINS} bins over one turn.")
        return
    if phase.min() < 0.0 or phase.max() > 1.0:
        faults.add("a phase lies outside 0 to 1.", where, "Give one turn, in parts of a turn.")
    elif np.any(np.abs(np.diff(phase) * bins - 1.0) > PHASE_TOLERANCE):
        what = f"the phases are not {bins} even steps over one turn."
        faults.add(what, where, f"Give the centres of even bins, {1.0 / bins:g} apart.")


def _background(entry: Values, table: Table, faults: Faults) -> float | None:
    """Return the background per bin from the entry, else from the header of the file."""
    if entry.is_given("background"):
        return entry.number("background")
    for key in _BACKGROUND_KEYS:
        text = table.header.get(key)
        if text is None:
            continue
        match = re.fullmatch(r"([0-9.]+(?:[eE][+-]?\d+)?)\s*(?:ct|cts|counts)?", text.strip())
        try:
            number = float(match[1]) if match else np.nan
        except ValueError:
            number = np.nan
        if not np.isfinite(number):
            what = f"the background in the header, {text[:40]!r}, is no count."
            faults.add(what, table.file, "Write for example background: 35")
            return None
        return number
    what = "the background counts per bin are missing."
    remedy = "Add background: 35 here or to the header of the file; 0 if it has none."
    faults.add(what, entry.place_of("background"), remedy)
    return None
