"""What the star is: plain records of numbers, without behaviour beyond simple relations."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

from exptime.constants import SOLAR_MASS_KM

Figure = Literal["oblate", "sphere"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Star:
    """A spinning neutron star and the direction from which it is seen.

    Parameters
    ----------
    mass_msun : float
        Gravitational mass, solar masses.
    radius_km : float
        Equatorial circumferential radius, km.
    spin_hz : float
        Spin frequency at infinity, Hz.
    cos_inclination : float
        Cosine of the angle between spin axis and line of sight, 0 to 1.
    figure : {"oblate", "sphere"}
        Shape of the surface.
    """

    mass_msun: float
    radius_km: float
    spin_hz: float
    cos_inclination: float
    figure: Figure = "oblate"

    @property
    def schwarzschild_radius_km(self) -> float:
        """2GM/c², km."""
        return 2.0 * SOLAR_MASS_KM * self.mass_msun

    @property
    def compactness(self) -> float:
        """GM/(Rc²) at the equator."""
        return SOLAR_MASS_KM * self.mass_msun / self.radius_km

    @property
    def redshift_factor(self) -> float:
        """1 + z at the equatorial radius."""
        return 1.0 / math.sqrt(1.0 - 2.0 * self.compactness)


@dataclass(frozen=True, slots=True, kw_only=True)
class HotSpot:
    """A circular hot spot.

    Parameters
    ----------
    colatitude : float
        Angle of the centre from the spin pole, rad, 0 to pi.
    longitude : float
        Longitude of the centre in the sense of rotation, rad.
    angular_radius : float
        Angle from the centre to the edge, seen from the star's centre, rad.
    temperature_kev : float
        Temperature kT in the frame of the surface, keV.
    """

    colatitude: float
    longitude: float
    angular_radius: float
    temperature_kev: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Emission:
    """How the hot surface radiates: the law named in a target file and its coefficient.

    Parameters
    ----------
    model : {"blackbody", "limb-darkened"}
        Blackbody, isotropic; or a blackbody spectrum with I(mu) ~ 1 + coefficient * mu at the
        same flux.
    coefficient : float
        Limb-darkening coefficient h; zero for a blackbody.
    """

    model: Literal["blackbody", "limb-darkened"] = "blackbody"
    coefficient: float = 0.0
