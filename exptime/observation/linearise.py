"""Expected rates and their derivatives with respect to every parameter of the scene.

Analytic for distance, column, longitude and temperature; central differences on the smooth pulse
for the rest, taken only of the spot that a parameter touches. Moments of neighbouring stars stand
on the fiducial redshift interval, so that one folded spectrum serves them all.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np

from exptime.arrays import Booleans, Complexes, Floats
from exptime.constants import PARSEC_KM
from exptime.observation.fold import FoldedSpectrum, fold_spectrum
from exptime.observation.rates import observed_waves, real_product
from exptime.observation.response import Response
from exptime.observation.scene import Scene
from exptime.star.moments import Interval, spot_moments, widened
from exptime.star.pulse import longitude_factor
from exptime.star.records import HotSpot, Star
from exptime.star.resolution import Resolution
from exptime.star.view import View, view_of

_RANGE_MARGIN = 0.02
_FLOOR = 1e-6
_EDGE = 1e-6


@dataclass(frozen=True, slots=True, kw_only=True)
class Steps:
    """Half-widths of the central differences.

    Parameters
    ----------
    mass, radius, angular_radius : float
        Relative to the value.
    cos_inclination : float
        Absolute.
    colatitude : float
        rad.
    """

    mass: float = 1e-4
    radius: float = 1e-4
    cos_inclination: float = 1e-4
    colatitude: float = 1e-4
    angular_radius: float = 1e-3


@dataclass(frozen=True, slots=True, kw_only=True)
class Linearised:
    """Source rates and their derivatives.

    Parameters
    ----------
    source_per_s : ndarray, shape (phase_bins, n_channel)
        counts/s while the pulse is in each bin, none below 1e-6 of its channel's peak.
    names : tuple of str
        Parameters: mass, radius, distance, cos_inclination, column_density, then for every
        spot spotN.colatitude, .longitude, .angular_radius, .log_temperature.
    derivatives : ndarray, shape (n_parameter, phase_bins, n_channel)
        Per Msun, km, pc, 1, cm^-2, rad and e-fold; zero in floored cells.
    is_hidden : tuple of bool
        For each spot, whether it never shows.
    floored_share : float
        Share of cells that were floored.
    """

    source_per_s: Floats
    names: tuple[str, ...]
    derivatives: Floats
    is_hidden: tuple[bool, ...]
    floored_share: float


STAR_PARAMETERS = ("mass", "radius", "distance", "cos_inclination", "column_density")
SPOT_PARAMETERS = ("colatitude", "longitude", "angular_radius", "log_temperature")


def parameter_names(spot_count: int) -> tuple[str, ...]:
    """Return the names of the parameters of a scene, in their order."""
    of_spots = [
        f"spot{index + 1}.{name}" for index in range(spot_count) for name in SPOT_PARAMETERS
    ]
    return (*STAR_PARAMETERS, *of_spots)


def linearise(
    scene: Scene,
    response: Response,
    phase_bins: int,
    resolutions: Sequence[Resolution],
    steps: Steps | None = None,
) -> Linearised:
    """Compute rates and derivatives at a scene.

    Parameters
    ----------
    scene : Scene
        Where to linearise.
    response : Response
        The channels.
    phase_bins : int
        Number of phase bins.
    resolutions : sequence of Resolution
        Counts to compute each spot with, the same for all differences.
    steps : Steps, optional
        Half-widths of the differences.
    """
    widths = steps or Steps()
    pairs = _neighbouring_views(scene.star, widths)
    view = view_of(scene.star)
    names = parameter_names(len(scene.spots))
    shape = (phase_bins, response.matrix.shape[1])
    source, derivatives, hidden = np.zeros(shape), np.zeros((len(names), *shape)), []
    for index, (spot, resolution) in enumerate(zip(scene.spots, resolutions, strict=True)):
        waves = observed_waves(response, scene.star.spin_hz, resolution.harmonics, phase_bins)
        part = _spot_part(scene, view, pairs, spot, resolution, response, widths)
        first = len(STAR_PARAMETERS) + index * len(SPOT_PARAMETERS)
        rates = {name: real_product(waves, term[0]) @ term[1] for name, term in part.items()}
        source += rates.pop("rate")
        for name in SPOT_PARAMETERS:
            derivatives[first + SPOT_PARAMETERS.index(name)] = rates.pop(name)
        for name, values in rates.items():
            derivatives[names.index(name)] += values
        hidden.append(not np.any(part["rate"][0]))
    dilution = (scene.distance_pc * PARSEC_KM) ** -2
    source *= dilution
    derivatives *= dilution
    derivatives[names.index("distance")] = -2.0 / scene.distance_pc * source
    low = _is_negligible(source)
    derivatives[:, low] = 0.0
    return Linearised(
        source_per_s=np.where(low, _FLOOR * np.maximum(source.max(axis=0), 0.0), source),
        names=names,
        derivatives=derivatives,
        is_hidden=tuple(hidden),
        floored_share=float(np.mean(low)),
    )


def _is_negligible(source: Floats) -> Booleans:
    """Cells below the floor of a channel that has a source at all."""
    peak = source.max(axis=0)
    return np.asarray((source < _FLOOR * peak) & (peak > 0.0))


_Term = tuple[Complexes, Floats]


def _spot_part(
    scene: Scene,
    view: View,
    pairs: dict[str, tuple[View, View, float]],
    spot: HotSpot,
    resolution: Resolution,
    response: Response,
    steps: Steps,
) -> dict[str, _Term]:
    """Return (harmonics of moments, folded spectrum) of the rate and of each derivative."""
    start = spot_moments(view, scene.emission, spot, resolution)
    interval = widened(start.redshift_range, _RANGE_MARGIN)

    def moments(view: View, spot: HotSpot) -> Complexes:
        return spot_moments(view, scene.emission, spot, resolution, interval).values

    folded = _fold(scene, response, spot, interval, resolution)
    phase = longitude_factor(spot.longitude, resolution.harmonics)[:, None]
    here = moments(view, spot) * phase
    order = 1j * np.arange(resolution.harmonics + 1)[:, None]
    part: dict[str, _Term] = {
        "rate": (here, folded.rate),
        "column_density": (here, folded.by_column),
        "log_temperature": (here, folded.by_log_temperature),
        "longitude": (order * here, folded.rate),
    }
    for name, (lower, upper, width) in pairs.items():
        change = (moments(upper, spot) - moments(lower, spot)) * phase / width
        part[name] = (change, folded.rate)
    part["colatitude"] = (_by_colatitude(view, spot, moments, steps) * phase, folded.rate)
    part["angular_radius"] = (_by_radius(view, spot, moments, steps) * phase, folded.rate)
    return part


def _fold(
    scene: Scene, response: Response, spot: HotSpot, interval: Interval, resolution: Resolution
) -> FoldedSpectrum:
    return fold_spectrum(
        response, scene.column_cm2, spot.temperature_kev, interval, resolution.redshift_terms
    )


_MomentsOf = Callable[[View, HotSpot], Complexes]


def _by_colatitude(view: View, spot: HotSpot, moments: _MomentsOf, steps: Steps) -> Complexes:
    """Central difference; a centre carried over a pole comes down on the other side."""
    values = []
    for sign in (1.0, -1.0):
        moved = spot.colatitude + sign * steps.colatitude
        is_beyond = not 0.0 <= moved <= np.pi
        folded = np.pi - abs(np.pi - abs(moved)) if is_beyond else moved
        value = moments(view, replace(spot, colatitude=folded))
        if is_beyond:
            value = value * longitude_factor(np.pi, len(value) - 1)[:, None]
        values.append(value)
    return np.asarray((values[0] - values[1]) / (2.0 * steps.colatitude))


def _by_radius(view: View, spot: HotSpot, moments: _MomentsOf, steps: Steps) -> Complexes:
    width = steps.angular_radius * spot.angular_radius
    upper = moments(view, replace(spot, angular_radius=spot.angular_radius + width))
    lower = moments(view, replace(spot, angular_radius=spot.angular_radius - width))
    return np.asarray((upper - lower) / (2.0 * width))


def _neighbouring_views(star: Star, steps: Steps) -> dict[str, tuple[View, View, float]]:
    """Return, for each parameter of the star, the views on both sides and their distance."""
    mass, radius = steps.mass * star.mass_msun, steps.radius * star.radius_km
    # sin i has a root at cos i = 1: stay below it.
    cosine = min(star.cos_inclination, 1.0 - _EDGE)
    tip = min(steps.cos_inclination, 0.3 * (1.0 - cosine))

    def pair(lower: Star, upper: Star, width: float) -> tuple[View, View, float]:
        return view_of(lower), view_of(upper), 2.0 * width

    return {
        "mass": pair(
            replace(star, mass_msun=star.mass_msun - mass),
            replace(star, mass_msun=star.mass_msun + mass),
            mass,
        ),
        "radius": pair(
            replace(star, radius_km=star.radius_km - radius),
            replace(star, radius_km=star.radius_km + radius),
            radius,
        ),
        "cos_inclination": pair(
            replace(star, cos_inclination=cosine - tip),
            replace(star, cos_inclination=cosine + tip),
            tip,
        ),
    }
