"""Check a Fisher bound: profiles, other humps and refits for the geometries that decide."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from functools import partial

import numpy as np

from exptime.arrays import Floats
from exptime.errors import Fault, InputError
from exptime.information.model import Bounds
from exptime.information.precision import QUANTITIES, Quantity
from exptime.instrument.records import Instrument
from exptime.interstellar.absorption import load_absorption
from exptime.observation.instrument_response import instrument_response
from exptime.parallel import Workers, workers
from exptime.progress import Progress, silent
from exptime.study.case import Case, Question, answer, index_at
from exptime.study.fingerprint import digest_of
from exptime.study.geometries import Draws, GeometrySet, InstrumentReader, geometries_of
from exptime.study.humps import climb, distinct_humps, hump_starts
from exptime.study.profile import (
    ProfilePoint,
    Setting,
    is_inside,
    joined,
    ridge_direction,
    side_of,
)
from exptime.study.setting import hard_limits, setting_of, sigma_of
from exptime.study.simulate import Keep, Ledger, simulate
from exptime.study.verdict import verdict_of
from exptime.study.verify_records import CheckedGeometry, Verification
from exptime.study.versions import versions
from exptime.target.records import Target

_PROFILED: tuple[Quantity, ...] = ("radius", "mass", "compactness")
_POINTS = {
    "the median geometry": 0.5,
    "the 16 per cent geometry": 0.16,
    "the 84 per cent geometry": 0.84,
}
PARTS = 8
"""Shares of the progress: search, forecast, and six for the verification."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Plan:
    """What a verification is to do.

    Parameters
    ----------
    exposure_s : float
        Exposure, s.
    simulations : int
        Simulated observations of each geometry; none is allowed.
    draws : Draws
        How geometries are drawn; its seed serves the simulations too.
    """

    exposure_s: float
    simulations: int = 0
    draws: Draws = field(default_factory=Draws)


def make_verification(
    target: Target,
    instrument: Instrument,
    plan: Plan,
    *,
    jobs: int = 1,
    read_instrument: InstrumentReader,
    ledger: Ledger | None = None,
    keep: Keep | None = None,
    progress: Progress = silent,
) -> Verification:
    """Verify the forecast of a target.

    Parameters
    ----------
    target : Target
        The target.
    instrument : Instrument
        The instrument.
    plan : Plan
        What to do.
    jobs : int
        Number of processes; changes no number.
    read_instrument : callable
        Reads the instruments that the target's measurements name.
    ledger : dict, optional
        Refits done before, by the same plan; added to.
    keep : callable, optional
        Called with the ledger after every block of refits.
    progress : Progress
        Told how far the work has come.

    Raises
    ------
    OutOfRangeError, UnreachableError
        As `exptime.study.forecast.make_forecast`.
    """
    absorption = load_absorption(target.abundances)
    question = Question(
        target=target,
        instrument=instrument,
        response=instrument_response(instrument, absorption),
        exposures_s=np.array([plan.exposure_s]),
        goals=(),
    )
    with workers(jobs) as team:
        searching = partial(part_of, progress, 0, PARTS)
        geometries = geometries_of(target, plan.draws, absorption, read_instrument, team, searching)
        computing = partial(part_of, progress, 1, PARTS)
        cases = team.map(partial(answer, question), geometries.geometries, computing)
        return verify_cases(
            question, plan, geometries, cases, team, ledger, keep,
            partial(last_parts, progress),
        )  # fmt: skip


def verify_cases(
    question: Question,
    plan: Plan,
    geometries: GeometrySet,
    cases: Sequence[Case],
    team: Workers,
    ledger: Ledger | None = None,
    keep: Keep | None = None,
    progress: Progress = silent,
) -> Verification:
    """Verify a forecast that is made already, at the longest of its exposures.

    Parameters
    ----------
    question, geometries, cases
        What was asked, of which geometries, and the answers.
    plan, ledger, keep, progress
        As for `make_verification`; the exposure of the plan is the last of the question.
    team : Workers
        Processes.

    Raises
    ------
    InputError
        When mass and radius are both held fixed.
    """
    target, instrument = question.target, question.instrument
    if not np.any(cases[0].prior_sigma > 0.0):
        what = "mass and radius are both held fixed: there is no precision to verify."
        raise InputError(Fault(what, target.file, "Give one of them an uncertainty above 0."))
    done: Ledger = {} if ledger is None else ledger
    chosen = _chosen(geometries, cases)
    checked = [
        _check(question, plan, label, geometries, index, cases[index], team, done, keep,
               partial(part_of, progress, number, len(chosen)))
        for number, (label, index) in enumerate(chosen)
    ]  # fmt: skip
    return Verification(
        target=target.name,
        file=target.file,
        instrument=instrument.name,
        exposure_s=plan.exposure_s,
        seed=plan.draws.seed,
        geometries=tuple(checked),
        versions=versions(),
        notes=(*target.assumptions, *instrument.assumptions, *target.warnings),
    )


