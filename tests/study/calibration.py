"""Simulated targets whose geometry is known, sent through the draws of geometries.

Each truth is drawn from the priors of the draws themselves: centres uniform over the sphere, radii
in a ratio log-uniform from 1/3 to 3, cos(inclination) uniform, mass and radius uniform, sizes
by the true flux. What was measured of it carries its noise: the flux 5 per cent, the pulsed
fraction 0.04, and, for one target in three, the second harmonic 0.03. Targets whose measured
fraction or harmonic a file would not hold are drawn again: a choice by what was measured takes
nothing from the calibration.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np

from exptime.errors import UnreachableError
from exptime.geometry.candidates import Candidate, Search, evaluate
from exptime.geometry.light_curve import harmonic_fraction
from exptime.geometry.likelihood import bands_of
from exptime.instrument.reader import read_instrument
from exptime.instrument.records import Instrument
from exptime.interstellar.absorption import load_absorption
from exptime.observation.bands import band_energy, band_responses
from exptime.observation.instrument_response import instrument_response
from exptime.observation.rates import source_harmonics
from exptime.star.ray_table import load_ray_table
from exptime.star.resolution import Resolution
from exptime.star.view import View
from exptime.study.case import Question, answer, scene_of
from exptime.study.forecast import make_forecast
from exptime.study.geometries import Draws
from exptime.target.reader import read_target_text
from exptime.target.records import Target
from tests.makers.scenes import toy_edges

EXPOSURE_S = 1e6
FLUX_NOISE = 0.05
FRACTION_NOISE = 0.04
HARMONIC_NOISE = 0.03
_RESOLUTION = Resolution(harmonics=24, rings=8, redshift_terms=8)

TARGET = """
name: Simulated
spin_frequency: {spin:.1f} Hz
flux: {{value: {flux:.6e} erg s-1 cm-2, band: 0.5-2.0 keV, absorbed: true}}
pulsed_fraction: {{value: {fraction:.6f}, uncertainty: {noise}, definition: rms, band: 0.5-2.0 keV}}
column_density: 2e20 cm-2
temperature: {{value: 0.14 keV, frame: surface}}
distance: {{value: 300 pc, uncertainty: 15 pc}}
"""
SHAPE = """
pulse_shape:
  - band: 0.5-2.0 keV
    harmonics: [{{number: 2, fraction: {harmonic:.6f}, uncertainty: {noise}}}]
"""


@dataclass(frozen=True, slots=True, kw_only=True)
class Outcome:
    """How one simulated target came out.

    Parameters
    ----------
    truth_km, low_km, middle_km, high_km : float
        Data sigma of the radius at the true geometry, and quoted points at 16, 50, 84 per cent.
    effective : float
        Effective geometries.
    is_reached : bool
        False where the search gave up.
    """

    truth_km: float
    low_km: float
    middle_km: float
    high_km: float
    effective: float
    is_reached: bool = True

    @property
    def is_covered(self) -> bool:
        """Whether the truth lies between the points at 16 and 84 per cent."""
        return self.is_reached and self.low_km <= self.truth_km <= self.high_km


def coarse_instrument() -> Instrument:
    """Return the shipped concentrator with nine wide channels and sixteen phase bins."""
    fine = read_instrument("soft-concentrator")
    edges = toy_edges(0.3)
    middle = 0.5 * (fine.channel_edges_kev[1:] + fine.channel_edges_kev[:-1])
    background, _ = np.histogram(middle, edges, weights=fine.background_per_s)
    return replace(fine, channel_edges_kev=edges, background_per_s=background, phase_bins=16)


def search_of(target: Target) -> Search:
    """Return what the draws of a target look for."""
    absorption = load_absorption(target.abundances)
    assert target.flux is not None
    return Search(
        target=target,
        flux=band_energy(target.flux, absorption),
        pulses=band_responses(bands_of(target), absorption, read_instrument),
        is_star_fixed=False,
    )


def target_of(spin: float, flux: float, fraction: float, harmonic: float | None = None) -> Target:
    """Return the target of what was measured."""
    text = TARGET.format(spin=spin, flux=flux, fraction=fraction, noise=FRACTION_NOISE)
    if harmonic is not None:
        text += SHAPE.format(harmonic=harmonic, noise=HARMONIC_NOISE)
    return read_target_text(text, "simulated.yaml")


def simulate(number: int, with_shape: bool) -> tuple[Candidate, Target]:
    """Draw a true geometry and what was measured of it."""
    random = np.random.default_rng((2026, number))
    while True:
        spin = random.uniform(150.0, 500.0)
        flux = 10.0 ** random.uniform(-12.3, -11.3)
        search = search_of(target_of(spin, flux, 0.5))
        truth = evaluate(search, random.random(len(search.axes)))
        if truth is None:
            continue
        scene = scene_of(search.target, truth.star, truth.spots)
        view = View(truth.star, load_ray_table(), np.empty(0))
        curve = source_harmonics(scene, view, search.pulses, (_RESOLUTION, _RESOLUTION))[:, 0]
        fraction = truth.fractions[0] + FRACTION_NOISE * random.standard_normal()
        harmonic = harmonic_fraction(curve, 2) + HARMONIC_NOISE * random.standard_normal()
        measured = flux * (1.0 + FLUX_NOISE * random.standard_normal())
        if fraction > 0.06 and (not with_shape or harmonic > 0.005):
            return truth, target_of(spin, measured, fraction, harmonic if with_shape else None)


def outcome_of(draws: int, number: int) -> Outcome:
    """Simulate one target and forecast it."""
    truth, target = simulate(number, with_shape=number % 3 == 2)
    instrument = coarse_instrument()
    question = Question(
        target=target,
        instrument=instrument,
        response=instrument_response(instrument, load_absorption(target.abundances)),
        exposures_s=np.array([EXPOSURE_S]),
        goals=(),
    )
    here = float(answer(question, (truth.star, truth.spots)).data_sigma[0, 1])
    try:
        found = make_forecast(
            target,
            instrument,
            [EXPOSURE_S],
            draws=Draws(count=draws, seed=number + 1),
            read_instrument=read_instrument,
        )
    except UnreachableError:
        nowhere = math.nan
        return Outcome(
            truth_km=here, low_km=nowhere, middle_km=nowhere, high_km=nowhere, effective=0.0,
            is_reached=False,
        )  # fmt: skip
    spread = found.radius.data_sigma
    return Outcome(
        truth_km=here,
        low_km=float(spread.p16[0]),
        middle_km=float(spread.p50[0]),
        high_km=float(spread.p84[0]),
        effective=found.effective_geometries,
    )
