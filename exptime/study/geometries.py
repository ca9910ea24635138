"""The geometries a target is forecast for: the one given, or a weighted set of drawn ones."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from exptime.arrays import Floats
from exptime.geometry.candidates import Search
from exptime.geometry.likelihood import bands_of, fractions_of
from exptime.geometry.search import find_geometries
from exptime.geometry.whole_star import refuse_too_bright
from exptime.instrument.records import Instrument
from exptime.interstellar.absorption import Absorption
from exptime.observation.bands import band_energy, band_responses
from exptime.observation.rates import source_harmonics
from exptime.observation.response import timing_factor
from exptime.observation.scene import Scene
from exptime.parallel import Workers
from exptime.progress import Progress, silent
from exptime.star.convergence import Accuracy, resolution_needed
from exptime.star.records import HotSpot, Star
from exptime.star.view import check_star, view_of
from exptime.study.case import Geometry, scene_of
from exptime.target.defaults import FIXED_MASS_MSUN, FIXED_RADIUS_KM
from exptime.target.records import Target

InstrumentReader = Callable[[str], Instrument]

_DISAGREEMENT_SIGMA = 2.0
_FLUX_UNCERTAINTY = 0.10


@dataclass(frozen=True, slots=True, kw_only=True)
class GeometrySet:
    """Geometries with their weights.

    Parameters
    ----------
    geometries : tuple of (Star, tuple of HotSpot)
        In draw order.
    weights : ndarray, shape (n,)
        Summing to one.
    fractions : ndarray, shape (n, n_fraction)
        Their pulsed fractions, by each measurement's definition.
    is_known : bool
        True when the target file gave hot spots.
    tried : int
        Points drawn in the search; zero for a known geometry.
    warnings : tuple of str
        Doubts for the report.
    """

    geometries: tuple[Geometry, ...]
    weights: Floats
    fractions: Floats
    is_known: bool
    tried: int
    warnings: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Draws:
    """How geometries are drawn.

    Parameters
    ----------
    count : int
        Number of geometries that are forecast.
    seed : int
        Seed of every random number.
    is_star_fixed : bool
        Hold mass and radius that were not given instead of drawing them.
    """

    count: int = 128
    seed: int = 1
    is_star_fixed: bool = False


def geometries_of(
    target: Target,
    draws: Draws,
    absorption: Absorption,
    read_instrument: InstrumentReader,
    team: Workers,
    progress: Progress = silent,
) -> GeometrySet:
    """Return the geometries of a target.

    Parameters
    ----------
    target : Target
        The target.
    draws : Draws
        How many, if they are drawn.
    absorption : Absorption
        The column's cross-section.
    read_instrument : callable
        Reads the instruments in whose counts fractions were measured.
    team : Workers
        Processes.
    progress : Progress
        Told how far the search has come.

    Raises
    ------
    OutOfRangeError
        For a given star outside the model.
    UnreachableError
        When nothing reproduces what was measured.
    """
    if target.hot_spots is not None:
        return known_geometries(target, absorption, read_instrument)
    if target.flux is None:
        raise ValueError("a target without hot spots needs a flux")
    search = Search(
        target=target,
        flux=band_energy(target.flux, absorption),
        pulses=band_responses(bands_of(target), absorption, read_instrument),
        is_star_fixed=draws.is_star_fixed,
    )
    refuse_too_bright(search)
    random = np.random.default_rng(np.random.SeedSequence(draws.seed).spawn(1)[0])
    found = find_geometries(search, draws.count, random, team, progress)
    return GeometrySet(
        geometries=tuple((candidate.star, candidate.spots) for candidate in found.candidates),
        weights=found.weights,
        fractions=np.array([candidate.fractions for candidate in found.candidates]),
        is_known=False,
        tried=found.tried,
    )


def known_geometry(target: Target) -> Geometry:
    """Return the star and spots that a target file gives.

    Raises
    ------
    OutOfRangeError
        For a star outside the model.
    """
    if target.hot_spots is None or target.inclination is None:
        raise ValueError("the target has no hot spots, or no inclination")
    star = Star(
        mass_msun=target.mass.value if target.mass else FIXED_MASS_MSUN,
        radius_km=target.radius.value if target.radius else FIXED_RADIUS_KM,
        spin_hz=target.spin_hz,
        cos_inclination=max(math.cos(target.inclination.value), 0.0),
        figure=target.figure,
    )
    check_star(star)
    spots = tuple(
        HotSpot(
            colatitude=spot.colatitude.value,
            longitude=spot.longitude.value,
            angular_radius=spot.angular_radius.value,
            temperature_kev=spot.temperature_kev.value,
        )
        for spot in target.hot_spots
    )
    return star, spots


def known_geometries(
    target: Target, absorption: Absorption, read_instrument: InstrumentReader
) -> GeometrySet:
    """Return the one geometry of a target with hot spots, compared with what was measured.

    Parameters
    ----------
    target, absorption, read_instrument
        As for `geometries_of`.

    Raises
    ------
    OutOfRangeError
        For a star outside the model.
    """
    star, spots = known_geometry(target)
    scene = scene_of(target, star, spots)
    fractions, warnings = np.empty(0), []
    if target.pulsed_fractions:
        fractions, doubts = _compare_fractions(target, scene, absorption, read_instrument)
        warnings += doubts
    if target.flux is not None:
        warnings += _compare_flux(target, scene, absorption)
    return GeometrySet(
        geometries=((star, spots),),
        weights=np.ones(1),
        fractions=fractions[None],
        is_known=True,
        tried=0,
        warnings=tuple(warnings),
    )


def _compare_fractions(
    target: Target, scene: Scene, absorption: Absorption, read_instrument: InstrumentReader
) -> tuple[Floats, list[str]]:
    bands = bands_of(target)
    response = band_responses(bands, absorption, read_instrument)
    view = view_of(scene.star)
    accuracy = Accuracy(
        phase_bins=32,
        lowest_kev=float(response.nodes_kev.min()),
        highest_kev=float(response.nodes_kev.max()),
        tolerance=1e-5,
    )
    resolutions = [resolution_needed(view, spot, scene.emission, accuracy) for spot in scene.spots]
    harmonics = source_harmonics(scene, view, response, resolutions)
    harmonics *= timing_factor(response, scene.star.spin_hz, len(harmonics) - 1)
    fractions = fractions_of(target, bands, harmonics)
    doubts = [
        f"The hot spots give a pulsed fraction ({measured.definition}, "
        f"{measured.band_kev[0]:g}-{measured.band_kev[1]:g} keV) of {value:.3g}; "
        f"{measured.value:.3g} was measured. The hot spots stand."
        for value, measured in zip(fractions, target.pulsed_fractions, strict=True)
        if abs(value - measured.value) > _DISAGREEMENT_SIGMA * measured.uncertainty
    ]
    return fractions, doubts


def _compare_flux(target: Target, scene: Scene, absorption: Absorption) -> list[str]:
    measured = target.flux
    if measured is None:
        return []
    response = band_energy(measured, absorption)
    view = view_of(scene.star)
    accuracy = Accuracy(
        phase_bins=8,
        lowest_kev=measured.band_kev[0],
        highest_kev=measured.band_kev[1],
        tolerance=1e-4,
    )
    resolutions = [resolution_needed(view, spot, scene.emission, accuracy) for spot in scene.spots]
    flux = float(source_harmonics(scene, view, response, resolutions)[0, 0].real)
    sigma = measured.uncertainty or _FLUX_UNCERTAINTY * measured.value
    if abs(flux - measured.value) <= _DISAGREEMENT_SIGMA * sigma:
        return []
    return [
        f"The hot spots give a flux of {flux:.3g} erg cm-2 s-1 in the flux's band; "
        f"{measured.value:.3g} was measured. The hot spots stand."
    ]
