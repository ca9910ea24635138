"""The public face: quantities in, results that show themselves out.

Where a quantity is wanted, an `astropy.units.Quantity` or a text with a unit will do; a bare
number is refused.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import TYPE_CHECKING, TypeAlias

import numpy as np

from exptime.errors import Fault, InputError
from exptime.instrument import reader as instrument_reader
from exptime.instrument.records import Instrument
from exptime.progress import Progress, silent
from exptime.quantities import from_quantities, from_quantity
from exptime.report.inputs import Checked, InstrumentList
from exptime.report.results import CountsResult, ForecastResult, PulseResult
from exptime.study.forecast import make_forecast
from exptime.study.geometries import Draws
from exptime.study.pulse import make_counts, make_pulse, with_phase_bins
from exptime.study.records import QUANTITIES, Goal
from exptime.target import reader as target_reader
from exptime.target.records import Target
from exptime.target.starter import render_starter

if TYPE_CHECKING:
    from astropy.units import Quantity

    One: TypeAlias = Quantity | str
    Many: TypeAlias = Quantity | str | Sequence[Quantity | str]

DEFAULT_EXPOSURES_S = tuple(np.geomspace(1e5, 3e6, 13).tolist())
DEFAULT_GOALS = (("radius", 0.05),)
_LONGEST_S = 1e8
_MOST_PHASES = 1024


def read_target(path: str) -> Target:
    """Read a target file.

    Parameters
    ----------
    path : str
        Path; ``"-"`` for standard input.

    Raises
    ------
    InputError
        Everything wrong with it, in one go.
    """
    return target_reader.read_target(str(path))


def read_instrument(name: str) -> Instrument:
    """Read an instrument description.

    Parameters
    ----------
    name : str
        Id of a shipped instrument, otherwise a path.

    Raises
    ------
    ProfileError
        Everything wrong with it, in one go.
    """
    return instrument_reader.read_instrument(str(name))


def list_instruments() -> InstrumentList:
    """Return the instrument descriptions that ship; all are invented."""
    names = instrument_reader.shipped_instruments()
    return InstrumentList(
        instruments=tuple(instrument_reader.read_instrument(name) for name in names)
    )


def starter_target(name: str) -> str:
    """Return the text of a commented target file of an invented star, which runs as it is."""
    return render_starter(name)


def check(target: Target | str, instrument: Instrument | str | None = None) -> Checked:
    """Read everything, compute nothing, and say how it is understood.

    Parameters
    ----------
    target : Target or str
        A target, or the path of its file.
    instrument : Instrument or str, optional
        An instrument, its id, or the path of its description.

    Raises
    ------
    InputError
        Everything wrong with the files.
    """
    chosen = None if instrument is None else _instrument(instrument)
    known = _target(target)
    for measured in (*known.pulsed_fractions, *known.pulse_shapes):
        if measured.instrument is not None:
            instrument_reader.read_instrument(measured.instrument)
    return Checked(target=known, instrument=chosen)


def pulse(
    target: Target | str,
    *,
    energies: Many = "1 keV",
    phases: int = 32,
    draws: int = 128,
    seed: int = 1,
    jobs: int = 1,
    fixed_star: bool = False,
    progress: Progress = silent,
) -> PulseResult:
    """Compute photon flux at the observer against phase and energy, without the column.

    Parameters
    ----------
    target : Target or str
        A target, or the path of its file.
    energies : Quantity or str, or several
        Photon energies.
    phases : int
        Number of phase bins, 4 to 1024.
    draws, seed, jobs, fixed_star, progress
        As for `forecast`; they count where the target gives no hot spots.
    """
    energies_kev = from_quantities(energies, "keV", "energies")
    return PulseResult(
        make_pulse(
            _target(target),
            energies_kev,
            _whole(phases, "phases", 4, _MOST_PHASES),
            draws=_draws(draws, seed, fixed_star),
            jobs=_whole(jobs, "jobs", 1, 1024),
            read_instrument=instrument_reader.read_instrument,
            progress=progress,
        )
    )


def expected_counts(
    target: Target | str,
    instrument: Instrument | str,
    exposure: One,
    *,
    phases: int | None = None,
    draws: int = 128,
    seed: int = 1,
    jobs: int = 1,
    fixed_star: bool = False,
    progress: Progress = silent,
) -> CountsResult:
    """Compute expected counts of one exposure in phase bins and channels.

    Parameters
    ----------
    target : Target or str
        A target, or the path of its file.
    instrument : Instrument or str
        An instrument, its id, or the path of its description.
    exposure : Quantity or str
        Good on-source time.
    phases : int, optional
        Number of phase bins in place of the instrument's.
    draws, seed, jobs, fixed_star, progress
        As for `forecast`; they count where the target gives no hot spots.
    """
    chosen = _instrument(instrument)
    if phases is not None:
        chosen = with_phase_bins(chosen, _whole(phases, "phases", 4, _MOST_PHASES))
    return CountsResult(
        make_counts(
            _target(target),
            chosen,
            _exposures(exposure)[0],
            draws=_draws(draws, seed, fixed_star),
            jobs=_whole(jobs, "jobs", 1, 1024),
            read_instrument=instrument_reader.read_instrument,
            progress=progress,
        )
    )


def forecast(
    target: Target | str,
    instrument: Instrument | str,
    *,
    exposures: Many | None = None,
    goals: Iterable[tuple[str, float]] = DEFAULT_GOALS,
    margin: float = 0.0,
    draws: int = 128,
    seed: int = 1,
    jobs: int = 1,
    fixed_star: bool = False,
    progress: Progress = silent,
) -> ForecastResult:
    """Forecast the precision of mass and radius against exposure.

    Parameters
    ----------
    target : Target or str
        A target, or the path of its file.
    instrument : Instrument or str
        An instrument, its id, or the path of its description.
    exposures : Quantity or str, or several, optional
        Good on-source times; 13 between 100 ks and 3 Ms when not given.
    goals : iterable of (str, float)
        Quantity (mass, radius or compactness) and wanted precision; 5 per cent in radius when
        not given.
    margin : float
        Share added to required exposures in the text.
    draws : int
        Geometries that are forecast where the target gives no hot spots.
    seed : int
        Seed of the draws.
    jobs : int
        Number of processes; changes no number.
    fixed_star : bool
        Hold a mass or radius that is not given at 1.4 Msun and 12 km instead of drawing it.
    progress : callable
        Called with the work done and the work in all.

    Raises
    ------
    InputError
        For faults of the input, a star outside the model (OutOfRangeError), or measurements
        that no geometry reproduces (UnreachableError).
    """
    if not 0.0 <= margin <= 10.0:
        raise InputError(Fault(f"{margin!r} is no margin.", "margin", "Give a share, 0 to 10."))
    times = DEFAULT_EXPOSURES_S if exposures is None else _exposures(exposures)
    return ForecastResult(
        make_forecast(
            _target(target),
            _instrument(instrument),
            times,
            tuple(_goal(*goal) for goal in goals),
            margin=margin,
            draws=_draws(draws, seed, fixed_star),
            jobs=_whole(jobs, "jobs", 1, 1024),
            read_instrument=instrument_reader.read_instrument,
            progress=progress,
        )
    )


def _target(target: Target | str) -> Target:
    return target if isinstance(target, Target) else read_target(target)


def _instrument(instrument: Instrument | str) -> Instrument:
    return instrument if isinstance(instrument, Instrument) else read_instrument(instrument)


def _exposures(exposures: Many) -> tuple[float, ...]:
    times = from_quantities(exposures, "s", "exposures")
    for time in times:
        if not 1.0 <= time <= _LONGEST_S:
            raise InputError(
                Fault(f"{time:g} s is no exposure.", "exposures", "Give 1 s to 1e8 s.")
            )
    return times


def _draws(count: int, seed: int, is_star_fixed: bool) -> Draws:
    return Draws(
        count=_whole(count, "draws", 8, 100_000),
        seed=_whole(seed, "seed", 0, 2**63 - 1),
        is_star_fixed=bool(is_star_fixed),
    )


def _goal(quantity: str, precision: float) -> Goal:
    for name in QUANTITIES:
        if name == quantity:
            wanted = from_quantity(precision, "", "goals")
            if not 0.0 < wanted < 1.0:
                raise InputError(
                    Fault(f"{wanted:g} is no precision.", "goals", "Give a share below 1.")
                )
            return Goal(quantity=name, precision=wanted)
    raise InputError(
        Fault(f"{quantity!r} cannot be a goal.", "goals", f"Valid: {', '.join(QUANTITIES)}.")
    )


def _whole(value: int, name: str, minimum: int, maximum: int) -> int:
    if isinstance(value, bool) or int(value) != value or not minimum <= value <= maximum:
        raise InputError(
            Fault(f"{value!r} does not do.", name, f"Give a whole number, {minimum} to {maximum}.")
        )
    return int(value)
