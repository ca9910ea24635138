"""Invented stars, spots and responses that the tests of several floors share."""

from __future__ import annotations

import math

import numpy as np

from exptime.arrays import Floats
from exptime.information.matrix import background_levels, information_per_second
from exptime.information.parameters import parameters_of
from exptime.information.precision import Experiment
from exptime.instrument.records import BackgroundKnowledge
from exptime.observation.linearise import Linearised
from exptime.observation.response import Response
from exptime.observation.scene import Scene
from exptime.star.convergence import Accuracy, resolution_needed
from exptime.star.records import Emission, HotSpot, Star
from exptime.star.resolution import Resolution
from exptime.star.view import star_fault, view_of
from exptime.study.case import MOST_HARMONICS, TOLERANCE
from exptime.target.records import Measured, Target


def star_of(spin_hz: float = 200.0, inclination_deg: float = 60.0, **changes: float | str) -> Star:
    """Return a star of 1.4 solar masses and 12 km."""
    values: dict[str, float | str] = {
        "mass_msun": 1.4,
        "radius_km": 12.0,
        "spin_hz": spin_hz,
        "cos_inclination": math.cos(math.radians(inclination_deg)),
    }
    return Star(**(values | changes))  # type: ignore[arg-type]


def random_star(rng: np.random.Generator, slowest: float = 1.0, fastest: float = 700.0) -> Star:
    """Return a star that the model accepts; spin log-uniform, or uniform above 300 Hz."""
    while True:
        if rng.uniform() < 0.5:
            spin = math.exp(rng.uniform(math.log(slowest), math.log(fastest)))
        else:
            spin = rng.uniform(min(300.0, 0.5 * (slowest + fastest)), fastest)
        star = Star(
            mass_msun=rng.uniform(1.2, 2.0),
            radius_km=rng.uniform(10.5, 13.5),
            spin_hz=spin,
            cos_inclination=rng.uniform(0.02, 0.98),
            figure="oblate" if rng.uniform() < 0.75 else "sphere",
        )
        if star_fault(star) is None:
            return star


def random_spot(
    rng: np.random.Generator, smallest: float = 0.01, largest: float = 1.2, kev: float = 0.12
) -> HotSpot:
    """Return a spot with its centre anywhere on the sphere; radius log-uniform."""
    return HotSpot(
        colatitude=math.acos(rng.uniform(-1.0, 1.0)),
        longitude=rng.uniform(0.0, 2.0 * math.pi),
        angular_radius=math.exp(rng.uniform(math.log(smallest), math.log(largest))),
        temperature_kev=kev * rng.uniform(0.7, 1.4),
    )


def two_spot_scene(star: Star | None = None, spots: tuple[HotSpot, ...] = ()) -> Scene:
    """Return an ordinary scene: two spots of moderate size on one star."""
    ordinary = (
        HotSpot(colatitude=1.2, longitude=0.2, angular_radius=0.12, temperature_kev=0.12),
        HotSpot(colatitude=2.2, longitude=3.0, angular_radius=0.2, temperature_kev=0.11),
    )
    return Scene(
        star=star or star_of(),
        spots=spots or ordinary,
        emission=Emission(),
        distance_pc=300.0,
        column_cm2=1e20,
    )


def toy_edges(width_kev: float = 0.05, low: float = 0.3, high: float = 3.0) -> Floats:
    """Return channel edges, keV."""
    return np.linspace(low, high, round((high - low) / width_kev) + 1)


def toy_response(edges: Floats | None = None, nodes: int = 6, area_cm2: float = 1500.0) -> Response:
    """Return an invented soft instrument with perfect redistribution."""
    bounds = toy_edges() if edges is None else edges
    x, weight = np.polynomial.legendre.leggauss(nodes)
    half, count = 0.5 * np.diff(bounds), len(bounds) - 1
    energies = (bounds[:-1, None] + half[:, None] * (x + 1.0)).ravel()
    area = area_cm2 * np.exp(-((np.log(energies / 1.2) / 0.8) ** 2))
    matrix = np.zeros((len(energies), count))
    channel = np.repeat(np.arange(count), nodes)
    matrix[np.arange(len(energies)), channel] = (half[:, None] * weight).ravel() * area
    return Response(nodes_kev=energies, matrix=matrix, cross_section_cm2=1e-22 * energies**-3.0)


def flat_response(low: float, high: float, channels: int, nodes: int, area_cm2: float) -> Response:
    """Return an instrument of constant area, perfect redistribution and log-spaced channels."""
    edges = np.geomspace(low, high, channels + 1)
    toy = toy_response(edges, nodes)
    area = 1500.0 * np.exp(-((np.log(toy.nodes_kev / 1.2) / 0.8) ** 2))
    return Response(
        nodes_kev=toy.nodes_kev,
        matrix=toy.matrix / area[:, None] * area_cm2,
        cross_section_cm2=toy.cross_section_cm2,
    )


def resolutions_of(
    scene: Scene, phase_bins: int = 32, tolerance: float = TOLERANCE, highest_kev: float = 3.0
) -> list[Resolution]:
    """Choose the resolution of every spot of a scene, by default that of a forecast."""
    accuracy = Accuracy(
        phase_bins=phase_bins,
        lowest_kev=0.3,
        highest_kev=highest_kev,
        tolerance=tolerance,
        most_harmonics=MOST_HARMONICS,
    )
    view = view_of(scene.star)
    return [resolution_needed(view, spot, scene.emission, accuracy) for spot in scene.spots]


def toy_target(distance_sigma: float | None = 30.0) -> Target:
    """Return a target of which only the distance is known."""
    return Target(
        name="Invented",
        file="invented.yaml",
        spin_hz=200.0,
        column_density=Measured(value=1e20),
        distance=Measured(value=300.0, uncertainty=distance_sigma),
    )


def experiment_of(
    scene: Scene,
    linear: Linearised,
    edges: Floats | None = None,
    background_per_s: float = 0.01,
    knowledge: BackgroundKnowledge | None = None,
) -> Experiment:
    """Return the experiment of a linearised scene under a flat background."""
    bounds = toy_edges() if edges is None else edges
    count = len(bounds) - 1
    background = np.full(count, background_per_s / count)
    derivatives = np.concatenate([linear.derivatives, linear.source_per_s[None]])
    return Experiment(
        information=information_per_second(
            linear.source_per_s,
            derivatives,
            background,
            background_levels(knowledge or BackgroundKnowledge(kind="known"), background, bounds),
        ),
        parameters=parameters_of(toy_target(), 0.03, len(scene.spots), scene.star.cos_inclination),
        mass_msun=scene.star.mass_msun,
        radius_km=scene.star.radius_km,
    )
