"""Choose the resolution of a pulse by need, and compute pulses that have converged."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from exptime.arrays import Complexes, Floats
from exptime.star.moments import spot_moments
from exptime.star.pulse import bin_averages, photon_harmonics, spot_harmonics
from exptime.star.records import Emission, HotSpot, Star
from exptime.star.resolution import Resolution
from exptime.star.spectrum import terms_needed
from exptime.star.view import View, check_star, view_of

_FEWEST_HARMONICS = 16
_FEWEST_RINGS = 8
_PLENTY = 64
_MOST_RINGS = 256
_SPECTRUM_SHARE = 1e-3


@dataclass(frozen=True, slots=True, kw_only=True)
class Accuracy:
    """What a pulse has to reach.

    Parameters
    ----------
    phase_bins : int
        Phase bins that it is averaged over.
    lowest_kev, highest_kev : float
        Photon energies to be met, keV.
    tolerance : float
        Largest change of a bin on refinement, over the peak at its energy.
    most_harmonics : int
        Never choose more harmonics than this.
    """

    phase_bins: int
    lowest_kev: float
    highest_kev: float
    tolerance: float = 1e-6
    most_harmonics: int = 1024

    @property
    def energies_kev(self) -> Floats:
        """Both ends of the energies, keV."""
        return np.array([self.lowest_kev, self.highest_kev])


def photon_flux(
    star: Star,
    spots: Sequence[HotSpot],
    emission: Emission,
    distance_pc: float,
    energies_kev: Floats,
    phase_bins: int,
) -> Floats:
    """Photon flux at the observer averaged over phase bins, converged to 1e-6 of the peak.

    Parameters
    ----------
    star, spots, emission
        The star, its hot spots and how they radiate.
    distance_pc : float
        Distance, pc.
    energies_kev : ndarray, shape (n_energy,)
        Photon energies at the observer, keV.
    phase_bins : int
        Number of phase bins; the first begins at phase zero.

    Returns
    -------
    ndarray, shape (phase_bins, n_energy)
        photons cm^-2 s^-1 keV^-1.

    Raises
    ------
    OutOfRangeError
        When the star lies outside the range of the model.
    """
    energies = np.asarray(energies_kev, float)
    accuracy = Accuracy(
        phase_bins=phase_bins,
        lowest_kev=float(energies.min()),
        highest_kev=float(energies.max()),
    )
    check_star(star)
    view = view_of(star)
    resolutions = [resolution_needed(view, spot, emission, accuracy) for spot in spots]
    harmonics = photon_harmonics(view, spots, emission, distance_pc, energies, resolutions)
    return np.maximum(bin_averages(harmonics, phase_bins), 0.0)


def resolution_needed(
    view: View, spot: HotSpot, emission: Emission, accuracy: Accuracy
) -> Resolution:
    """Raise rings and harmonics until the pulse of a spot moves by less than the tolerance.

    Parameters
    ----------
    view, spot, emission
        The star as seen, the spot and how it radiates.
    accuracy : Accuracy
        What to reach.
    """
    start = Resolution(harmonics=_FEWEST_HARMONICS, rings=_FEWEST_RINGS, redshift_terms=1)
    rough = spot_moments(view, emission, spot, replace(start, harmonics=2))
    terms = terms_needed(
        accuracy.energies_kev,
        spot.temperature_kev,
        rough.redshift_range,
        _SPECTRUM_SHARE * accuracy.tolerance,
    )
    resolution = replace(start, redshift_terms=terms)
    pulse = _pulse(view, spot, emission, accuracy, resolution)
    while True:
        can_grow = 2 * resolution.harmonics <= accuracy.most_harmonics
        is_short = can_grow and _remainder(pulse, accuracy) >= accuracy.tolerance
        if is_short and resolution.harmonics < _PLENTY:
            # Cheap to double; rings are looked at once the harmonics are about enough.
            resolution = replace(resolution, harmonics=2 * resolution.harmonics)
            pulse = _pulse(view, spot, emission, accuracy, resolution)
            continue
        fine = replace(resolution, rings=2 * resolution.rings)
        finer = _pulse(view, spot, emission, accuracy, fine)
        if fine.rings <= _MOST_RINGS and not _agree(finer, pulse, accuracy):
            resolution, pulse = fine, finer
        elif is_short:
            resolution = replace(resolution, harmonics=2 * resolution.harmonics)
            pulse = _pulse(view, spot, emission, accuracy, resolution)
        else:
            return resolution


def _agree(finer: Complexes, coarser: Complexes, accuracy: Accuracy) -> bool:
    """Whether twice the rings move no bin by more than the tolerance."""
    change = bin_averages(finer - coarser, accuracy.phase_bins)
    peak = np.abs(bin_averages(finer, accuracy.phase_bins)).max(axis=0)
    return bool(np.all(np.abs(change).max(axis=0) <= accuracy.tolerance * peak))


def _pulse(
    view: View, spot: HotSpot, emission: Emission, accuracy: Accuracy, resolution: Resolution
) -> Complexes:
    moments = spot_moments(view, emission, spot, resolution)
    return spot_harmonics(moments, spot, accuracy.energies_kev)


def _remainder(harmonics: Complexes, accuracy: Accuracy) -> float:
    """Estimate what the harmonics left out add to a bin, over the peak.

    The amplitudes fall at least as a power of their number, so that the last quarter of those
    computed outweighs the rest.
    """
    count = harmonics.shape[0]
    order = np.arange(count)
    damped = np.abs(harmonics * np.sinc(order / accuracy.phase_bins)[:, None])
    peak = np.abs(bin_averages(harmonics, accuracy.phase_bins)).max(axis=0)
    tail = 2.0 * damped[(3 * count) // 4 :].sum(axis=0)
    return float(np.max(np.divide(tail, peak, out=np.zeros_like(tail), where=peak > 0.0)))