def fingerprint(target: Target, instrument: Instrument, plan: Plan) -> str:
    """Return a text that differs whenever refits kept before must not be used again."""
    known = replace(target, file="", entries=())
    return digest_of(known, instrument, plan.exposure_s, plan.draws, versions())


def part_of(progress: Progress, number: int, count: int, done: int, total: int) -> None:
    """Tell the progress of one of several equal parts as that of the whole."""
    progress(number * total + done, count * total)


def last_parts(progress: Progress, done: int, total: int) -> None:
    """Tell the progress of a verification as that of the whole."""
    progress(2 * total + (PARTS - 2) * done, PARTS * total)


def _chosen(geometries: GeometrySet, cases: Sequence[Case]) -> list[tuple[str, int]]:
    """Return labels and indices of the geometries to verify."""
    if geometries.is_known:
        return [("the geometry given", 0)]
    found: dict[int, str] = {}
    for label, share in _POINTS.items():
        found.setdefault(index_at(cases, geometries.weights, share), label)
    return [(label, index) for index, label in found.items()]


def _check(
    question: Question,
    plan: Plan,
    label: str,
    geometries: GeometrySet,
    index: int,
    case: Case,
    team: Workers,
    ledger: Ledger,
    keep: Keep | None,
    progress: Progress,
) -> CheckedGeometry:
    geometry = geometries.geometries[index]
    setting, experiment, covariance = setting_of(question, geometry, plan.exposure_s)
    limits = hard_limits(setting.model.names)
    quantities = [name for name in _PROFILED if sigma_of(experiment, covariance, name) > 0.0]
    tasks = [
        (setting, limits, quantity, sign * sigma_of(experiment, covariance, quantity),
         sign * ridge_direction(experiment, covariance, quantity))
        for quantity in quantities
        for sign in (-1.0, 1.0)
    ]  # fmt: skip
    total = len(tasks) + plan.simulations
    sides = team.map(_side, tasks, lambda done, _: progress(done, total), fewest=2)
    profiles, bounded = (
        tuple(
            joined(setting, quantity, tasks[2 * row + 1][3],
                   [sides[2 * row][kind], sides[2 * row + 1][kind]])
            for row, quantity in enumerate(quantities)
        )
        for kind in (0, 1)
    )  # fmt: skip
    starts = hump_starts(setting, geometries, index)
    ends = team.map(partial(climb, setting, limits), starts, fewest=2)
    humps = distinct_humps(setting, ends)
    simulations = None
    if plan.simulations:
        simulations = simulate(
            plan.simulations, plan.draws.seed, label, setting, experiment, covariance,
            limits, team, ledger, keep,
            lambda done, _: progress(len(tasks) + done, total),
        )  # fmt: skip
    is_prior_limited = bool(case.is_prior_limited[-1, QUANTITIES.index(quantities[0])])
    word, reason = verdict_of(profiles, humps, simulations, is_prior_limited)
    return CheckedGeometry(
        label=label,
        star=geometry[0],
        spots=geometry[1],
        profiles=profiles,
        bounded_profiles=bounded,
        humps=tuple(humps),
        simulations=simulations,
        is_prior_limited=is_prior_limited,
        verdict=word,
        reason=reason,
    )


_Task = tuple[Setting, Bounds, Quantity, float, Floats]
_Side = list[ProfilePoint]


def _side(task: _Task) -> tuple[_Side, _Side]:
    """Return one side of a profile, and the same within hard limits."""
    setting, limits, quantity, bound, direction = task
    points = side_of(setting, quantity, bound, direction)
    if is_inside(setting, points, limits):
        return points, points
    return points, side_of(replace(setting, bounds=limits), quantity, bound, direction)
