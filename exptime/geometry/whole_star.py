"""The most that a star can radiate: a flux above it is no geometry's fault."""

from __future__ import annotations

import math

import numpy as np

from exptime.constants import PARSEC_KM
from exptime.errors import Fault, UnreachableError
from exptime.geometry.candidates import Search, star_at, surface_temperature_kev
from exptime.observation.fold import fold_rate
from exptime.star.records import Star


def refuse_too_bright(search: Search) -> None:
    """Refuse a flux that exceeds that of a star hot all over.

    Parameters
    ----------
    search : Search
        What is sought.

    Raises
    ------
    UnreachableError
        Naming the temperature and the distance that would do.
    """
    wanted = search.target.flux
    if wanted is None:
        return
    star = max(_extreme_stars(search), key=lambda each: _most(search, each))
    temperature = surface_temperature_kev(search.target, star)
    most = whole_star_flux(search, star, temperature)
    if most >= wanted.value:
        return
    distance = search.target.distance.value * math.sqrt(most / wanted.value)
    remedies = [f"A distance below {distance:.3g} pc"]
    hotter = _temperature_that_does(search, star, temperature, wanted.value)
    if hotter is not None:
        remedies.append(f"a temperature above {hotter:.3g} keV at the surface")
    raise UnreachableError(
        Fault(
            f"A flux of {wanted.value:.3g} erg cm-2 s-1 in {wanted.band_kev[0]:g}-"
            f"{wanted.band_kev[1]:g} keV is more than a star of {star.radius_km:.3g} km, hot all "
            f"over at {temperature:.3g} keV, gives at {search.target.distance.value:.4g} pc "
            f"({most:.3g}).",
            where=f"{search.target.file}, flux",
            remedy=" or ".join(remedies) + " would do.",
        )
    )


def _extreme_stars(search: Search) -> list[Star]:
    """Return the largest star that may be drawn, at its smallest and largest mass.

    Mass widens the disc that is seen and cools its light: which wins depends on the band.
    """
    lightest = [0.0 if axis == "mass" else 1.0 for axis in search.axes]
    return [star_at(search, np.array(point)) for point in (lightest, np.ones(len(lightest)))]


def _most(search: Search, star: Star) -> float:
    return whole_star_flux(search, star, surface_temperature_kev(search.target, star))


def whole_star_flux(search: Search, star: Star, temperature_kev: float) -> float:
    """Flux of a star whose whole surface has one temperature.

    Parameters
    ----------
    search : Search
        Band, column and distance.
    star : Star
        Mass and radius count; spin does not.
    temperature_kev : float
        kT at the surface, keV.

    Returns
    -------
    float
        erg cm^-2 s^-1.

    Notes
    -----
    pi B(T_inf) (R_inf/D)², with R_inf = R (1 + z): the intensity is seen redshifted on a disc of
    the apparent radius.
    """
    apparent = star.radius_km * star.redshift_factor
    shift = star.redshift_factor
    rate = fold_rate(
        search.flux,
        search.target.column_density.value,
        temperature_kev,
        (shift * (1.0 - 1e-9), shift * (1.0 + 1e-9)),
        1,
    )
    area = math.pi * (apparent / (search.target.distance.value * PARSEC_KM)) ** 2
    return float(rate[0, 0]) * area


def _temperature_that_does(
    search: Search, star: Star, temperature: float, wanted: float
) -> float | None:
    trial = temperature
    for _ in range(60):
        trial *= 1.05
        if whole_star_flux(search, star, trial) >= wanted:
            return trial
    return None
