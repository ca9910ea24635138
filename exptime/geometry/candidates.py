"""Trial geometries: a point in the unit cube made into a star with spots of the right flux."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import Final

import numpy as np

from exptime.arrays import Booleans, Complexes, Floats
from exptime.constants import PARSEC_KM
from exptime.geometry.likelihood import bands_of, fractions_of, log_likelihood
from exptime.observation.bands import joined
from exptime.observation.fold import fold_rate
from exptime.observation.rates import source_harmonics
from exptime.observation.response import Response, timing_factor
from exptime.observation.scene import Scene
from exptime.star.ray_table import load_ray_table
from exptime.star.records import HotSpot, Star
from exptime.star.resolution import Resolution
from exptime.star.view import View, star_fault
from exptime.target.defaults import (
    DRAWN_MASS_MSUN,
    DRAWN_RADIUS_KM,
    FIXED_MASS_MSUN,
    FIXED_RADIUS_KM,
)
from exptime.target.records import Target

_FINE: Final = Resolution(harmonics=24, rings=8, redshift_terms=8)
LARGEST_RATIO: Final = 3.0
_LARGEST_RADIUS = 0.5 * math.pi
_FLUX_TOLERANCE = 1e-2
_USUAL_SCALE = 0.1
_COSINES = np.cos(2.0 * np.pi * np.arange(32) / 32.0)
_FLUX_STEPS = 12


@dataclass(frozen=True, slots=True, kw_only=True)
class Search:
    """What the search for geometries needs to know; sent to every process.

    Parameters
    ----------
    target : Target
        The target; its flux, temperature and pulsed fractions are given.
    flux : Response
        One channel: energy flux in the flux's band, erg cm^-2 s^-1.
    pulses : Response
        One channel for each of `bands_of` the target.
    is_star_fixed : bool
        Hold mass and radius that were not given instead of drawing them.
    """

    target: Target
    flux: Response
    pulses: Response
    is_star_fixed: bool

    @property
    def axes(self) -> tuple[str, ...]:
        """Names of the axes of the unit cube."""
        target, free = self.target, not self.is_star_fixed
        axes = ["cos_colatitude_1", "cos_colatitude_2", "longitude", "ratio"]
        if target.inclination is None:
            axes.append("cos_inclination")
        if target.mass is None and free:
            axes.append("mass")
        if target.radius is None and free:
            axes.append("radius")
        return tuple(axes)

    @property
    def is_periodic(self) -> Booleans:
        """Mask of the axes that close on themselves."""
        return np.array([axis == "longitude" for axis in self.axes])


@dataclass(frozen=True, slots=True, kw_only=True)
class Candidate:
    """A geometry that reproduces the flux.

    Parameters
    ----------
    star : Star
        The star.
    spots : tuple of HotSpot
        Its spots.
    fractions : ndarray, shape (n_fraction,)
        Its pulsed fractions, by each measurement's definition.
    log_likelihood : float
        Of all that was measured of the pulse.
    """

    star: Star
    spots: tuple[HotSpot, ...]
    fractions: Floats
    log_likelihood: float


def evaluate(search: Search, point: Floats) -> Candidate | None:
    """Make a geometry of a point and compare it with what was measured.

    Parameters
    ----------
    search : Search
        What is sought.
    point : ndarray, shape (n_axis,)
        In the unit cube; uniform there means the prior of geometries.

    Returns
    -------
    Candidate or None
        None where the star is outside the model, the spots overlap, or no size of the spots
        gives the flux.
    """
    star = star_at(search, point)
    if star_fault(star) is not None:
        return None
    view = View(star, load_ray_table(), np.empty(0))
    shape = _shape_at(search, star, point)
    scaled = _scaled_to_flux(search, view, shape)
    if scaled is None:
        return None
    spots, harmonics = scaled
    harmonics *= timing_factor(search.pulses, star.spin_hz, _FINE.harmonics)
    bands = bands_of(search.target)
    fractions = fractions_of(search.target, bands, harmonics)
    likelihood = log_likelihood(search.target, bands, harmonics, fractions)
    return Candidate(star=star, spots=spots, fractions=fractions, log_likelihood=likelihood)


def columns_at(search: Search, points: Floats) -> dict[str, Floats]:
    """Return what points in the unit cube say of star and spots, arrays of shape (n,).

    Parameters
    ----------
    search : Search
        What is sought.
    points : ndarray, shape (n, n_axis)
        In the unit cube.

    Returns
    -------
    dict of ndarray
        ``mass`` (Msun), ``radius`` (km) and ``cos_inclination``, given or drawn, and the axes of
        the spots as they are.
    """
    target, at = search.target, dict(zip(search.axes, points.T, strict=True))

    def drawn(axis: str, given: float | None, fixed: float, low: float, high: float) -> Floats:
        if given is not None:
            return np.full(len(points), given)
        return low + at[axis] * (high - low) if axis in at else np.full(len(points), fixed)

    mass = target.mass.value if target.mass is not None else None
    radius = target.radius.value if target.radius is not None else None
    inclination = target.inclination
    cosine = max(math.cos(inclination.value), 0.0) if inclination is not None else None
    return {
        **at,
        "mass": drawn("mass", mass, FIXED_MASS_MSUN, *DRAWN_MASS_MSUN),
        "radius": drawn("radius", radius, FIXED_RADIUS_KM, *DRAWN_RADIUS_KM),
        "cos_inclination": drawn("cos_inclination", cosine, 0.0, 0.0, 1.0),
    }


def star_at(search: Search, point: Floats) -> Star:
    """Return the star of a point in the unit cube."""
    at = columns_at(search, point[None])
    return Star(
        mass_msun=float(at["mass"][0]),
        radius_km=float(at["radius"][0]),
        spin_hz=search.target.spin_hz,
        cos_inclination=float(at["cos_inclination"][0]),
        figure=search.target.figure,
    )


def surface_temperature_kev(target: Target, star: Star) -> float:
    """Return kT at the surface, keV, whichever frame it was given in."""
    if target.temperature is None:
        raise ValueError("the target has no temperature")
    factor = star.redshift_factor if target.temperature.frame == "observed" else 1.0
    return target.temperature.value_kev * factor


def _shape_at(search: Search, star: Star, point: Floats) -> tuple[HotSpot, HotSpot]:
    """Return spots whose radii have a geometric mean of 1 rad."""
    at = dict(zip(search.axes, point, strict=True))
    temperature = surface_temperature_kev(search.target, star)
    root_ratio = LARGEST_RATIO ** (float(at["ratio"]) - 0.5)

    def spot(axis: str, longitude: float, radius: float) -> HotSpot:
        return HotSpot(
            colatitude=math.acos(2.0 * float(at[axis]) - 1.0),
            longitude=longitude,
            angular_radius=radius,
            temperature_kev=temperature,
        )

    return (
        spot("cos_colatitude_1", 0.0, root_ratio),
        spot("cos_colatitude_2", 2.0 * math.pi * float(at["longitude"]), 1.0 / root_ratio),
    )


def _scaled_to_flux(
    search: Search, view: View, shape: tuple[HotSpot, HotSpot]
) -> tuple[tuple[HotSpot, ...], Complexes] | None:
    """Scale the spots until they give the flux; None where none of their sizes does.

    Returns spots and the harmonics of their pulse in the measured bands, taken at a scale within
    half a per cent of theirs.
    """
    wanted = search.target.flux
    if wanted is None:
        raise ValueError("the target has no flux")
    largest = min(
        _separation(*shape) / (shape[0].angular_radius + shape[1].angular_radius),
        _LARGEST_RADIUS / max(spot.angular_radius for spot in shape),
    )
    response = joined([search.flux, search.pulses])
    scale = min(_first_scale(search, view.star, shape), 0.9 * largest)
    low, high, slope = 0.0, largest, 2.0
    last: tuple[float, float] | None = None
    for _ in range(_FLUX_STEPS):
        scene = _scene(search.target, view.star, _resized(shape, scale))
        harmonics = source_harmonics(scene, view, response, (_FINE, _FINE))
        flux = float(harmonics[0, 0].real)
        missing = math.log(wanted.value / flux) if flux > 0.0 else math.inf
        if last is not None and missing != last[1] and math.isfinite(missing):
            slope = (last[1] - missing) / (math.log(scale) - last[0])
            slope = min(max(slope, 1.0), 4.0)
        # Flux grows about as the square of the scale.
        step = scale * math.exp(min(missing / slope, 50.0))
        if abs(missing) <= _FLUX_TOLERANCE:
            return _resized(shape, min(step, largest)), harmonics[:, 1:]
        if missing > 0.0 and scale == largest:
            return None
        low, high = (scale, high) if missing > 0.0 else (low, scale)
        last = (math.log(scale), missing) if math.isfinite(missing) else None
        if low < step < high:
            scale = step
        else:
            scale = largest if high == largest else 0.5 * (low + high)
    return None


def _first_scale(search: Search, star: Star, shape: tuple[HotSpot, HotSpot]) -> float:
    """Guess the scale from point spots on a slowly turning star (Beloborodov 2002)."""
    wanted = search.target.flux
    shift = star.redshift_factor
    rate = fold_rate(
        search.flux,
        search.target.column_density.value,
        shape[0].temperature_kev,
        (shift * (1.0 - 1e-9), shift * (1.0 + 1e-9)),
        1,
    )
    u = 2.0 * star.compactness
    sine = math.sqrt(max(0.0, 1.0 - star.cos_inclination**2))
    seen = 0.0
    for spot in shape:
        along = star.cos_inclination * math.cos(spot.colatitude)
        across = sine * math.sin(spot.colatitude)
        cos_alpha = np.maximum(u + (1.0 - u) * (along + across * _COSINES), 0.0)
        seen += spot.angular_radius**2 * float(cos_alpha.mean())
    size = star.radius_km / (search.target.distance.value * PARSEC_KM)
    unit = float(rate[0, 0]) * math.pi * size**2 * seen
    if wanted is None or unit <= 0.0:
        return _USUAL_SCALE
    return math.sqrt(wanted.value / unit)


def _resized(shape: tuple[HotSpot, ...], scale: float) -> tuple[HotSpot, ...]:
    return tuple(replace(spot, angular_radius=scale * spot.angular_radius) for spot in shape)


def _separation(first: HotSpot, second: HotSpot) -> float:
    """Angle between two centres, rad."""
    cosine = math.cos(first.colatitude) * math.cos(second.colatitude) + math.sin(
        first.colatitude
    ) * math.sin(second.colatitude) * math.cos(first.longitude - second.longitude)
    return math.acos(max(-1.0, min(1.0, cosine)))


def _scene(target: Target, star: Star, spots: tuple[HotSpot, ...]) -> Scene:
    return Scene(
        star=star,
        spots=spots,
        emission=target.emission,
        distance_pc=target.distance.value,
        column_cm2=target.column_density.value,
    )
