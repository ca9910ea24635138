"""The results of whole questions, as plain records that every report is made from."""

from __future__ import annotations

from dataclasses import dataclass, field

from exptime.arrays import Floats
from exptime.information.precision import QUANTITIES as QUANTITIES
from exptime.information.precision import Quantity as QuantityName
from exptime.instrument.records import Instrument
from exptime.star.records import HotSpot, Star
from exptime.study.verify_records import Verification
from exptime.target.records import Target


@dataclass(frozen=True, slots=True, kw_only=True)
class Spread:
    """Weighted quantiles over geometries; infinite where unconstrained.

    Parameters
    ----------
    p16, p50, p84 : ndarray
        All of the same shape: (n_exposures,), or () for one number.
    """

    p16: Floats
    p50: Floats
    p84: Floats


@dataclass(frozen=True, slots=True, kw_only=True)
class QuantityCurve:
    """How well one quantity is known against exposure.

    Parameters
    ----------
    fiducial : float
        Value at which the forecast is made (median geometry); Msun, km, or none.
    sigma : Spread
        One standard deviation with every prior.
    data_sigma : Spread
        The same without the flat priors on mass and radius: what the data give.
    prior_sigma : float
        Standard deviation of the quantity's own prior.
    is_prior_limited : tuple of bool
        One entry per exposure, at the median geometry.
    """

    fiducial: float
    sigma: Spread
    data_sigma: Spread
    prior_sigma: float
    is_prior_limited: tuple[bool, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Goal:
    """A wanted precision: one standard deviation over the value.

    Parameters
    ----------
    quantity : {"mass", "radius", "compactness"}
        Which quantity.
    precision : float
        For example 0.05.
    """

    quantity: QuantityName
    precision: float


@dataclass(frozen=True, slots=True, kw_only=True)
class GoalResult:
    """What a goal costs over the geometries. No margin is included.

    Parameters
    ----------
    goal : Goal
        The wanted precision.
    exposure_s : Spread
        Quantiles (each shape ()) of the required exposure, s; infinite where not reached
        within 1e8 s.
    required_s : ndarray, shape (n_geometries,)
        Required exposure of every geometry, s; infinite where not reached.
    fraction_at_exposure : ndarray, shape (n_exposures,)
        Weighted share of the geometries that reach the goal at each exposure.
    fraction_reached : float
        The same within the longest exposure asked for.
    """

    goal: Goal
    exposure_s: Spread
    required_s: Floats
    fraction_at_exposure: Floats
    fraction_reached: float


@dataclass(frozen=True, slots=True, kw_only=True)
class GeometryResult:
    """One geometry and what it gives.

    Parameters
    ----------
    star : Star
        The star it was forecast for.
    spots : tuple of HotSpot
        Its hot spots.
    weight : float
        Its share among the geometries; they sum to one.
    data_sigma_radius_km : ndarray, shape (n_exposures,)
        Infinite where unconstrained.
    """

    star: Star
    spots: tuple[HotSpot, ...]
    weight: float
    data_sigma_radius_km: Floats


@dataclass(frozen=True, slots=True, kw_only=True)
class ExpectedData:
    """Expected counts per second of the median geometry.

    Parameters
    ----------
    phase : ndarray, shape (n_phase,)
        Bin centres, 0 to 1.
    channel_edges_kev : ndarray, shape (n_channels + 1,)
        keV.
    source_per_s : ndarray, shape (n_phase, n_channels)
        Source rate in each channel while the pulse is in this phase bin, counts/s: expected
        counts in a cell after exposure T are T/n_phase times this.
    background_per_s : ndarray, shape (n_channels,)
        Background rate, counts/s, the same in every phase bin.
    """

    phase: Floats
    channel_edges_kev: Floats
    source_per_s: Floats
    background_per_s: Floats


@dataclass(frozen=True, slots=True, kw_only=True)
class Numerics:
    """How sure the numbers are of themselves.

    Parameters
    ----------
    resolution_change : float
        Relative change of sigma(radius) when every resolution doubles, at the median geometry.
    condition : float
        Condition number of the information matrix scaled to unit diagonal, median geometry.
    quantile_error : float
        Monte-Carlo error of the median of data_sigma(radius), relative; zero for known geometry.
    floored_share : float
        Share of the cells whose source rate was floored, median geometry.
    """

    resolution_change: float
    condition: float
    quantile_error: float
    floored_share: float = 0.0


@dataclass(frozen=True, slots=True, kw_only=True)
class ReachedFraction:
    """A pulsed fraction asked for and what the geometries give.

    Parameters
    ----------
    label : str
        Definition and band, for the report.
    asked, uncertainty : float
        As measured.
    reached : Spread
        Weighted quantiles (each shape ()) over the geometries.
    """

    label: str
    asked: float
    uncertainty: float
    reached: Spread


@dataclass(frozen=True, slots=True, kw_only=True)
class Forecast:
    """The answer of the main job, with all that its reports need.

    Parameters
    ----------
    target, instruments
        What was asked about.
    exposures_s : ndarray, shape (n_exposures,)
        Increasing, s of good on-source time.
    mass, radius, compactness : QuantityCurve
        Precision against exposure.
    correlation_mass_radius : Spread
        Quantiles (each shape ()) of the correlation coefficient with every prior, at the
        longest exposure.
    goals : tuple of GoalResult
        In the order asked for.
    margin : float
        Share added to required exposures in headline and text, e.g. 0.15.
    geometries : tuple of GeometryResult
        Every geometry forecast, in draw order; one when it was known.
    is_geometry_known : bool
        True when the target file gave hot spots.
    candidates : int
        Geometries tried before acceptance; 0 for known geometry.
    effective_geometries : float
        (sum w)²/sum w².
    hidden_spots : int
        Spots that never show, over all geometries.
    pulsed_fractions : tuple of ReachedFraction
        One for every measured fraction.
    median_index : int
        Index of the median geometry.
    expected : ExpectedData
        Its expected data.
    covariance_mass_radius : ndarray, shape (n_exposures, 2, 2)
        Covariance of mass (Msun) and radius (km) with every prior, median geometry.
    source_per_s, background_per_s : float
        Count rates in the instrument's band, median geometry.
    numerics : Numerics
        Convergence figures.
    seed : int
        Seed of the draws.
    versions : dict
        Package name to version, exptime first.
    assumptions, warnings : tuple of str
        Sentences for every report.
    verification : Verification or None
        The check of the bound, where one was asked for.
    """

    target: Target
    instruments: tuple[Instrument, ...]
    exposures_s: Floats
    mass: QuantityCurve
    radius: QuantityCurve
    compactness: QuantityCurve
    correlation_mass_radius: Spread
    goals: tuple[GoalResult, ...]
    margin: float
    geometries: tuple[GeometryResult, ...]
    is_geometry_known: bool
    candidates: int
    effective_geometries: float
    hidden_spots: int
    pulsed_fractions: tuple[ReachedFraction, ...]
    median_index: int
    expected: ExpectedData
    covariance_mass_radius: Floats
    source_per_s: float
    background_per_s: float
    numerics: Numerics
    seed: int
    versions: dict[str, str] = field(default_factory=dict)
    assumptions: tuple[str, ...] = ()
    warnings: tuple[str, ...] = ()
    verification: Verification | None = None

    def curve(self, quantity: QuantityName) -> QuantityCurve:
        """Return the curve of the quantity named."""
        return {"mass": self.mass, "radius": self.radius, "compactness": self.compactness}[quantity]
