"""From photons at the observer to rates in channels: one linear map of the spectrum.

A channel is an instrument's energy channel, or a band in which photons or energy are summed.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from exptime.arrays import Floats


@dataclass(frozen=True, slots=True, kw_only=True)
class Response:
    """A linear map from the photon spectrum to channels.

    Parameters
    ----------
    nodes_kev : ndarray, shape (n_node,)
        Energies at which the spectrum is evaluated, keV.
    matrix : ndarray, shape (n_node, n_channel)
        Quadrature weight (keV) times effective area (cm²) times probability of the channel; or
        without the area, for a flux.
    cross_section_cm2 : ndarray, shape (n_node,)
        Absorption per hydrogen atom, cm²; zero where the column is taken off.
    time_bin_s, clock_error_s : float or ndarray, shape (n_channel,)
        Full width of the time bin and one-sigma clock error, s; of all channels or of each.
    """

    nodes_kev: Floats
    matrix: Floats
    cross_section_cm2: Floats
    time_bin_s: float | Floats = 0.0
    clock_error_s: float | Floats = 0.0


def timing_factor(response: Response, spin_hz: float, highest: int) -> Floats:
    """Loss of each harmonic to the time bin and the clock error, exactly.

    Parameters
    ----------
    response : Response
        Its time bin w and clock error s count.
    spin_hz : float
        Spin frequency f, Hz.
    highest : int
        Highest harmonic m.

    Returns
    -------
    ndarray, shape (highest + 1,) or (highest + 1, n_channel)
        sinc(m f w) exp(-(2 pi m f s)²/2).
    """
    turn = np.arange(highest + 1) * spin_hz
    smear = np.exp(-0.5 * (2.0 * np.pi * np.multiply.outer(turn, response.clock_error_s)) ** 2)
    return np.asarray(np.sinc(np.multiply.outer(turn, response.time_bin_s)) * smear)
