"""Expected source rates per phase bin and channel."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from exptime.arrays import Complexes, Floats
from exptime.constants import PARSEC_KM
from exptime.observation.fold import fold_rate
from exptime.observation.response import Response, timing_factor
from exptime.observation.scene import Scene
from exptime.star.moments import Moments, joint_moments, spot_moments
from exptime.star.pulse import bin_waves, longitude_factor
from exptime.star.resolution import Resolution
from exptime.star.view import View, view_of


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
    harmonics = source_harmonics(scene, view_of(scene.star), response, resolutions)
    waves = observed_waves(response, scene.star.spin_hz, harmonics.shape[0] - 1, phase_bins)
    return real_product(waves, harmonics)


def source_harmonics(
    scene: Scene, view: View, response: Response, resolutions: Sequence[Resolution]
) -> Complexes:
    """Harmonics of the rate in each channel before losses of timing.

    Parameters
    ----------
    scene, response, resolutions
        As for `source_rates`.
    view : View
        The scene's star as seen.

    Returns
    -------
    ndarray, shape (m_max + 1, n_channel)
        Complex amplitudes for m >= 0, counts/s.
    """
    highest = max(resolution.harmonics for resolution in resolutions)
    total = np.zeros((highest + 1, response.matrix.shape[1]), complex)
    for spot, moments in zip(scene.spots, _moments(scene, view, resolutions), strict=True):
        order, terms = moments.values.shape
        rate = fold_rate(
            response, scene.column_cm2, spot.temperature_kev, moments.redshift_range, terms
        )
        phase = longitude_factor(spot.longitude, order - 1)
        total[:order] += (moments.values * phase[:, None]) @ rate
    return np.asarray(total / (scene.distance_pc * PARSEC_KM) ** 2)


def _moments(scene: Scene, view: View, resolutions: Sequence[Resolution]) -> list[Moments]:
    """Return the moments of the spots, in one go where they share a resolution."""
    if len(set(resolutions)) == 1:
        return joint_moments(view, scene.emission, scene.spots, resolutions[0])
    return [
        spot_moments(view, scene.emission, spot, resolution)
        for spot, resolution in zip(scene.spots, resolutions, strict=True)
    ]


def observed_waves(response: Response, spin_hz: float, highest: int, phase_bins: int) -> Complexes:
    """Return `bin_waves` with the losses of timing, shape (phase_bins, highest + 1)."""
    return np.asarray(bin_waves(highest, phase_bins) * timing_factor(response, spin_hz, highest))


def real_product(waves: Complexes, harmonics: Complexes) -> Floats:
    """Return the real part of waves @ harmonics."""
    return np.asarray(waves.real @ harmonics.real - waves.imag @ harmonics.imag)
