"""The moving, oblate surface and its light, written with vectors and no shared code.

Relations: Poutanen & Beloborodov 2006, MNRAS 373, 836 (flux of a moving spot); Morsink, Leahy,
Cadeau & Braga 2007, ApJ 663, 1244 (oblate surface); AlGendy & Morsink 2014, ApJ 791, 78 (figure).
Constants are those of CODATA 2018 and IAU 2015.
"""

from __future__ import annotations

import math
from typing import Literal, NamedTuple, TypeAlias

import numpy as np
from numpy.polynomial import chebyshev
from scipy import constants

from exptime.arrays import Floats
from exptime.star.records import Emission, Star
from tests.star.direct_rays import trace

Mistake: TypeAlias = Literal[
    "none",
    "drop_delay",
    "flip_tilt",
    "forget_gamma",
    "limb_at_static_angle",
    "forget_redshift_in_beta",
    "drop_backward_rays",
    "drop_radial_delay",
]
"""Physics got wrong on purpose, to see what a comparison would notice."""

LIGHT_KM_S = constants.c / 1e3
SOLAR_KM = 1.3271244e20 / constants.c**2 / 1e3
PARSEC_CM = 648000.0 / math.pi * constants.au * 1e2
HC_KEV_CM = constants.h * constants.c / (1e3 * constants.e) * 1e2
PHOTONS = 2.0 * constants.c * 1e2 / HC_KEV_CM**3
"""2/(h³c²), photons cm^-2 s^-1 keV^-3 sr^-1."""

_ANGLES = 56  # terms of the series in the emission angle and in the deflection


class Light(NamedTuple):
    """The ray that reaches the observer from a surface element; directions seen at the star."""

    cos_alpha: Floats
    cos_sigma: Floats
    cos_xi: Floats
    lensing: Floats
    late_s: Floats


