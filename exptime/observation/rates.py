"""Expected source rates per phase bin and channel."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from exptime.arrays import Complexes, Floats
from exptime.constants import PARSEC_KM
from exptime.observation.fold import fold_rate
from exptime.observation.response import Response, timing_factor
from exptime.observation.scene import Scene
from exptime.star.moments import spot_moments
from exptime.star.pulse import bin_waves, longitude_factor
from exptime.star.resolution import Resolution
from exptime.star.view import view_of


def source_rates(
    scene: Scene, response: Response, phase_bins: int, resolutions: Sequence[Resolution]
) -> Floats:
    """Rate of source counts while the pulse is in each phase bin.

    Parameters
    ----------
    scene : Scene
        What is observed.
    response : Response
        The channels.
    phase_bins : int
        Number of phase bins; the first begins at phase zero.
    resolutions : sequence of Resolution
        Counts to compute each spot with.

    Returns
    -------
    ndarray, shape (phase_bins, n_channel)
        counts/s. Truncation of an eclipsed pulse can leave values slightly below zero.
    """
    harmonics = source_harmonics(scene, response, resolutions)
    waves = observed_waves(response, scene.star.spin_hz, harmonics.shape[0] - 1, phase_bins)
    return real_product(waves, harmonics)


def source_harmonics(
    scene: Scene, response: Response, resolutions: Sequence[Resolution]
) -> Complexes:
    """Harmonics of the rate in each channel before losses of timing.

    Parameters
    ----------
    scene, response, resolutions
        As for `source_rates`.

    Returns
    -------
    ndarray, shape (m_max + 1, n_channel)
        Complex amplitudes for m >= 0, counts/s.
    """
    view = view_of(scene.star)
    highest = max(resolution.harmonics for resolution in resolutions)
    total = np.zeros((highest + 1, response.matrix.shape[1]), complex)
    for spot, resolution in zip(scene.spots, resolutions, strict=True):
        moments = spot_moments(view, scene.emission, spot, resolution)
        rate = fold_rate(
            response,
            scene.column_cm2,
            spot.temperature_kev,
            moments.redshift_range,
            resolution.redshift_terms,
        )
        phase = longitude_factor(spot.longitude, resolution.harmonics)
        total[: resolution.harmonics + 1] += (moments.values * phase[:, None]) @ rate
    return np.asarray(total / (scene.distance_pc * PARSEC_KM) ** 2)


def observed_waves(response: Response, spin_hz: float, highest: int, phase_bins: int) -> Complexes:
    """Return `bin_waves` with the losses of timing, shape (phase_bins, highest + 1)."""
    return np.asarray(bin_waves(highest, phase_bins) * timing_factor(response, spin_hz, highest))


def real_product(waves: Complexes, harmonics: Complexes) -> Floats:
    """Return the real part of waves @ harmonics."""
    return np.asarray(waves.real @ harmonics.real - waves.imag @ harmonics.imag)
