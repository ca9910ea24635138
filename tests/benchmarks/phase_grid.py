"""Slow twin of the matrix: a pulse from an interpolated grid of phases.

The straightforward way: each spot is a mesh of cells; for every cell and every emission phase
the ray, Doppler factor and spectrum are computed (rays and horizon from interpolated tables of
each ring), arrival phases are delayed and the flux is interpolated onto an even grid of
phases, folded through the response and averaged over bins. The derivatives are central
differences of the whole. Vectorised over cells and phases.
"""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np

from exptime.arrays import Floats
from exptime.constants import BLACKBODY_PHOTONS, PARSEC_KM, SPEED_OF_LIGHT_KM_S
from exptime.observation.linearise import parameter_names
from exptime.observation.response import Response
from exptime.observation.scene import Scene
from exptime.star.figure import radius_km, tilt
from exptime.star.rays import deflection_of_angle, delay_of_angle
from exptime.star.records import HotSpot, Star

_ANGLES = 200
_STEEPEST = math.pi / 2 + 0.16


def phase_grid_rates(scene: Scene, response: Response, bins: int, phases: int, mesh: int) -> Floats:
    """Return counts/s per phase bin and channel, shape (bins, n_channel).

    `phases` points of the grid; `mesh` rings and as many azimuths across each spot.
    """
    total = np.zeros((phases, response.matrix.shape[1]))
    for spot in scene.spots:
        total += _spot(scene, spot, response, phases, mesh)
    return np.asarray(total.reshape(bins, phases // bins, -1).mean(axis=1))


def _spot(scene: Scene, spot: HotSpot, response: Response, phases: int, mesh: int) -> Floats:
    """Rings of a mesh in polar coordinates about the pole of the star."""
    star, rates = scene.star, np.zeros((phases, response.matrix.shape[1]))
    nodes, weights = np.polynomial.legendre.leggauss(mesh)
    low = max(spot.colatitude - spot.angular_radius, 0.0)
    high = min(spot.colatitude + spot.angular_radius, math.pi)
    energies = response.nodes_kev
    law = BLACKBODY_PHOTONS * energies**2 * np.exp(-response.cross_section_cm2 * scene.column_cm2)
    law = law / (scene.distance_pc * PARSEC_KM) ** 2
    even = (np.arange(phases) + 0.5) / phases
    for x, weight in zip(nodes, weights, strict=True):
        theta = 0.5 * (low + high) + 0.5 * (high - low) * x
        cosine = (math.cos(spot.angular_radius) - math.cos(theta) * math.cos(spot.colatitude)) / (
            math.sin(theta) * math.sin(spot.colatitude)
        )
        width = math.acos(min(1.0, max(-1.0, cosine)))
        phi = 2.0 * math.pi * np.arange(phases) / phases
        area, boost, lag = _ring(scene.star, theta, phi)
        factor = boost * math.sqrt(1.0 - star.schwarzschild_radius_km / _radius(star, theta))
        spectrum = law / np.expm1(energies / spot.temperature_kev / factor[:, None])
        flux = (area[:, None] * spectrum) @ response.matrix * (0.5 * (high - low) * weight)
        arrival = (phi + lag) / (2.0 * math.pi)
        for offset, share in zip(*np.polynomial.legendre.leggauss(mesh), strict=True):
            moved = arrival - (spot.longitude + width * offset) / (2.0 * math.pi)
            for channel in range(rates.shape[1]):
                rates[:, channel] += (
                    width * share * np.interp(even, moved, flux[:, channel], period=1.0)
                )
    return rates


def _radius(star: Star, theta: float) -> float:
    return float(radius_km(star, np.array([theta]))[0])


def _ring(star: Star, theta: float, phi: Floats) -> tuple[Floats, Floats, Floats]:
    """Return projected area (km²), Doppler factor and lag (rad) of points of a ring."""
    r, rs = _radius(star, theta), star.schwarzschild_radius_km
    u, slope = rs / r, float(tilt(star, np.array([theta]))[0])
    alphas = np.linspace(0.0, _STEEPEST, _ANGLES)
    psis = deflection_of_angle(alphas, np.full(_ANGLES, u))
    lates = delay_of_angle(alphas, np.full(_ANGLES, u))
    good = np.isfinite(psis)
    incl = math.acos(star.cos_inclination)
    sin_i, cos_i = math.sin(incl), math.cos(incl)
    cos_psi = cos_i * math.cos(theta) + sin_i * math.sin(theta) * np.cos(phi)
    psi = np.arccos(np.clip(cos_psi, -1.0, 1.0))
    slopes = np.gradient(alphas[good], psis[good])
    alpha = np.interp(psi, psis[good], alphas[good])
    ratio = np.sin(alpha) / np.maximum(np.sin(psi), 1e-12)
    lensing = ratio * np.interp(psi, psis[good], slopes)
    lean = cos_i * math.sin(theta) - sin_i * math.cos(theta) * np.cos(phi)
    sigma = (np.cos(alpha) + ratio * lean * slope) / math.hypot(1.0, slope)
    turn = 2.0 * math.pi * star.spin_hz / SPEED_OF_LIGHT_KM_S
    beta = turn * r * math.sin(theta) / math.sqrt(1.0 - u)
    gamma = 1.0 / math.sqrt(1.0 - beta**2)
    boost = 1.0 / (gamma * (1.0 + beta * ratio * sin_i * np.sin(phi)))
    area = gamma * r**2 * math.sin(theta) * math.hypot(1.0, slope) / (1.0 - u)
    seen = np.maximum(sigma, 0.0) * boost * lensing * area
    late = r * np.interp(psi, psis[good], lates[good]) + (star.radius_km - r)
    late += rs * math.log((star.radius_km - rs) / (r - rs))
    return np.asarray(seen), np.asarray(boost), np.asarray(turn * late)


def phase_grid_derivatives(
    scene: Scene, response: Response, bins: int, phases: int, mesh: int
) -> Floats:
    """Return central differences in every parameter, shape (n_parameter, bins, n_channel)."""
    rows = []
    for name in parameter_names(len(scene.spots)):
        step = _STEPS[name.split(".")[-1]]
        upper, lower = (
            phase_grid_rates(_moved(scene, name, sign * step), response, bins, phases, mesh)
            for sign in (1.0, -1.0)
        )
        rows.append((upper - lower) / (2.0 * step))
    return np.stack(rows)


_STEPS = {
    "mass": 3e-3,
    "radius": 3e-2,
    "distance": 1.0,
    "cos_inclination": 3e-3,
    "column_density": 1e18,
    "colatitude": 3e-3,
    "longitude": 3e-3,
    "angular_radius": 3e-3,
    "log_temperature": 3e-3,
}


def _moved(scene: Scene, name: str, step: float) -> Scene:
    star = scene.star
    if name == "mass":
        return replace(scene, star=replace(star, mass_msun=star.mass_msun + step))
    if name == "radius":
        return replace(scene, star=replace(star, radius_km=star.radius_km + step))
    if name == "cos_inclination":
        return replace(scene, star=replace(star, cos_inclination=star.cos_inclination + step))
    if name == "distance":
        return replace(scene, distance_pc=scene.distance_pc + step)
    if name == "column_density":
        return replace(scene, column_cm2=scene.column_cm2 + step)
    number, quantity = int(name[4]) - 1, name.split(".")[1]
    spots = list(scene.spots)
    spot = spots[number]
    if quantity == "log_temperature":
        spots[number] = replace(spot, temperature_kev=spot.temperature_kev * math.exp(step))
    elif quantity == "colatitude":
        spots[number] = replace(spot, colatitude=spot.colatitude + step)
    elif quantity == "longitude":
        spots[number] = replace(spot, longitude=spot.longitude + step)
    else:
        spots[number] = replace(spot, angular_radius=spot.angular_radius + step)
    return replace(scene, spots=tuple(spots))
