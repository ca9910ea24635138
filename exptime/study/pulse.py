"""The pulse alone: photon flux at the observer, or expected counts of one exposure."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from exptime.arrays import Floats
from exptime.instrument.records import (
    BackgroundKnowledge,
    EffectiveArea,
    Instrument,
    Redistribution,
)
from exptime.interstellar.absorption import load_absorption
from exptime.observation.instrument_response import instrument_response
from exptime.observation.rates import source_rates
from exptime.parallel import one_thread
from exptime.progress import Progress, silent
from exptime.star.convergence import photon_flux
from exptime.study.case import Geometry, Question, resolutions_for, scene_of
from exptime.study.forecast import make_forecast
from exptime.study.geometries import Draws, InstrumentReader, known_geometries
from exptime.study.pulse_records import Counts, Pulse
from exptime.target.records import Target

_MEDIAN_EXPOSURE_S = 1e6
_IDEAL_BAND_KEV = (0.3, 3.0)


def make_pulse(
    target: Target,
    energies_kev: Sequence[float],
    phase_bins: int,
    *,
    draws: Draws,
    jobs: int = 1,
    read_instrument: InstrumentReader,
    progress: Progress = silent,
) -> Pulse:
    """Compute the photon flux at the observer against phase and energy, without the column.

    Parameters
    ----------
    target : Target
        The target.
    energies_kev : sequence of float
        Photon energies at the observer, keV.
    phase_bins : int
        Number of phase bins.
    draws, jobs, read_instrument, progress
        As for `make_forecast`; they count where the geometry is drawn.

    Raises
    ------
    OutOfRangeError, UnreachableError
        As `make_forecast`.
    """
    energies = np.asarray(energies_kev, float)
    band = _ideal_detector(target)
    (star, spots), notes = _geometry(target, band, draws, jobs, read_instrument, progress)
    with one_thread():
        flux = photon_flux(
            star, spots, target.emission, target.distance.value, energies, phase_bins
        )
    return Pulse(
        phase=_centers(phase_bins),
        energies_kev=energies,
        photon_flux=flux,
        target=target.name,
        notes=notes,
    )


def make_counts(
    target: Target,
    instrument: Instrument,
    exposure_s: float,
    *,
    draws: Draws,
    jobs: int = 1,
    read_instrument: InstrumentReader,
    progress: Progress = silent,
) -> Counts:
    """Compute expected counts per phase bin and channel of one exposure.

    Parameters
    ----------
    target : Target
        The target.
    instrument : Instrument
        The instrument; its phase bins count.
    exposure_s : float
        Exposure, s.
    draws, jobs, read_instrument, progress
        As for `make_forecast`; they count where the geometry is drawn.

    Raises
    ------
    OutOfRangeError, UnreachableError
        As `make_forecast`.
    """
    geometry, notes = _geometry(target, instrument, draws, jobs, read_instrument, progress)
    question = Question(
        target=target,
        instrument=instrument,
        response=instrument_response(instrument, load_absorption(target.abundances)),
        exposures_s=np.array([exposure_s]),
        goals=(),
    )
    bins = instrument.phase_bins
    scene = scene_of(target, *geometry)
    with one_thread():
        resolutions = resolutions_for(question, geometry)
        rates = source_rates(scene, question.response, bins, resolutions)
    share = exposure_s / bins
    return Counts(
        phase=_centers(bins),
        channel_edges_kev=instrument.channel_edges_kev,
        source_counts=np.maximum(rates, 0.0) * share,
        background_counts=np.tile(instrument.background_per_s * share, (bins, 1)),
        exposure_s=exposure_s,
        target=target.name,
        instrument=instrument.name,
        notes=(*notes, *instrument.warnings),
    )


def with_phase_bins(instrument: Instrument, phase_bins: int) -> Instrument:
    """Return an instrument whose data are folded into another number of phase bins."""
    return replace(instrument, phase_bins=phase_bins)


def _centers(phase_bins: int) -> Floats:
    return np.asarray((np.arange(phase_bins) + 0.5) / phase_bins)


def _geometry(
    target: Target,
    instrument: Instrument,
    draws: Draws,
    jobs: int,
    read_instrument: InstrumentReader,
    progress: Progress,
) -> tuple[Geometry, tuple[str, ...]]:
    """Return the given geometry, or the median one of a forecast, with notes."""
    if target.hot_spots is not None:
        known = known_geometries(target, load_absorption(target.abundances), read_instrument)
        return known.geometries[0], (*target.assumptions, *target.warnings, *known.warnings)
    forecast = make_forecast(
        target,
        instrument,
        (_MEDIAN_EXPOSURE_S,),
        draws=draws,
        jobs=jobs,
        read_instrument=read_instrument,
        progress=progress,
    )
    chosen = forecast.geometries[forecast.median_index]
    note = (
        f"The pulse is that of the median geometry: of {len(forecast.geometries)} drawn ones, the "
        f"one whose uncertainty of the radius, seen with {instrument.name}, is nearest the median."
    )
    doubts = [text for text in forecast.warnings if text not in instrument.warnings]
    return (chosen.star, chosen.spots), (note, *target.assumptions, *doubts)


def _ideal_detector(target: Target) -> Instrument:
    """Return a detector without losses, where none was asked for."""
    low, high = target.flux.band_kev if target.flux is not None else _IDEAL_BAND_KEV
    edges = np.linspace(low, high, 41)
    return Instrument(
        id="ideal",
        name="a perfect detector of 1000 cm2 in the flux's band",
        area=EffectiveArea(
            energies_kev=np.array([low, high]), area_cm2=np.full(2, 1000.0), source="ideal"
        ),
        redistribution=Redistribution(),
        channel_edges_kev=edges,
        background_per_s=np.zeros(len(edges) - 1),
        background_knowledge=BackgroundKnowledge(),
    )
