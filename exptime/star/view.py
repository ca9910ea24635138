"""A star as seen: its rays and where the visibility of its rings changes."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from exptime.arrays import Floats
from exptime.errors import Fault, OutOfRangeError
from exptime.limits import MAX_COMPACTNESS_U, RAY_TABLE_MAX_X
from exptime.star.figure import radius_km, tilt
from exptime.star.ray_table import RayTable, load_ray_table
from exptime.star.rays import deflection
from exptime.star.records import Star
from exptime.star.surface import visibility_transitions

_SCAN = np.linspace(0.0, 0.5 * np.pi, 31)


@dataclass(frozen=True, slots=True)
class View:
    """A star with what every spot on it shares.

    Parameters
    ----------
    star : Star
        The star.
    table : RayTable
        Light rays.
    transitions : ndarray, shape (n,)
        Colatitudes where rings become wholly visible or wholly hidden, rad.
    """

    star: Star
    table: RayTable
    transitions: Floats


def view_of(star: Star) -> View:
    """Look at a star that `check_star` accepts.

    Parameters
    ----------
    star : Star
        The star.
    """
    table = load_ray_table()
    return View(star, table, visibility_transitions(star, table))


def check_star(star: Star) -> None:
    """Refuse a star outside the range of the model.

    Raises
    ------
    OutOfRangeError
        When its surface needs rays that the table does not hold; see `star_fault`.
    """
    fault = star_fault(star)
    if fault is not None:
        raise OutOfRangeError(fault)


def star_fault(star: Star) -> Fault | None:
    """Say what keeps a star outside the range of the model, if anything does.

    Parameters
    ----------
    star : Star
        The star.

    Returns
    -------
    Fault or None
        None for a star that can be modelled.
    """
    smallest = float(radius_km(star, np.zeros(1))[0])
    what = f"a star of {star.mass_msun:.4g} Msun and {star.radius_km:.4g} km"
    if smallest <= 0.0 or star.schwarzschild_radius_km / smallest > MAX_COMPACTNESS_U:
        return Fault(
            f"{what} turning at {star.spin_hz:.4g} Hz is too compact: 2GM/(Rc²) at its pole "
            f"exceeds {MAX_COMPACTNESS_U:g}, near which points of the surface have two images.",
            remedy="Give a larger radius or a smaller mass.",
        )
    lean = np.arctan(np.abs(tilt(star, _SCAN)))
    steepest = int(np.argmax(lean))
    u = star.schwarzschild_radius_km / float(radius_km(star, _SCAN[steepest : steepest + 1])[0])
    psi = float(deflection(-math.sin(float(lean[steepest])), u))
    reach = (psi / float(deflection(0.0, u))) ** 2
    if not (psi < math.pi and reach < RAY_TABLE_MAX_X):
        return Fault(
            f"{what} turning at {star.spin_hz:.4g} Hz is so flattened that its surface is seen "
            "around the limb by rays outside the table of rays.",
            remedy="Give a smaller spin frequency or radius, or figure: sphere.",
        )
    return None
