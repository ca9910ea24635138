"""The spectrum of a spot folded into channels, as Chebyshev coefficients in the redshift factor."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from exptime.arrays import Floats
from exptime.constants import BLACKBODY_PHOTONS
from exptime.observation.response import Response
from exptime.star.emission import occupation
from exptime.star.spectrum import coefficients, redshift_points


@dataclass(frozen=True, slots=True)
class FoldedSpectrum:
    """Channel rates per km² of moment, times distance² in km².

    Parameters
    ----------
    rate : ndarray, shape (terms, n_channel)
        Coefficients that the moments are multiplied with, counts/s.
    by_log_temperature : ndarray, shape (terms, n_channel)
        Derivative with respect to ln kT.
    by_column : ndarray, shape (terms, n_channel)
        Derivative with respect to the column density, per cm^-2.
    """

    rate: Floats
    by_log_temperature: Floats
    by_column: Floats


def fold_spectrum(
    response: Response,
    column_cm2: float,
    temperature_kev: float,
    redshift_range: tuple[float, float],
    terms: int,
) -> FoldedSpectrum:
    """Fold the spectrum of a spot.

    Parameters
    ----------
    response : Response
        The channels.
    column_cm2 : float
        Hydrogen column density, cm^-2.
    temperature_kev : float
        kT of the spot at the surface, keV.
    redshift_range : tuple of float
        Interval of the redshift factor that the moments stand on.
    terms : int
        Chebyshev terms of the moments.
    """
    energies = response.nodes_kev
    points = redshift_points(redshift_range, terms)
    ratio = np.outer(points, energies / temperature_kev)
    number = occupation(ratio)
    through = np.exp(-response.cross_section_cm2 * column_cm2)
    law = BLACKBODY_PHOTONS * energies**2 * through
    steep = ratio * number * (1.0 + number)
    stack = np.concatenate([number, steep, number * -response.cross_section_cm2]) * law
    folded = (stack @ response.matrix).reshape(3, terms, -1)
    return FoldedSpectrum(*(coefficients(part) for part in folded))


def fold_rate(
    response: Response,
    column_cm2: float,
    temperature_kev: float,
    redshift_range: tuple[float, float],
    terms: int,
) -> Floats:
    """Return `FoldedSpectrum.rate` alone, where no derivative is wanted."""
    energies = response.nodes_kev
    points = redshift_points(redshift_range, terms)
    through = np.exp(-response.cross_section_cm2 * column_cm2)
    number = occupation(np.outer(points, energies / temperature_kev))
    return coefficients((number * (BLACKBODY_PHOTONS * energies**2 * through)) @ response.matrix)
