"""Effective area and background read from tables."""

from __future__ import annotations

from typing import Final

import numpy as np

from exptime.arrays import Floats
from exptime.documents.columns import Table, Wanted, check_column
from exptime.documents.faults import Faults
from exptime.documents.fits_tables import is_fits, read_fits_table
from exptime.documents.nodes import Place
from exptime.documents.text_tables import read_table
from exptime.errors import InputError
from exptime.instrument.records import EffectiveArea

_LOW_NAMES: Final = ("energ_lo", "energy_lo", "e_low", "e_min", "low")
_HIGH_NAMES: Final = ("energ_hi", "energy_hi", "e_high", "e_max", "high")
_AREA_NAMES: Final = ("effective_area", "specresp")
_POINTS: Final = (
    Wanted("energy", "keV", aliases=("photon_energy", "e")),
    Wanted("area", "cm2", aliases=_AREA_NAMES),
    Wanted("third", "", is_required=False),
)
_BINS: Final = (
    Wanted("energy_low", "keV", aliases=_LOW_NAMES),
    Wanted("energy_high", "keV", aliases=_HIGH_NAMES),
    Wanted("area", "cm2", aliases=_AREA_NAMES),
)
_ARF: Final = (
    Wanted("ENERG_LO", "keV"),
    Wanted("ENERG_HI", "keV"),
    Wanted("SPECRESP", "cm2"),
)
_BACKGROUND: Final = (
    Wanted("energy", "keV", aliases=("e",)),
    Wanted("rate", "ct / (s keV)", aliases=("background", "counts")),
)


def read_area(path: str, place: Place, faults: Faults) -> tuple[EffectiveArea, list[str]] | None:
    """Read an effective-area table.

    Parameters
    ----------
    path : str
        ECSV, CSV, plain columns, or an ARF FITS file.
    place : Place
        Where the profile names it.
    faults : Faults
        Where faults are noted.

    Returns
    -------
    tuple or None
        The area and warnings; None when something is wrong.
    """
    own, found = Faults(), None
    try:
        found = _read_arf(path, own) if is_fits(path) else _read_text(path, own)
    except InputError as error:
        own.absorb(error, path)
    _pass_on(own, path, place, faults)
    return found


def read_background(
    path: str, place: Place, channel_edges_kev: Floats, faults: Faults
) -> tuple[Floats, list[str]] | None:
    """Read a background spectrum and integrate it over channels.

    Parameters
    ----------
    path : str
        Table of energy (keV) and rate (ct s^-1 keV^-1), linear between its rows.
    place : Place
        Where the profile names it.
    channel_edges_kev : ndarray, shape (n_channel + 1,)
        keV.
    faults : Faults
        Where faults are noted.

    Returns
    -------
    tuple or None
        Counts per second in each channel, and warnings; None when something is wrong.
    """
    own, table = Faults(), None
    try:
        table = _background_table(path, own)
    except InputError as error:
        own.absorb(error, path)
    if table is not None:
        check_column(table, "energy", own, is_rising=True, is_positive=True)
        check_column(table, "rate", own, is_not_negative=True)
        _refuse_single_row(table, path, own)
    is_sound = len(own) == 0
    _pass_on(own, path, place, faults)
    if table is None or not is_sound:
        return None
    energies, rate = table.values("energy"), table.values("rate")
    warnings = _outside(energies, channel_edges_kev, "background", "counted as zero")
    return integrate_linear(energies, rate, channel_edges_kev), warnings


def _background_table(path: str, faults: Faults) -> Table | None:
    if is_fits(path):
        faults.add(
            "PHA files are not supported yet.",
            path,
            "Give a table of energy (keV) and rate (ct s-1 keV-1), or {rate:, photon_index:}.",
        )
        return None
    return read_table(path, _BACKGROUND, faults)


def integrate_linear(energies: Floats, values: Floats, edges: Floats) -> Floats:
    """Integrals over intervals of a function linear between knots, zero outside them.

    Parameters
    ----------
    energies, values : ndarray, shape (n,)
        Knots, increasing, and values there.
    edges : ndarray, shape (m + 1,)
        Ends of the intervals.
    """
    steps = 0.5 * (values[1:] + values[:-1]) * np.diff(energies)
    total = np.concatenate([[0.0], np.cumsum(steps)])
    inside = np.clip(edges, energies[0], energies[-1])
    upper = np.clip(np.searchsorted(energies, inside), 1, len(energies) - 1)
    start, end = energies[upper - 1], energies[upper]
    part = (inside - start) / (end - start)
    mean = values[upper - 1] + 0.5 * part * (values[upper] - values[upper - 1])
    return np.asarray(np.diff(total[upper - 1] + mean * (inside - start)))


