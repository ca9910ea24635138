"""From photons to channels: effective area and redistribution."""

from __future__ import annotations

import math
from typing import Final

import numpy as np
from numpy.typing import NDArray

from exptime.arrays import Floats
from exptime.errors import Fault, ProfileError
from exptime.instrument.records import EffectiveArea, Instrument, Redistribution
from exptime.quadrature import gauss_legendre

FWHM_PER_SIGMA: Final = 2.0 * math.sqrt(2.0 * math.log(2.0))
_REACH_SIGMA = 8.0
_WIDEST_SIGMA = 1.5
_WIDEST_RELATIVE = 0.1
_FINE_SIGMA = (0.2, 0.7)
_LARGEST_MATRIX = 40_000_000


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


def photon_range(instrument: Instrument) -> tuple[float, float]:
    """Photon energies that can be counted: within 8 sigma of the channels and the area's table.

    Parameters
    ----------
    instrument : Instrument
        The instrument.

    Returns
    -------
    tuple of float
        Lowest and highest, keV.

    Raises
    ------
    ProfileError
        When no photon in the area's table can reach a channel.
    """
    edges, table = instrument.channel_edges_kev, instrument.area.energies_kev
    low, high = _reach(instrument.redistribution, float(edges[0]), float(edges[-1]))
    low, high = max(low, float(table[0])), min(high, float(table[-1]))
    if not low < high:
        raise ProfileError(
            Fault(
                f"no photon of the area's table ({table[0]:g}-{table[-1]:g} keV) is measured at "
                f"{edges[0]:g}-{edges[-1]:g} keV.",
                instrument.id,
                "Choose channels or a band inside the table.",
            )
        )
    return low, high


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


def photon_nodes(instrument: Instrument, cuts_kev: Floats) -> tuple[Floats, Floats]:
    """Quadrature in photon energy that resolves area, redistribution and further cuts.

    Parameters
    ----------
    instrument : Instrument
        The instrument.
    cuts_kev : ndarray, shape (m,)
        Further energies where the spectrum is not smooth, such as absorption edges; those
        outside the range of photons are left out.

    Returns
    -------
    nodes, weights : ndarray, shape (n,)
        keV, increasing. Good to 3e-6 of the highest channel (measured) for thermal spectra
        behind columns up to 1e21 cm^-2, to 3e-5 at 1e22 cm^-2. Rows of the area that are
        narrow against the redistribution get two nodes, wider pieces three or four.

    Raises
    ------
    ProfileError
        When no photon reaches a channel, or nodes times channels would not fit into memory.
    """
    points = photon_breakpoints(instrument)
    cuts = cuts_kev[(cuts_kev > points[0]) & (cuts_kev < points[-1])]
    # A long row of the area is cut at octaves first, so that its lower end decides for one alone.
    octaves = points[0] * 2.0 ** np.arange(1, max(1.0, math.log2(points[-1] / points[0])))
    bounds = np.unique(np.concatenate([points, cuts, octaves]))
    low, width = bounds[:-1], np.diff(bounds)
    widest = _WIDEST_RELATIVE * low
    sigma = widest
    if instrument.redistribution.law != "perfect":
        sigma = sigma_kev(instrument.redistribution, low)
        widest = np.minimum(widest, _WIDEST_SIGMA * sigma)
    parts = np.maximum(1, np.ceil(width / widest - 1e-9)).astype(int)
    _refuse_large(instrument, 2 * int(parts.sum()))
    step = np.repeat(width / parts, parts)
    first = np.repeat(np.cumsum(parts) - parts, parts)
    middle = np.repeat(low, parts) + step * (np.arange(len(step)) - first + 0.5)
    relative = step / np.repeat(sigma, parts)
    order = 2 + np.searchsorted(_FINE_SIGMA, relative)
    _refuse_large(instrument, int(order.sum()))
    return _gauss(middle, 0.5 * step, order)


def _refuse_large(instrument: Instrument, nodes: int) -> None:
    channels = len(instrument.channel_edges_kev) - 1
    if nodes * channels > _LARGEST_MATRIX:
        raise ProfileError(
            Fault(
                f"{nodes} photon energies to {channels} channels are too many to fold.",
                instrument.id,
                "Give wider channels, or a redistribution that is wider or perfect.",
            )
        )


def _gauss(middle: Floats, half: Floats, order: NDArray[np.int_]) -> tuple[Floats, Floats]:
    """Return nodes and weights of pieces, each with its own number of nodes."""
    nodes, weights = [], []
    for count in np.unique(order):
        x, weight = gauss_legendre(int(count))
        mine = order == count
        nodes.append((middle[mine, None] + half[mine, None] * x).ravel())
        weights.append((half[mine, None] * weight).ravel())
    joined = np.concatenate(nodes)
    rising = np.argsort(joined, kind="stable")
    return joined[rising], np.concatenate(weights)[rising]


def _reach(redistribution: Redistribution, low: float, high: float) -> tuple[float, float]:
    """Return the photon energies that are measured within 8 sigma of a band."""
    # Width at energy E: 8 sigma(E) = scale * E**power.
    power = {"perfect": 0.0, "constant": 0.0, "sqrt": 0.5, "linear": 1.0}[redistribution.law]
    scale = _REACH_SIGMA * redistribution.fwhm_kev / FWHM_PER_SIGMA
    scale *= redistribution.at_kev**-power
    if power == 0.0:
        return low - scale, high + scale
    if power == 1.0:
        return low / (1.0 + scale), high / (1.0 - scale) if scale < 1.0 else math.inf
    root = [
        0.5 * (sign * scale + math.hypot(scale, 2.0 * math.sqrt(end)))
        for sign, end in ((-1.0, low), (1.0, high))
    ]
    return root[0] ** 2, root[1] ** 2
