"""The main job: precision of mass and radius against exposure, over the geometries that fit."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from functools import partial

import numpy as np

from exptime.arrays import Floats
from exptime.geometry.resampling import effective_number, median_error, weighted_quantiles
from exptime.information.precision import QUANTITIES
from exptime.instrument.records import Instrument
from exptime.interstellar.absorption import load_absorption
from exptime.observation.instrument_response import instrument_response
from exptime.parallel import workers
from exptime.progress import Progress, silent
from exptime.study.case import (
    Case,
    Geometry,
    Question,
    answer,
    correlation,
    index_at,
    resolutions_for,
)
from exptime.study.geometries import Draws, GeometrySet, InstrumentReader, geometries_of
from exptime.study.records import (
    ExpectedData,
    Forecast,
    GeometryResult,
    Goal,
    GoalResult,
    Numerics,
    QuantityCurve,
    ReachedFraction,
    Spread,
)
from exptime.study.statements import assumptions_of, warnings_of
from exptime.study.verify import PARTS, Plan, last_parts, part_of, verify_cases
from exptime.study.versions import versions
from exptime.target.records import Target

_QUANTILES = np.array([0.16, 0.50, 0.84])


def make_forecast(
    target: Target,
    instrument: Instrument,
    exposures_s: Sequence[float],
    goals: Sequence[Goal] = (),
    *,
    margin: float = 0.0,
    draws: Draws | None = None,
    jobs: int = 1,
    read_instrument: InstrumentReader,
    simulations: int | None = None,
    progress: Progress = silent,
) -> Forecast:
    """Forecast a target with an instrument.

    Parameters
    ----------
    target : Target
        What is known of the target.
    instrument : Instrument
        What it is observed with.
    exposures_s : sequence of float
        Good on-source times, s.
    goals : sequence of Goal
        Wanted precisions.
    margin : float
        Share added to required exposures in the reports' text.
    draws : Draws, optional
        How geometries are drawn; 128 with seed 1 when not given.
    jobs : int
        Number of processes; changes no number.
    read_instrument : callable
        Reads the instruments that the target's measurements name.
    simulations : int, optional
        Verify the forecast at the longest exposure, with so many simulated observations (none
        is allowed); not verified when not given.
    progress : Progress
        Told how far the work has come.

    Returns
    -------
    Forecast
        The record that every report is made from.

    Raises
    ------
    OutOfRangeError
        For a given star outside the model.
    UnreachableError
        When nothing reproduces what was measured.
    """
    how = draws or Draws()
    absorption = load_absorption(target.abundances)
    question = Question(
        target=target,
        instrument=instrument,
        response=instrument_response(instrument, absorption),
        exposures_s=np.array(sorted(set(exposures_s)), float),
        goals=tuple(goals),
    )
    with workers(jobs) as team:
        parts = 2 if simulations is None else PARTS
        searching = partial(part_of, progress, 0, parts)
        geometries = geometries_of(target, how, absorption, read_instrument, team, searching)
        computing = partial(part_of, progress, 1, parts)
        cases = team.map(partial(answer, question), geometries.geometries, computing)
        median = index_at(cases, geometries.weights, 0.5)
        change = resolution_change(question, geometries.geometries[median], cases[median])
        verification = None
        if simulations is not None:
            plan = Plan(
                exposure_s=float(question.exposures_s[-1]), simulations=simulations, draws=how
            )
            verification = verify_cases(
                question, plan, geometries, cases, team, progress=partial(last_parts, progress)
            )
    forecast = _collect(question, how, margin, geometries, cases, median, change)
    return replace(forecast, verification=verification)


def resolution_change(question: Question, geometry: Geometry, case: Case) -> float:
    """Relative change of sigma(radius) at the longest exposure when every resolution doubles."""
    doubled = [resolution.doubled() for resolution in resolutions_for(question, geometry)]
    again = answer(question, geometry, doubled)
    here, there = float(case.sigma[-1, 1]), float(again.sigma[-1, 1])
    return abs(there / here - 1.0) if here > 0.0 else 0.0


def _collect(
    question: Question,
    how: Draws,
    margin: float,
    geometries: GeometrySet,
    cases: Sequence[Case],
    median: int,
    change: float,
) -> Forecast:
    weights, target, instrument = geometries.weights, question.target, question.instrument
    curves = _curves(geometries, cases, median)
    seed = np.random.SeedSequence(how.seed).spawn(2)[1]
    sigma_radius = np.array([case.data_sigma[-1, 1] for case in cases])
    error = (
        0.0
        if geometries.is_known
        else median_error(sigma_radius, weights, np.random.default_rng(seed))
    )
    chosen = cases[median]
    source = chosen.source_per_s
    phase_bins = len(source)
    return Forecast(
        target=target,
        instruments=(instrument,),
        exposures_s=question.exposures_s,
        mass=curves[0],
        radius=curves[1],
        compactness=curves[2],
        correlation_mass_radius=_spread(
            np.array([correlation(case.covariance[-1]) for case in cases]), weights
        ),
        goals=tuple(
            _goal_result(
                goal, np.array([case.required_s[row] for case in cases]), question, weights
            )
            for row, goal in enumerate(question.goals)
        ),
        margin=margin,
        geometries=tuple(
            GeometryResult(
                star=star,
                spots=spots,
                weight=float(weight),
                data_sigma_radius_km=case.data_sigma[:, 1],
            )
            for (star, spots), weight, case in zip(
                geometries.geometries, weights, cases, strict=True
            )
        ),
        is_geometry_known=geometries.is_known,
        candidates=geometries.tried,
        effective_geometries=effective_number(weights),
        hidden_spots=sum(case.hidden_spots for case in cases),
        pulsed_fractions=_reached(geometries, target),
        median_index=median,
        expected=ExpectedData(
            phase=(np.arange(phase_bins) + 0.5) / phase_bins,
            channel_edges_kev=instrument.channel_edges_kev,
            source_per_s=source,
            background_per_s=instrument.background_per_s,
        ),
        covariance_mass_radius=chosen.covariance,
        source_per_s=float(source.mean(axis=0).sum()),
        background_per_s=float(instrument.background_per_s.sum()),
        numerics=Numerics(
            resolution_change=change,
            condition=chosen.condition,
            quantile_error=error,
            floored_share=chosen.floored_share,
        ),
        seed=how.seed,
        versions=versions(),
        assumptions=assumptions_of(target, instrument, how, geometries.is_known),
        warnings=warnings_of(target, instrument, geometries, weights, cases, how),
    )


def _curves(
    geometries: GeometrySet, cases: Sequence[Case], median: int
) -> tuple[QuantityCurve, ...]:
    star = geometries.geometries[median][0]
    values = (star.mass_msun, star.radius_km, star.compactness)
    chosen, weights = cases[median], geometries.weights
    return tuple(
        QuantityCurve(
            fiducial=values[column],
            sigma=_spread(np.array([case.sigma[:, column] for case in cases]), weights),
            data_sigma=_spread(np.array([case.data_sigma[:, column] for case in cases]), weights),
            prior_sigma=float(chosen.prior_sigma[column]),
            is_prior_limited=tuple(bool(flag) for flag in chosen.is_prior_limited[:, column]),
        )
        for column in range(len(QUANTITIES))
    )


def _spread(values: Floats, weights: Floats) -> Spread:
    p16, p50, p84 = weighted_quantiles(values, weights, _QUANTILES)
    return Spread(p16=np.asarray(p16), p50=np.asarray(p50), p84=np.asarray(p84))


def _goal_result(goal: Goal, required_s: Floats, question: Question, weights: Floats) -> GoalResult:
    reached = required_s <= question.exposures_s[:, None]
    at = np.minimum(reached @ weights, 1.0)
    return GoalResult(
        goal=goal,
        exposure_s=_spread(required_s, weights),
        required_s=required_s,
        fraction_at_exposure=at,
        fraction_reached=float(at[-1]),
    )


def _reached(geometries: GeometrySet, target: Target) -> tuple[ReachedFraction, ...]:
    return tuple(
        ReachedFraction(
            label=f"{measured.definition}, {measured.band_kev[0]:g}-{measured.band_kev[1]:g} keV",
            asked=measured.value,
            uncertainty=measured.uncertainty,
            reached=_spread(geometries.fractions[:, column], geometries.weights),
        )
        for column, measured in enumerate(target.pulsed_fractions)
    )
