"""The pulse of a star: photon flux against phase and energy at the observer, no absorption.

Phase zero is the arrival of a radial photon that left the equatorial radius when longitude 0
crossed the observer's meridian; a spot at longitude L peaks near phase 1 - L/360 deg.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from exptime.arrays import Complexes, Floats
from exptime.constants import BLACKBODY_PHOTONS, PARSEC_KM
from exptime.star.moments import Moments, spot_moments
from exptime.star.records import Emission, HotSpot
from exptime.star.resolution import Resolution
from exptime.star.spectrum import planck_coefficients
from exptime.star.view import View


def photon_harmonics(
    view: View,
    spots: Sequence[HotSpot],
    emission: Emission,
    distance_pc: float,
    energies_kev: Floats,
    resolutions: Sequence[Resolution],
) -> Complexes:
    """Harmonics of the photon flux at the observer.

    Parameters
    ----------
    view : View
        The star as seen.
    spots : sequence of HotSpot
        Its hot spots.
    emission : Emission
        How they radiate.
    distance_pc : float
        Distance, pc.
    energies_kev : ndarray, shape (n_energy,)
        Photon energies at the observer, keV.
    resolutions : sequence of Resolution
        Counts to compute each spot with.

    Returns
    -------
    ndarray, shape (m_max + 1, n_energy)
        Complex amplitudes c_m, m >= 0, of the sum over all m of c_m exp(2 pi i m phase);
        photons cm^-2 s^-1 keV^-1.
    """
    highest = max(resolution.harmonics for resolution in resolutions)
    total = np.zeros((highest + 1, len(energies_kev)), complex)
    for spot, resolution in zip(spots, resolutions, strict=True):
        moments = spot_moments(view, emission, spot, resolution)
        total[: resolution.harmonics + 1] += spot_harmonics(moments, spot, energies_kev)
    return np.asarray(total / (distance_pc * PARSEC_KM) ** 2)


def spot_harmonics(moments: Moments, spot: HotSpot, energies_kev: Floats) -> Complexes:
    """Harmonics of one spot's photon flux times the square of the distance.

    Parameters
    ----------
    moments : Moments
        Its moments.
    spot : HotSpot
        Its longitude and temperature.
    energies_kev : ndarray, shape (n_energy,)
        keV.

    Returns
    -------
    ndarray, shape (harmonics + 1, n_energy)
        km² cm^-2 s^-1 keV^-1.
    """
    order, terms = moments.values.shape
    basis = planck_coefficients(energies_kev, spot.temperature_kev, moments.redshift_range, terms)
    phased = moments.values * longitude_factor(spot.longitude, order - 1)[:, None]
    return np.asarray(phased @ (basis * (BLACKBODY_PHOTONS * energies_kev**2)))


def longitude_factor(longitude: float, highest: int) -> Complexes:
    """Return exp(i m longitude) for m = 0..highest, shape (highest + 1,)."""
    return np.asarray(np.exp(1j * longitude * np.arange(highest + 1)))


def bin_waves(highest: int, phase_bins: int) -> Complexes:
    """Return the factors that turn harmonics into averages over phase bins.

    Parameters
    ----------
    highest : int
        Highest harmonic.
    phase_bins : int
        Number of bins; the first begins at phase zero.

    Returns
    -------
    ndarray, shape (phase_bins, highest + 1)
        The average in bin k is the real part of the sum over m >= 0 of factor[k, m] c_m: the
        exact factor sinc(m/phase_bins) on each harmonic.
    """
    order = np.arange(highest + 1)
    centers = (np.arange(phase_bins) + 0.5) / phase_bins
    factor = np.where(order == 0, 1.0, 2.0) * np.sinc(order / phase_bins)
    return np.asarray(factor * np.exp(2j * np.pi * np.outer(centers, order)))


def bin_averages(harmonics: Complexes, phase_bins: int) -> Floats:
    """Average a periodic function, given by c_m for m >= 0 on axis 0, over phase bins."""
    waves = bin_waves(harmonics.shape[0] - 1, phase_bins)
    return np.asarray(waves.real @ harmonics.real - waves.imag @ harmonics.imag)