def area_warnings(area: EffectiveArea, channel_edges_kev: Floats) -> list[str]:
    """Say where the channels reach beyond the table of the area."""
    return _outside(area.energies_kev, channel_edges_kev, "effective area", "taken as zero")


def _read_text(path: str, faults: Faults) -> tuple[EffectiveArea, list[str]] | None:
    points, bins = Faults(), Faults()
    table = read_table(path, _POINTS, points)
    if table is not None and "third" in table.columns:
        faults.add(
            "three columns without names can be read in more than one way.",
            path,
            "Name them in a first row: energy_low, energy_high, area.",
        )
        return None
    if table is not None:
        return _of_points(table, path, faults)
    table = read_table(path, _BINS, bins)
    if table is not None:
        return _of_bins(table, ("energy_low", "energy_high", "area"), path, faults)
    # The form that the table comes nearest to has fewer faults.
    for fault in (bins if len(bins) < len(points) else points).found:
        faults.add(fault.what, fault.where, fault.remedy)
    return None


def _of_points(table: Table, path: str, faults: Faults) -> tuple[EffectiveArea, list[str]] | None:
    before = len(faults)
    check_column(table, "energy", faults, is_rising=True, is_positive=True)
    check_column(table, "area", faults, is_not_negative=True)
    _refuse_single_row(table, path, faults)
    if len(faults) > before:
        return None
    source = f"points, linear between them; {table.unit_sources}"
    return (
        EffectiveArea(
            energies_kev=table.values("energy"), area_cm2=table.values("area"), source=source
        ),
        [],
    )


def _read_arf(path: str, faults: Faults) -> tuple[EffectiveArea, list[str]] | None:
    table = read_fits_table(
        path, extensions=("SPECRESP",), classes=("SPECRESP",), wanted=_ARF, faults=faults
    )
    if table is None:
        return None
    return _of_bins(table, ("ENERG_LO", "ENERG_HI", "SPECRESP"), path, faults)


def _of_bins(
    table: Table, names: tuple[str, str, str], path: str, faults: Faults
) -> tuple[EffectiveArea, list[str]] | None:
    low, high, area = (table.values(name) for name in names)
    before, warnings = len(faults), []
    if len(low) and low[0] == 0.0:
        low = np.concatenate([[1e-3 * high[0]], low[1:]])
        warnings.append(
            f"The first bin of {path} begins at zero energy; it is taken to begin at "
            f"{low[0]:.3g} keV."
        )
    check_column(table, names[2], faults, is_not_negative=True)
    for row in np.flatnonzero(~(high > low) | (low <= 0.0))[:5]:
        faults.add(
            f"the bin from {low[row]:g} to {high[row]:g} keV has no width above zero energy.",
            table.where(names[1], int(row)),
            "Correct the bounds.",
        )
    gap = np.abs(low[1:] - high[:-1]) > 1e-3 * np.abs(high[1:] - low[1:])
    for row in np.flatnonzero(gap)[:5]:
        faults.add(
            f"the bin begins at {low[row + 1]:g} keV, the one before ends at {high[row]:g} keV.",
            table.where(names[0], int(row) + 1),
            "Bins have to follow each other without gap or overlap.",
        )
    if len(faults) > before:
        return None
    joints = 0.5 * (low[1:] + high[:-1])
    edges = np.concatenate([low[:1], joints, high[-1:]])
    record = EffectiveArea(
        energies_kev=np.repeat(edges, 2)[1:-1],
        area_cm2=np.repeat(area, 2),
        source=f"bins, one area in each; {table.unit_sources}",
    )
    return record, warnings


def _refuse_single_row(table: Table, path: str, faults: Faults) -> None:
    if len(table.rows) < 2:
        faults.add("the table has a single row.", path, "Give at least two energies.")


def _outside(energies: Floats, edges: Floats, name: str, fate: str) -> list[str]:
    low, high = float(energies[0]), float(energies[-1])
    if low <= edges[0] * (1.0 + 1e-9) and high >= edges[-1] * (1.0 - 1e-9):
        return []
    return [
        f"The table of the {name} covers {low:.4g} to {high:.4g} keV, the channels "
        f"{edges[0]:.4g} to {edges[-1]:.4g} keV: outside the table it is {fate}."
    ]


def _pass_on(own: Faults, path: str, place: Place, faults: Faults) -> None:
    """Hand on faults; one of the whole file is best mended where the file is named."""
    for fault in own.found:
        where = f"{place} ({path})" if fault.where == path else fault.where
        faults.add(fault.what, where, fault.remedy)
