"""Figure of the spinning star: radius and tilt of the surface against colatitude.

Notes
-----
Leading term of AlGendy & Morsink 2014, ApJ 791, 78: R(theta) = R_e [1 + W (-0.788 + 1.030 x)
cos²(theta)] with W = Omega² R_e³/(GM) and x = GM/(R_e c²). A slow-rotation solution of
Einstein's equations supports it to 2-9 per cent for 0.12 < x < 0.3.
"""

from __future__ import annotations

import math

import numpy as np

from exptime.arrays import Floats
from exptime.constants import SPEED_OF_LIGHT_KM_S
from exptime.star.records import Star


def rotation_parameter(star: Star) -> float:
    """Omega² R_e³/(GM): the square of the spin over that of an orbit at the equator."""
    omega = 2.0 * math.pi * star.spin_hz / SPEED_OF_LIGHT_KM_S
    return omega**2 * star.radius_km**3 / (0.5 * star.schwarzschild_radius_km)


def flattening(star: Star) -> float:
    """Relative excess of the polar radius over the equatorial one: negative, zero for a sphere."""
    if star.figure == "sphere":
        return 0.0
    return rotation_parameter(star) * (-0.788 + 1.030 * star.compactness)


def radius_km(star: Star, colatitude: Floats) -> Floats:
    """Circumferential radius of the surface at colatitudes (rad), km."""
    return np.asarray(star.radius_km * (1.0 + flattening(star) * np.cos(colatitude) ** 2))


def tilt(star: Star, colatitude: Floats) -> Floats:
    """Tangent of the angle between surface normal and radius vector, towards the near pole.

    Parameters
    ----------
    star : Star
        The star.
    colatitude : ndarray
        rad.

    Returns
    -------
    ndarray
        (dr/dtheta)/(r sqrt(1 - u)) with u = 2GM/(rc²), dimensionless.
    """
    radius = radius_km(star, colatitude)
    slope = -star.radius_km * flattening(star) * np.sin(2.0 * colatitude)
    return np.asarray(slope / (radius * np.sqrt(1.0 - star.schwarzschild_radius_km / radius)))
