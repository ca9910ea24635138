"""The results of `pulse`: photon flux, or expected counts, as plain records."""

from __future__ import annotations

from dataclasses import dataclass

from exptime.arrays import Floats


@dataclass(frozen=True, slots=True, kw_only=True)
class Pulse:
    """Photon flux of a star against phase and energy, unabsorbed, at the observer.

    Parameters
    ----------
    phase : ndarray, shape (n,)
        Bin centres, 0 to 1.
    energies_kev : ndarray, shape (m,)
        keV.
    photon_flux : ndarray, shape (n, m)
        photons cm^-2 s^-1 keV^-1, averaged over each phase bin.
    target : str
        Name of the target.
    notes : tuple of str
        Assumptions and warnings.
    """

    phase: Floats
    energies_kev: Floats
    photon_flux: Floats
    target: str
    notes: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Counts:
    """Expected counts of one exposure.

    Parameters
    ----------
    phase : ndarray, shape (n,)
        Bin centres, 0 to 1.
    channel_edges_kev : ndarray, shape (m + 1,)
        keV.
    source_counts, background_counts : ndarray, shape (n, m)
        Expected counts in each phase bin and channel.
    exposure_s : float
        Exposure, s.
    target, instrument : str
        Names.
    notes : tuple of str
        Assumptions and warnings.
    """

    phase: Floats
    channel_edges_kev: Floats
    source_counts: Floats
    background_counts: Floats
    exposure_s: float
    target: str
    instrument: str
    notes: tuple[str, ...] = ()
