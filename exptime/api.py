"""The public face: quantities in, results that show themselves out.

Where a quantity is wanted, an `astropy.units.Quantity` or a text with a unit will do; a bare
number is refused.
"""

from __future__ import annotations

from collections.abc import Iterable
from functools import partial
from typing import TYPE_CHECKING

import numpy as np

from exptime import given
from exptime.documents.resume import keep_refits, read_refits
from exptime.errors import Fault, InputError
from exptime.given import read_instrument as read_instrument
from exptime.given import read_target as read_target
from exptime.instrument import reader as instrument_reader
from exptime.instrument.records import Instrument
from exptime.progress import Progress, silent
from exptime.report.inputs import Checked, InstrumentList
from exptime.report.results import CountsResult, ForecastResult, PulseResult
from exptime.report.verification import VerificationResult
from exptime.study.forecast import make_forecast
from exptime.study.pulse import make_counts, make_pulse, with_phase_bins
from exptime.study.verify import Plan, fingerprint, make_verification
from exptime.target.records import Target
from exptime.target.starter import render_starter

if TYPE_CHECKING:
    from exptime.given import Many, One

DEFAULT_EXPOSURES_S = tuple(np.geomspace(1e5, 3e6, 13).tolist())
DEFAULT_GOALS = (("radius", 0.05),)


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
    chosen = None if instrument is None else given.instrument(instrument)
    known = given.target(target)
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
    energies_kev = given.energies(energies)
    return PulseResult(
        make_pulse(
            given.target(target),
            energies_kev,
            given.whole(phases, "phases", 4, given.MOST_PHASES),
            draws=given.draws(draws, seed, fixed_star),
            jobs=given.whole(jobs, "jobs", 1, 1024),
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
    chosen = given.instrument(instrument)
    if phases is not None:
        chosen = with_phase_bins(chosen, given.whole(phases, "phases", 4, given.MOST_PHASES))
    return CountsResult(
        make_counts(
            given.target(target),
            chosen,
            given.exposure(exposure),
            draws=given.draws(draws, seed, fixed_star),
            jobs=given.whole(jobs, "jobs", 1, 1024),
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
    verify: bool = False,
    simulations: int = 0,
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
    verify : bool
        Test the bound at the longest exposure, as `exptime.verify` does.
    simulations : int
        Simulated observations that such a test refits for each of its geometries.
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
    times = DEFAULT_EXPOSURES_S if exposures is None else given.exposures(exposures)
    return ForecastResult(
        make_forecast(
            given.target(target),
            given.instrument(instrument),
            times,
            given.goals(goals),
            margin=margin,
            draws=given.draws(draws, seed, fixed_star),
            jobs=given.whole(jobs, "jobs", 1, 1024),
            read_instrument=instrument_reader.read_instrument,
            simulations=given.simulations(simulations) if verify else None,
            progress=progress,
        )
    )


def verify(
    target: Target | str,
    instrument: Instrument | str,
    exposure: One,
    *,
    simulations: int = 0,
    draws: int = 128,
    seed: int = 1,
    jobs: int = 1,
    fixed_star: bool = False,
    resume: str | None = None,
    progress: Progress = silent,
) -> VerificationResult:
    """Test the bound of a forecast: profile likelihood, other solutions, and refits.

    Parameters
    ----------
    target : Target or str
        A target, or the path of its file.
    instrument : Instrument or str
        An instrument, its id, or the path of its description.
    exposure : Quantity or str
        Good on-source time.
    simulations : int
        Simulated observations to refit for each geometry; 400 give the coverage to 2 per cent.
    draws, seed, jobs, fixed_star
        As for `forecast`; the seed serves the simulations too.
    resume : str, optional
        Path of a file that keeps the refits done so far and is taken up again by the same run.
    progress : callable
        Called with the work done and the work in all.

    Raises
    ------
    InputError
        As `forecast`; and for a file to resume from that belongs to something else.
    """
    known, chosen = given.target(target), given.instrument(instrument)
    plan = Plan(
        exposure_s=given.exposure(exposure),
        simulations=given.simulations(simulations),
        draws=given.draws(draws, seed, fixed_star),
    )
    mark = fingerprint(known, chosen, plan)
    ledger = {} if resume is None else read_refits(str(resume), mark)
    return VerificationResult(
        make_verification(
            known,
            chosen,
            plan,
            jobs=given.whole(jobs, "jobs", 1, 1024),
            read_instrument=instrument_reader.read_instrument,
            ledger=ledger,
            keep=None if resume is None else partial(keep_refits, str(resume), mark),
            progress=progress,
        )
    )
