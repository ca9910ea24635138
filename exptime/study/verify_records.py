"""The results of a verification, as plain records."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from exptime.arrays import Floats
from exptime.information.precision import Quantity
from exptime.star.records import HotSpot, Star
from exptime.study.profile import Profile

Verdict = Literal["holds", "optimistic", "pessimistic", "multimodal", "prior-limited"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Hump:
    """Another maximum of the likelihood of the expected data.

    Parameters
    ----------
    rise : float
        Its deviance above that of the truth.
    mass_msun, radius_km, inclination : float
        Where it is; the inclination in rad.
    colatitudes : tuple of float
        Of the spots, rad.
    """

    rise: float
    mass_msun: float
    radius_km: float
    inclination: float
    colatitudes: tuple[float, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Scatter:
    """What refits of simulated observations gave for one quantity.

    Parameters
    ----------
    quantity : {"mass", "radius", "compactness"}
        Which.
    bound : float
        Standard deviation that the information matrix gives.
    deviation : float
        Root mean square deviation of the refits from their mean.
    bias : float
        Mean of the refits less the truth.
    coverage : float
        Share of the refits whose quoted interval, plus or minus `bound`, holds the truth.
    coverage_error : float
        Binomial standard error of a share of 68.3 per cent.
    """

    quantity: Quantity
    bound: float
    deviation: float
    bias: float
    coverage: float
    coverage_error: float

    @property
    def ratio(self) -> float:
        """Deviation over the bound."""
        return self.deviation / self.bound if self.bound > 0.0 else float("nan")


@dataclass(frozen=True, slots=True, kw_only=True)
class Simulations:
    """Refits of simulated observations.

    Parameters
    ----------
    asked, converged : int
        Observations simulated, and those whose refit converged.
    elsewhere : int
        Refits that ended in another mode: an angle moved by more than five of its own sigmas.
    elsewhere_radius_km : tuple of float
        16, 50 and 84 per cent points of the radius there; empty when there are none.
    scatter : tuple of Scatter
        For mass, radius and compactness; of all converged refits.
    """

    asked: int
    converged: int
    elsewhere: int
    elsewhere_radius_km: tuple[float, ...]
    scatter: tuple[Scatter, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class CheckedGeometry:
    """The verification of one geometry.

    Parameters
    ----------
    label : str
        Which one it is: the given one, or the median, 16 or 84 per cent point.
    star : Star
        The star.
    spots : tuple of HotSpot
        Its spots.
    profiles : tuple of Profile
        With Gaussian-counted priors: radius, mass, compactness.
    bounded_profiles : tuple of Profile
        The same with hard limits besides.
    humps : tuple of Hump
        Other maxima within a rise of 3.84.
    simulations : Simulations or None
        Refits, if any were asked for.
    is_prior_limited : bool
        Whether the radius is prior-limited at this exposure.
    verdict : Verdict
        In one word.
    reason : str
        In a sentence.
    """

    label: str
    star: Star
    spots: tuple[HotSpot, ...]
    profiles: tuple[Profile, ...]
    bounded_profiles: tuple[Profile, ...]
    humps: tuple[Hump, ...]
    simulations: Simulations | None
    is_prior_limited: bool
    verdict: Verdict
    reason: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Verification:
    """The verification of a forecast.

    Parameters
    ----------
    target, file, instrument : str
        Names, and the path of the target file.
    exposure_s : float
        s.
    seed : int
        Seed of draws and simulations.
    geometries : tuple of CheckedGeometry
        The given geometry, or those at 16, 50 and 84 per cent of sigma(radius).
    versions : dict
        Package name to version.
    notes : tuple of str
        Assumptions and warnings.
    """

    target: str
    file: str
    instrument: str
    exposure_s: float
    seed: int
    geometries: tuple[CheckedGeometry, ...]
    versions: dict[str, str]
    notes: tuple[str, ...] = ()


Refit = tuple[bool, Floats]
"""Whether a refit converged, and its vector."""
