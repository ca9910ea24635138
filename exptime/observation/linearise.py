"""Expected rates and their derivatives with respect to every parameter of the scene.

Analytic for distance, column, longitude and temperature; central differences on the smooth pulse
for the rest, taken only of the spot that a parameter touches. Moments of neighbouring stars stand
on the fiducial redshift interval, so that one folded spectrum serves them all.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from exptime.arrays import Complexes, Floats
from exptime.constants import PARSEC_KM
from exptime.observation.fold import fold_spectrum
from exptime.observation.rates import observed_waves, real_product
from exptime.observation.response import Response
from exptime.observation.scene import Scene
from exptime.star.moments import Interval, joint_moments, spot_moments, widened
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
    names = parameter_names(len(scene.spots))
    shape = (phase_bins, response.matrix.shape[1])
    source, derivatives, hidden = np.zeros(shape), np.zeros((len(names), *shape)), []
    intervals = _redshift_intervals(scene, resolutions)
    changes = _moments_and_changes(scene, resolutions, intervals, widths)
    for index, (spot, resolution) in enumerate(zip(scene.spots, resolutions, strict=True)):
        waves = observed_waves(response, scene.star.spin_hz, resolution.harmonics, phase_bins)
        terms = _terms(scene, response, spot, resolution, intervals[index], changes[index])
        rates = {name: real_product(waves, term[0]) @ term[1] for name, term in terms.items()}
        source += rates.pop("rate")
        first = len(STAR_PARAMETERS) + index * len(SPOT_PARAMETERS)
        for name in SPOT_PARAMETERS:
            derivatives[first + SPOT_PARAMETERS.index(name)] = rates.pop(name)
        for name, values in rates.items():
            derivatives[names.index(name)] += values
        hidden.append(not np.any(changes[index]["rate"]))
    dilution = (scene.distance_pc * PARSEC_KM) ** -2
    source *= dilution
    derivatives *= dilution
    derivatives[names.index("distance")] = -2.0 / scene.distance_pc * source
    peak = source.max(axis=0)
    low = (source < _FLOOR * peak) & (peak > 0.0)
    derivatives[:, low] = 0.0
    return Linearised(
        source_per_s=np.where(low, _FLOOR * np.maximum(peak, 0.0), source),
        names=names,
        derivatives=derivatives,
        is_hidden=tuple(hidden),
        floored_share=float(np.mean(low)),
    )


def _redshift_intervals(scene: Scene, resolutions: Sequence[Resolution]) -> list[Interval]:
    """Return an interval of the redshift factor for each spot; one for all that share counts."""
    view = view_of(scene.star)
    rough = [
        spot_moments(view, scene.emission, spot, replace(resolution, harmonics=0, redshift_terms=1))
        for spot, resolution in zip(scene.spots, resolutions, strict=True)
    ]
    intervals = [moments.redshift_range for moments in rough]
    visible = [moments.redshift_range for moments in rough if not moments.is_hidden]
    if len(set(resolutions)) == 1 and visible:
        lows, highs = zip(*visible, strict=True)
        intervals = [(min(lows), max(highs))] * len(rough)
    return [widened(interval, _RANGE_MARGIN) for interval in intervals]


def _moments_and_changes(
    scene: Scene,
    resolutions: Sequence[Resolution],
    intervals: Sequence[Interval],
    steps: Steps,
) -> list[dict[str, Complexes]]:
    """Return for each spot its moments ("rate") and their derivatives by central differences."""
    varied = [_variants(spot, steps) for spot in scene.spots]
    count = len(varied[0])
    at_home = _moments(
        scene,
        view_of(scene.star),
        [spot for variants in varied for spot in variants],
        [resolution for resolution in resolutions for _ in range(count)],
        [interval for interval in intervals for _ in range(count)],
    )
    results = []
    for index, spot in enumerate(scene.spots):
        own, north, south, wider, narrower = at_home[index * count : (index + 1) * count]
        width = 2.0 * steps.angular_radius * spot.angular_radius
        turned = _carried(spot, steps.colatitude, south) - _carried(spot, -steps.colatitude, north)
        results.append(
            {
                "rate": own,
                "colatitude": turned / (2.0 * steps.colatitude),
                "angular_radius": (wider - narrower) / width,
            }
        )
    for name, (lower, upper, width) in _neighbouring_views(scene.star, steps).items():
        below = _moments(scene, lower, scene.spots, resolutions, intervals)
        above = _moments(scene, upper, scene.spots, resolutions, intervals)
        for result, low, high in zip(results, below, above, strict=True):
            result[name] = (high - low) / width
    return results


def _moments(
    scene: Scene,
    view: View,
    spots: Sequence[HotSpot],
    resolutions: Sequence[Resolution],
    intervals: Sequence[Interval],
) -> list[Complexes]:
    """Return the moments of spots, those of equal resolution and interval in one go."""
    found: list[Complexes] = []
    settings = list(zip(resolutions, intervals, strict=True))
    while len(found) < len(spots):
        first = len(found)
        last = first + 1
        while last < len(spots) and settings[last] == settings[first]:
            last += 1
        resolution, interval = settings[first]
        group = joint_moments(view, scene.emission, spots[first:last], resolution, interval)
        found += [moments.values for moments in group]
    return found


def _variants(spot: HotSpot, steps: Steps) -> list[HotSpot]:
    """Return a spot with its neighbours to north and south, wider and narrower."""
    width = steps.angular_radius * spot.angular_radius
    moved = [_folded(spot.colatitude + sign * steps.colatitude) for sign in (-1.0, 1.0)]
    return [
        spot,
        *(replace(spot, colatitude=colatitude) for colatitude in moved),
        replace(spot, angular_radius=spot.angular_radius + width),
        replace(spot, angular_radius=spot.angular_radius - width),
    ]


def _folded(colatitude: float) -> float:
    """Colatitude of a centre that may have been carried over a pole."""
    if 0.0 <= colatitude <= np.pi:
        return colatitude
    return float(np.pi - abs(np.pi - abs(colatitude)))


def _carried(spot: HotSpot, step: float, moments: Complexes) -> Complexes:
    """Moments of a moved spot; one carried over a pole comes down on the other side."""
    if 0.0 <= spot.colatitude + step <= np.pi:
        return moments
    return np.asarray(moments * longitude_factor(np.pi, len(moments) - 1)[:, None])


_Term = tuple[Complexes, Floats]


def _terms(
    scene: Scene,
    response: Response,
    spot: HotSpot,
    resolution: Resolution,
    interval: Interval,
    changes: dict[str, Complexes],
) -> dict[str, _Term]:
    """Return (harmonics of moments, folded spectrum) of the rate and of each derivative."""
    folded = fold_spectrum(
        response, scene.column_cm2, spot.temperature_kev, interval, resolution.redshift_terms
    )
    phase = longitude_factor(spot.longitude, resolution.harmonics)[:, None]
    terms: dict[str, _Term] = {
        name: (values * phase, folded.rate) for name, values in changes.items()
    }
    here = terms["rate"][0]
    terms["column_density"] = (here, folded.by_column)
    terms["log_temperature"] = (here, folded.by_log_temperature)
    terms["longitude"] = (1j * np.arange(resolution.harmonics + 1)[:, None] * here, folded.rate)
    return terms


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