class Belt:
    """Rows of surface elements at given colatitudes; any azimuth from the observer's meridian."""

    def __init__(self, star: Star, colatitude: Floats, mistake: Mistake = "none") -> None:
        self.mistake, self.spin_hz = mistake, star.spin_hz
        self.theta = colatitude
        self.sin_i, self.cos_i = math.sqrt(1.0 - star.cos_inclination**2), star.cos_inclination
        horizon, equator = 2.0 * SOLAR_KM * star.mass_msun, star.radius_km
        self.radius, slope = _figure(star, colatitude)
        self.u = horizon / self.radius
        redshift = np.sqrt(1.0 - self.u)
        self.slope = slope / (self.radius * redshift)
        if mistake == "flip_tilt":
            self.slope = -self.slope
        self.area = self.radius**2 * np.sqrt(1.0 + self.slope**2)
        speed = 2.0 * math.pi * star.spin_hz * self.radius * np.sin(colatitude) / LIGHT_KM_S
        self.beta = speed if mistake == "forget_redshift_in_beta" else speed / redshift
        self.radial_s = (
            (equator - self.radius)
            + horizon * np.log((equator - horizon) / (self.radius - horizon))
        ) / LIGHT_KM_S
        if mistake == "drop_radial_delay":
            self.radial_s = np.zeros_like(self.radial_s)
        self._fit_rays()
        edge = self._edge_azimuth()
        late = self.arrival(edge, np.arange(len(edge))) - edge / (2.0 * math.pi)
        self.arc = (late - edge / (2.0 * math.pi), late + edge / (2.0 * math.pi))

    def _fit_rays(self) -> None:
        """Fit series of emission angle and delay in the deflection, row by row."""
        steepest = math.pi / 2.0 + np.arctan(np.abs(self.slope)) + 0.004
        points = np.cos(math.pi * (np.arange(_ANGLES) + 0.5) / _ANGLES)
        angles = 0.5 * steepest * (points[:, None] + 1.0)
        bend, late = trace(angles, self.u)
        to_bend, to_late = _series(bend), _series(late)
        # psi(alpha) is monotone: find by Newton's method the angles of the nodes in psi.
        self.psi_max = chebyshev.chebval(1.0, to_bend)
        if np.any(self.psi_max > math.pi):
            message = "a point of this star has two images"
            raise ValueError(message)
        wanted = 0.5 * self.psi_max * (points[:, None] + 1.0)
        t = np.broadcast_to(points[:, None], wanted.shape).copy()
        slope = chebyshev.chebder(to_bend)
        for _ in range(40):
            step = (_value(t, to_bend) - wanted) / _value(t, slope)
            t = np.clip(t - step, -1.0, 1.0)
            if np.max(np.abs(step)) < 1e-14:
                break
        self.angle_series = _series(0.5 * steepest * (t + 1.0))
        self.angle_slope = chebyshev.chebder(self.angle_series)
        self.late_series = _series(_value(t, to_late))

    def light(self, azimuth: Floats, row: Floats) -> Light:
        """Return the rays of elements; rows beyond the last ray get the last ray."""
        theta = self.theta[row]
        sine, cosine = np.sin(theta), np.cos(theta)
        # The observer along (sin i, 0, cos i), resolved along radius, colatitude and longitude.
        radial = self.sin_i * sine * np.cos(azimuth) + self.cos_i * cosine
        southward = self.sin_i * cosine * np.cos(azimuth) - self.cos_i * sine
        eastward = -self.sin_i * np.sin(azimuth)
        sin_psi = np.hypot(southward, eastward)
        psi = np.arctan2(sin_psi, radial)
        t = np.minimum(2.0 * psi / self.psi_max[row] - 1.0, 1.0)
        alpha = chebyshev.chebval(t, self.angle_series[:, row], tensor=False)
        slope = chebyshev.chebval(t, self.angle_slope[:, row], tensor=False)
        slope *= 2.0 / self.psi_max[row]
        late = chebyshev.chebval(t, self.late_series[:, row], tensor=False)
        straight = psi < 1e-7
        ratio = np.where(straight, slope, np.sin(alpha) / np.where(straight, 1.0, sin_psi))
        # Ray = cos(alpha) radius + sin(alpha) (unit vector towards the observer's side).
        normal = 1.0 / np.sqrt(1.0 + self.slope[row] ** 2)
        late_s = self.radius[row] / LIGHT_KM_S * late + self.radial_s[row]
        if self.mistake == "drop_delay":
            late_s = np.zeros_like(late_s)
        return Light(
            cos_alpha=np.cos(alpha),
            cos_sigma=normal * (np.cos(alpha) - self.slope[row] * ratio * southward),
            cos_xi=ratio * eastward,
            lensing=ratio * slope,
            late_s=late_s,
        )

    def shows(self, azimuth: Floats, row: Floats) -> Floats:
        """Return what is positive where the element shows."""
        light = self.light(azimuth, row)
        if self.mistake == "drop_backward_rays":
            return np.minimum(light.cos_sigma, light.cos_alpha)
        return light.cos_sigma

    def _edge_azimuth(self) -> Floats:
        """Return the azimuth beyond which a row is hidden: 0 never seen, pi always."""
        every = np.arange(len(self.theta))
        grid = np.linspace(0.0, math.pi, 25)
        seen = np.array([self.shows(np.full(len(every), g), every) > 0.0 for g in grid])
        if np.any(seen[1:] & ~seen[:-1]):
            message = "a row shows in two arcs"
            raise ValueError(message)
        count = seen.sum(axis=0)
        low, high = grid[np.maximum(count - 1, 0)], grid[np.minimum(count, len(grid) - 1)]
        for _ in range(52):
            middle = 0.5 * (low + high)
            visible = self.shows(middle, every) > 0.0
            low, high = np.where(visible, middle, low), np.where(visible, high, middle)
        return np.where(count == 0, 0.0, np.where(count == len(grid), math.pi, low))

    def arrival(self, azimuth: Floats, row: Floats) -> Floats:
        """Return the observer phase of what left at this azimuth, for longitude zero, turns."""
        return azimuth / (2.0 * math.pi) + self.spin_hz * self.light(azimuth, row).late_s

    def emission_azimuth(self, arrival: Floats, row: Floats) -> Floats:
        """Return the azimuth from which the flux of an observer phase comes, by iteration."""
        azimuth = 2.0 * math.pi * (arrival - self.spin_hz * self.radial_s[row])
        for _ in range(60):
            light = self.light(azimuth, row)
            miss = azimuth / (2.0 * math.pi) + self.spin_hz * light.late_s - arrival
            # Only the speed of convergence depends on this slope.
            slope = 1.0 if self.mistake == "drop_delay" else 1.0 - self.beta[row] * light.cos_xi
            azimuth = azimuth - 2.0 * math.pi * miss / slope
            if np.max(np.abs(miss), initial=0.0) < 1e-13:
                return azimuth
        message = "the emission azimuth does not converge"
        raise ArithmeticError(message)

    def photons(
        self,
        azimuth: Floats,
        row: Floats,
        temperature_kev: float,
        emission: Emission,
        energies: Floats,
    ) -> Floats:
        """Return flux times squared distance per unit solid angle of surface, in cm²."""
        light, beta = self.light(azimuth, row), self.beta[row]
        gamma = 1.0 / np.sqrt(1.0 - beta**2)
        doppler = 1.0 / (gamma * (1.0 - beta * light.cos_xi))
        mu = doppler * np.maximum(light.cos_sigma, 0.0)
        area = self.area[row] * (1.0 if self.mistake == "forget_gamma" else gamma)
        limb = mu / doppler if self.mistake == "limb_at_static_angle" else mu
        h = emission.coefficient if emission.model == "limb-darkened" else 0.0
        factor = mu * light.lensing * area * 1e10 / (1.0 - self.u[row])
        factor *= (1.0 + h * limb) / (1.0 + 2.0 * h / 3.0)
        blueshift = doppler * np.sqrt(1.0 - self.u[row])
        ratio = energies / (blueshift[:, None] * temperature_kev)
        return np.asarray(PHOTONS * energies**2 / np.expm1(ratio) * factor[:, None])


def _figure(star: Star, colatitude: Floats) -> tuple[Floats, Floats]:
    """Return the radius and its derivative by colatitude, km."""
    compactness = SOLAR_KM * star.mass_msun / star.radius_km
    spin = (2.0 * math.pi * star.spin_hz * star.radius_km / LIGHT_KM_S) ** 2 / compactness
    flat = spin * (-0.788 + 1.030 * compactness) if star.figure == "oblate" else 0.0
    radius = star.radius_km * (1.0 + flat * np.cos(colatitude) ** 2)
    return radius, -2.0 * star.radius_km * flat * np.sin(colatitude) * np.cos(colatitude)


def _series(values: Floats) -> Floats:
    """Return Chebyshev coefficients of columns given at the Chebyshev points."""
    count = len(values)
    order = np.arange(count)
    cosines = np.cos(math.pi * np.outer(order, order + 0.5) / count)
    series = 2.0 / count * cosines @ values
    series[0] *= 0.5
    return np.asarray(series)


def _value(t: Floats, series: Floats) -> Floats:
    """Evaluate one series a column."""
    return np.asarray(chebyshev.chebval(t, series[:, None, :], tensor=False))
