"""What is known of a target before it is observed: records without behaviour."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Literal

from exptime.arrays import Floats
from exptime.star.records import Emission, Figure

FractionDefinition = Literal[
    "peak-to-trough", "full-swing", "above-minimum", "rms", "first-harmonic"
]


@dataclass(frozen=True, slots=True, kw_only=True)
class Measured:
    """A value and what is known of its uncertainty.

    Parameters
    ----------
    value : float
        The value, in the unit that the field's name tells.
    uncertainty : float or None
        One standard deviation, same unit. None: not given, the value only says where the
        forecast is made. Zero: the quantity is held fixed.
    """

    value: float
    uncertainty: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Flux:
    """Energy flux in a band.

    Parameters
    ----------
    value : float
        erg cm^-2 s^-1.
    uncertainty : float or None
        One standard deviation, erg cm^-2 s^-1.
    band_kev : tuple of float
        Lower and upper energy, keV.
    absorbed : bool
        True: at the observer's end of the column; False: with the column taken off.
    """

    value: float
    uncertainty: float | None
    band_kev: tuple[float, float]
    absorbed: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class PulsedFraction:
    """A measured pulsed fraction of the source, background subtracted.

    Parameters
    ----------
    value, uncertainty : float
        The fraction and its standard deviation (10 % of the value where none was given).
    uncertainty_given : bool
        False when `uncertainty` is that default.
    definition : FractionDefinition
        Which statistic of the pulse it is.
    band_kev : tuple of float
        Lower and upper energy, keV.
    instrument : str or None
        None: of the absorbed photon flux; else of the counts of this instrument (id or path).
    counts : float or None
        Source counts in the folded profile whose raw extremes were taken, if they were.
    bins : int or None
        Number of phase bins of that profile.
    """

    value: float
    uncertainty: float
    uncertainty_given: bool = True
    definition: FractionDefinition
    band_kev: tuple[float, float]
    instrument: str | None = None
    counts: float | None = None
    bins: int | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class HarmonicFraction:
    """Amplitude of one harmonic over the mean.

    Parameters
    ----------
    number : int
        1 for the spin frequency.
    fraction, uncertainty : float
        Amplitude over mean and its standard deviation.
    """

    number: int
    fraction: float
    uncertainty: float


@dataclass(frozen=True, slots=True, kw_only=True)
class HarmonicShape:
    """Measured harmonic fractions in one band.

    Parameters
    ----------
    band_kev : tuple of float
        Lower and upper energy, keV.
    harmonics : tuple of HarmonicFraction
        At least one.
    instrument : str or None
        None: of the absorbed photon flux; else of the counts of this instrument.
    """

    band_kev: tuple[float, float]
    harmonics: tuple[HarmonicFraction, ...]
    instrument: str | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class FoldedShape:
    """An archival folded profile in one band.

    Parameters
    ----------
    band_kev : tuple of float
        Lower and upper energy, keV.
    phase : ndarray, shape (n,)
        Bin centres, 0 to 1, evenly spaced.
    counts : ndarray, shape (n,)
        Counts per bin, background included.
    error : ndarray, shape (n,)
        Standard deviation per bin (the root of the counts where none was given).
    background_per_bin : float
        Background counts in each bin.
    file : str
        Where the profile was read.
    instrument : str or None
        None: of the absorbed photon flux; else of the counts of this instrument.
    """

    band_kev: tuple[float, float]
    phase: Floats
    counts: Floats
    error: Floats
    background_per_bin: float
    file: str
    instrument: str | None = None


PulseShape = HarmonicShape | FoldedShape


@dataclass(frozen=True, slots=True, kw_only=True)
class Temperature:
    """Temperature kT of the hot spots.

    Parameters
    ----------
    value_kev : float
        kT, keV.
    uncertainty_kev : float or None
        One standard deviation, keV; used where the spread from input errors is asked for.
    frame : {"surface", "observed"}
        observed: lower than at the surface by 1 + z.
    """

    value_kev: float
    uncertainty_kev: float | None
    frame: Literal["surface", "observed"]


@dataclass(frozen=True, slots=True, kw_only=True)
class KnownSpot:
    """A hot spot as the target file gives it, each quantity with or without an uncertainty.

    Parameters
    ----------
    colatitude, longitude, angular_radius : Measured
        rad.
    temperature_kev : Measured
        kT in the frame of the surface, keV.
    """

    colatitude: Measured
    longitude: Measured
    angular_radius: Measured
    temperature_kev: Measured


@dataclass(frozen=True, slots=True, kw_only=True)
class Entry:
    """One line of the input as it was given, for the report's echo.

    Parameters
    ----------
    key : str
        Key path, e.g. ``"flux.band"``.
    text : str
        The value as written.
    line : int
        Line number, from 1.
    """

    key: str
    text: str
    line: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Target:
    """Everything that a target file says.

    Parameters
    ----------
    name, file : str
        Name of the target; path of its file as given (``"-"`` for standard input).
    spin_hz : float
        Spin frequency, Hz.
    column_density : Measured
        Hydrogen column, cm^-2.
    distance : Measured
        pc; `uncertainty` is never None (20 % of the value where none was given).
    flux : Flux or None
        None only where hot spots are given.
    pulsed_fractions : tuple of PulsedFraction
        Empty only where hot spots are given.
    pulse_shapes : tuple of PulseShape
        What archival profiles tell; may be empty.
    temperature : Temperature or None
        None only where hot spots are given.
    mass, radius : Measured or None
        Solar masses; km (equatorial, circumferential).
    inclination : Measured or None
        rad, 0 to pi/2 (already reflected where it was given above 90 deg).
    figure : {"oblate", "sphere"}
        Shape of the surface.
    emission : Emission
        How the spots radiate.
    hot_spots : tuple of KnownSpot or None
        None: geometries are drawn.
    abundances : {"interstellar", "solar-1982"}
        Abundances of the absorbing gas.
    entries : tuple of Entry
        The input as given, in file order.
    assumptions : tuple of str
        Sentences about what was not given.
    warnings : tuple of str
        Doubts about what was given.
    """

    name: str
    file: str
    spin_hz: float
    column_density: Measured
    distance: Measured
    flux: Flux | None = None
    pulsed_fractions: tuple[PulsedFraction, ...] = ()
    pulse_shapes: tuple[PulseShape, ...] = ()
    temperature: Temperature | None = None
    mass: Measured | None = None
    radius: Measured | None = None
    inclination: Measured | None = None
    figure: Figure = "oblate"
    emission: Emission = field(default_factory=Emission)
    hot_spots: tuple[KnownSpot, ...] | None = None
    abundances: Literal["interstellar", "solar-1982"] = "interstellar"
    entries: tuple[Entry, ...] = ()
    assumptions: tuple[str, ...] = ()
    warnings: tuple[str, ...] = ()
