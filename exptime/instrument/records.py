"""An instrument as the forecast needs it: records without behaviour."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from exptime.arrays import Floats


@dataclass(frozen=True, slots=True, kw_only=True)
class EffectiveArea:
    """Effective area against photon energy, linear between its knots.

    Parameters
    ----------
    energies_kev : ndarray, shape (n,)
        Knots, increasing, keV. A table of bins becomes two knots a bin (a step function), so a
        knot may stand twice.
    area_cm2 : ndarray, shape (n,)
        cm^2, none negative.
    source : str
        What was read and how it was understood, for `check` and the report.
    """

    energies_kev: Floats
    area_cm2: Floats
    source: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Redistribution:
    """Gaussian spread of the measured energy about the photon's.

    Parameters
    ----------
    fwhm_kev : float
        Full width at half maximum at `at_kev`, keV; zero for perfect.
    at_kev : float
        Energy at which it holds, keV.
    law : {"perfect", "sqrt", "constant", "linear"}
        How the width grows with energy: none at all, as its root, not, in proportion.
    """

    fwhm_kev: float = 0.0
    at_kev: float = 1.0
    law: Literal["perfect", "sqrt", "constant", "linear"] = "perfect"


@dataclass(frozen=True, slots=True, kw_only=True)
class BackgroundKnowledge:
    """What is known of the background level before the observation.

    Parameters
    ----------
    kind : {"known", "unknown", "fraction", "scale"}
        known: exactly; unknown: one free level per channel; fraction: one level per 0.2 keV,
        known to `fraction`; scale: one common factor known to `fraction`.
    fraction : float
        One standard deviation of a level over the level; zero where it has no meaning.
    """

    kind: Literal["known", "unknown", "fraction", "scale"] = "known"
    fraction: float = 0.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Instrument:
    """An instrument description, read and checked.

    Parameters
    ----------
    id : str
        Id of a shipped instrument, or the path that was given.
    name : str
        Name as its description gives it.
    area : EffectiveArea
        Effective area.
    redistribution : Redistribution
        Energy redistribution.
    channel_edges_kev : ndarray, shape (n_channels + 1,)
        Edges of the energy channels, keV.
    background_per_s : ndarray, shape (n_channels,)
        Background counts per second in each channel.
    background_knowledge : BackgroundKnowledge
        What is known of it.
    time_resolution_s, time_uncertainty_s : float
        Full width of the time bin and one-sigma clock error, s.
    area_uncertainty : float
        One standard deviation of the grey area factor; zero holds it fixed.
    observing_efficiency : float or None
        Exposure over wall-clock time; None if not given.
    phase_bins : int
        Number of phase bins of the folded data.
    assumptions, warnings : tuple of str
        Sentences for the report.
    """

    id: str
    name: str
    area: EffectiveArea
    redistribution: Redistribution
    channel_edges_kev: Floats
    background_per_s: Floats
    background_knowledge: BackgroundKnowledge
    time_resolution_s: float = 0.0
    time_uncertainty_s: float = 0.0
    area_uncertainty: float = 0.0
    observing_efficiency: float | None = None
    phase_bins: int = 32
    assumptions: tuple[str, ...] = ()
    warnings: tuple[str, ...] = ()
