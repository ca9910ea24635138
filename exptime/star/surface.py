"""The visible surface of a star, ring by ring: where it is seen and how its rays leave.

Symbols: theta colatitude and phi azimuth from the observer's meridian, i inclination, sigma the
angle of a ray to the surface normal, tau the tilt of the surface.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from exptime.arrays import Floats
from exptime.star.bracketing import bracketed_roots
from exptime.star.figure import radius_km, tilt
from exptime.star.ray_table import RaySeries, RayTable
from exptime.star.records import Star

_SCAN = np.linspace(0.0, np.pi, 121)
_HORIZON_TOLERANCE = 1e-10
"""The kernel vanishes at the horizon: an error there enters squared."""


@dataclass(frozen=True, slots=True)
class Rings:
    """Rings of constant colatitude and the rays of each.

    Parameters
    ----------
    colatitude, radius_km, u, tangent : ndarray, shape (n_ring,)
        Colatitude (rad), radius (km), 2GM/(rc²) and tangent of the tilt.
    rays : RaySeries
        Bending at each ring's radius.
    along, across : ndarray, shape (n_ring,)
        cos i cos theta and sin i sin theta.
    lean, sway : ndarray, shape (n_ring,)
        cos i sin theta and sin i cos theta.
    """

    colatitude: Floats
    radius_km: Floats
    u: Floats
    tangent: Floats
    rays: RaySeries
    along: Floats
    across: Floats
    lean: Floats
    sway: Floats


def rings_at(star: Star, table: RayTable, colatitude: Floats) -> Rings:
    """Return the rings of a star at colatitudes (rad), shape (n_ring,)."""
    radius = radius_km(star, colatitude)
    u = star.schwarzschild_radius_km / radius
    sine, cosine = np.sin(colatitude), np.cos(colatitude)
    cos_i = star.cos_inclination
    sin_i = math.sqrt(max(0.0, 1.0 - cos_i**2))
    return Rings(
        colatitude=colatitude,
        radius_km=radius,
        u=u,
        tangent=tilt(star, colatitude),
        rays=table.at(u),
        along=cos_i * cosine,
        across=sin_i * sine,
        lean=cos_i * sine,
        sway=sin_i * cosine,
    )


def cos_sigma(rings: Rings, cos_azimuth: Floats) -> Floats:
    """Cosine of the angle to the surface normal at one azimuth per ring, shape (n_ring,)."""
    cos_psi = rings.along + rings.across * cos_azimuth
    cos_alpha = rings.rays.cos_alpha(cos_psi)
    y = np.maximum(1.0 - cos_psi, 1e-15)
    ratio = np.sqrt((1.0 - cos_alpha) * (1.0 + cos_alpha) / np.maximum(y * (2.0 - y), 1e-30))
    lean = rings.lean - rings.sway * cos_azimuth
    return np.asarray((cos_alpha + ratio * lean * rings.tangent) / np.hypot(1.0, rings.tangent))


def horizon_azimuth(rings: Rings) -> Floats:
    """Azimuth up to which each ring is visible, rad: 0 hidden, pi wholly visible.

    Parameters
    ----------
    rings : Rings
        The rings.

    Returns
    -------
    ndarray, shape (n_ring,)
        phi_h in 0..pi; the visible arc is -phi_h..phi_h.
    """
    count = len(rings.colatitude)
    near, far = np.ones(count), -np.ones(count)
    at_near, at_far = cos_sigma(rings, near), cos_sigma(rings, far)
    if not np.any(at_near * at_far < 0.0):
        return np.where(at_near + at_far > 0.0, np.pi, 0.0)
    guess = _untilted_horizon(rings)
    at_guess = cos_sigma(rings, guess)
    root = bracketed_roots(
        lambda cosine: cos_sigma(rings, cosine),
        np.where(at_guess > 0.0, far, near),
        guess,
        (np.where(at_guess > 0.0, at_far, at_near), at_guess),
        _HORIZON_TOLERANCE,
    )
    azimuth = np.arccos(np.clip(root, -1.0, 1.0))
    return np.where(at_far >= 0.0, np.pi, np.where(at_near <= 0.0, 0.0, azimuth))


def _untilted_horizon(rings: Rings) -> Floats:
    """Cosine of the azimuth at which rays leave at 90 deg to the radius vector, clipped."""
    gap = np.cos(rings.rays.psi_horizon) - rings.along
    return np.clip(gap / np.maximum(rings.across, 1e-12), -1.0, 1.0)


def visibility_transitions(star: Star, table: RayTable) -> Floats:
    """Colatitudes where rings become wholly visible or wholly hidden.

    Parameters
    ----------
    star : Star
        The star.
    table : RayTable
        Rays.

    Returns
    -------
    ndarray, shape (n,)
        Increasing, rad; the sum over rings has a 3/2-power kink at each.
    """
    scan = rings_at(star, table, _SCAN)
    found = [
        _roots_along(star, table, sign, cos_sigma(scan, np.full(len(_SCAN), sign)))
        for sign in (1.0, -1.0)
    ]
    return np.sort(np.concatenate(found))


def _roots_along(star: Star, table: RayTable, sign: float, values: Floats) -> Floats:
    change = np.nonzero(values[:-1] * values[1:] < 0.0)[0]
    if len(change) == 0:
        return np.empty(0)

    def edge(colatitude: Floats) -> Floats:
        rings = rings_at(star, table, colatitude)
        return cos_sigma(rings, np.full(len(colatitude), sign))

    ends = values[change], values[change + 1]
    return bracketed_roots(edge, _SCAN[change], _SCAN[change + 1], ends)
