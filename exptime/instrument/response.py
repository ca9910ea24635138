"""From photons to channels: effective area and redistribution."""

from __future__ import annotations

import math
from typing import Final

import numpy as np

from exptime.arrays import Floats
from exptime.instrument.records import EffectiveArea, Instrument, Redistribution

FWHM_PER_SIGMA: Final = 2.0 * math.sqrt(2.0 * math.log(2.0))
_REACH_SIGMA = 8.0


def area_cm2(area: EffectiveArea, energies_kev: Floats) -> Floats:
    """Effective area at energies (keV), cm²; zero outside its table."""
    inside = np.interp(energies_kev, area.energies_kev, area.area_cm2, left=0.0, right=0.0)
    return np.asarray(inside)


def sigma_kev(redistribution: Redistribution, energies_kev: Floats) -> Floats:
    """Return the standard deviation of the measured energy for photon energies (keV), keV."""
    ratio = np.asarray(energies_kev) / redistribution.at_kev
    growth = {
        "perfect": np.zeros_like(ratio),
        "constant": np.ones_like(ratio),
        "sqrt": np.sqrt(ratio),
        "linear": ratio,
    }[redistribution.law]
    return np.asarray(redistribution.fwhm_kev / FWHM_PER_SIGMA * growth)


def channel_probabilities(
    redistribution: Redistribution, channel_edges_kev: Floats, energies_kev: Floats
) -> Floats:
    """Probability that a photon is counted in each channel.

    Parameters
    ----------
    redistribution : Redistribution
        Gaussian law or perfect.
    channel_edges_kev : ndarray, shape (n_channel + 1,)
        keV.
    energies_kev : ndarray, shape (n_energy,)
        Photon energies, keV.

    Returns
    -------
    ndarray, shape (n_energy, n_channel)
        Rows sum to one or less: tails outside the channels are lost.
    """
    energies = np.asarray(energies_kev, float)[:, None]
    if redistribution.law == "perfect" or redistribution.fwhm_kev == 0.0:
        above = (energies >= channel_edges_kev).astype(float)
        return np.asarray(above[:, :-1] - above[:, 1:])
    from scipy.special import ndtr

    below = ndtr((channel_edges_kev - energies) / sigma_kev(redistribution, energies))
    return np.asarray(below[:, 1:] - below[:, :-1])


def response_matrix(instrument: Instrument, nodes_kev: Floats, weights_kev: Floats) -> Floats:
    """Fold quadrature weights, effective area and redistribution.

    Parameters
    ----------
    instrument : Instrument
        The instrument.
    nodes_kev, weights_kev : ndarray, shape (n_node,)
        Quadrature in photon energy, keV.

    Returns
    -------
    ndarray, shape (n_node, n_channel)
        cm² keV: a photon spectrum at the nodes times this is the rate in each channel.
    """
    spread = channel_probabilities(
        instrument.redistribution, instrument.channel_edges_kev, nodes_kev
    )
    weight = weights_kev * area_cm2(instrument.area, nodes_kev)
    return np.asarray(weight[:, None] * spread)


def photon_breakpoints(instrument: Instrument) -> Floats:
    """Photon energies where the folded integrand is not smooth, with both ends of its range.

    Parameters
    ----------
    instrument : Instrument
        The instrument.

    Returns
    -------
    ndarray, shape (n,)
        keV, increasing: the range that reaches the channels, the knots of the area inside it,
        and the channel edges where the redistribution is perfect.
    """
    low, high = photon_range(instrument)
    points = [np.array([low, high]), instrument.area.energies_kev]
    if instrument.redistribution.law == "perfect":
        points.append(instrument.channel_edges_kev)
    joined = np.unique(np.concatenate(points))
    return np.asarray(joined[(joined >= low) & (joined <= high)])


def photon_range(instrument: Instrument) -> tuple[float, float]:
    """Photon energies that can be counted in the channels: within 8 sigma and the area's table."""
    edges, table = instrument.channel_edges_kev, instrument.area.energies_kev
    low, high = float(edges[0]), float(edges[-1])
    grid = np.linspace(float(table[0]), float(table[-1]), 4001)
    reach = _REACH_SIGMA * sigma_kev(instrument.redistribution, grid)
    reaches = grid[(grid + reach >= low) & (grid - reach <= high)]
    if len(reaches) == 0:
        return max(low, float(table[0])), min(high, float(table[-1]))
    return float(reaches[0]), float(reaches[-1])


def widest_piece_kev(instrument: Instrument) -> float:
    """Widest quadrature piece that resolves the redistribution, keV."""
    if instrument.redistribution.law == "perfect":
        return float(np.min(np.diff(instrument.channel_edges_kev)))
    low, _ = photon_range(instrument)
    return float(sigma_kev(instrument.redistribution, np.array([low]))[0])
