"""Light rays from a table: deflection, lensing and delay as smooth series.

The table holds Chebyshev series in X = (psi/psi_h(u))² and u; see `exptime.tables.rays` for how
it is made and `exptime.star.rays` for the integrals behind it. It agrees with them to 1e-12.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import numpy as np
from numpy.polynomial import chebyshev

from exptime._resources import shipped_table
from exptime.arrays import Floats
from exptime.limits import RAY_TABLE_MAX_U, RAY_TABLE_MAX_X

_NEGLIGIBLE = 2e-14
_SMALLEST_Y = 1e-15


@dataclass(frozen=True, slots=True)
class Bent:
    """What becomes of rays: arrays of one shape.

    Parameters
    ----------
    cos_alpha : ndarray
        Cosine of the emission angle to the radial direction.
    sine_ratio : ndarray
        sin(alpha)/sin(psi).
    lensing : ndarray
        d cos(alpha)/d cos(psi).
    delay : ndarray
        Delay behind the radial ray from the same radius, units of R/c.
    """

    cos_alpha: Floats
    sine_ratio: Floats
    lensing: Floats
    delay: Floats


@dataclass(frozen=True, slots=True)
class RaySeries:
    """The table at fixed compactnesses, one per ring: Chebyshev series in X alone.

    Parameters
    ----------
    coefficients : ndarray, shape (3, n_x, n_ring)
        Series of (1 - cos alpha)/X, of its derivative with respect to X, and of
        (c dt/R)/X.
    psi_horizon : ndarray, shape (n_ring,)
        Deflection at alpha = 90 deg, rad.
    """

    coefficients: Floats
    psi_horizon: Floats

    def cos_alpha(self, cos_psi: Floats) -> Floats:
        """Return cos(alpha) for one cos(psi) per ring, shape (..., n_ring)."""
        x, _ = self._variable(cos_psi, self.psi_horizon)
        series = self.coefficients[0]
        t = x * (2.0 / RAY_TABLE_MAX_X) - 1.0
        # Clenshaw's rule: few points, so the Python loop costs less than a table of polynomials.
        later, latest = np.zeros_like(t), np.zeros_like(t)
        for row in series[:0:-1]:
            latest, later = row + 2.0 * t * latest - later, latest
        return np.asarray(1.0 - x * (series[0] + t * latest - later))

    def bend(self, cos_psi: Floats) -> Bent:
        """Bend rays.

        Parameters
        ----------
        cos_psi : ndarray, shape (n_ring, n_node)
            Cosine of the angle between radius vector and observer.

        Returns
        -------
        Bent
            Arrays of shape (n_ring, n_node). Beyond X = 1.6 they are those of X = 1.6, where
            no surface within the limits of the model is visible.
        """
        horizon = self.psi_horizon[:, None]
        x, psi = self._variable(cos_psi, horizon)
        terms = self.coefficients.shape[1]
        polynomials = np.empty((x.shape[0], terms, x.shape[1]))
        t = x * (2.0 / RAY_TABLE_MAX_X) - 1.0
        polynomials[:, 0] = 1.0
        polynomials[:, 1] = t
        twice = 2.0 * t
        for k in range(2, terms):
            np.multiply(twice, polynomials[:, k - 1], out=polynomials[:, k])
            polynomials[:, k] -= polynomials[:, k - 2]
        value, slope, late = np.moveaxis(np.moveaxis(self.coefficients, 2, 0) @ polynomials, 1, 0)
        drop = x * value
        cos_alpha = 1.0 - drop
        sin_psi = np.sin(psi)
        y = np.maximum(1.0 - cos_psi, _SMALLEST_Y)
        return Bent(
            cos_alpha=cos_alpha,
            sine_ratio=np.sqrt(drop * (2.0 - drop) / (y * (2.0 - y))),
            lensing=(value + x * slope) / horizon**2 * 2.0 * psi / sin_psi,
            delay=x * late,
        )

    @staticmethod
    def _variable(cos_psi: Floats, horizon: Floats) -> tuple[Floats, Floats]:
        y = np.clip(1.0 - cos_psi, _SMALLEST_Y, 2.0 - _SMALLEST_Y)
        psi = 2.0 * np.arcsin(np.sqrt(0.5 * y))
        return np.minimum((psi / horizon) ** 2, RAY_TABLE_MAX_X), psi


@dataclass(frozen=True, slots=True)
class RayTable:
    """Chebyshev series in X and u.

    Parameters
    ----------
    series : ndarray, shape (3, n_u, n_x)
        Series of (1 - cos alpha)/X, of its derivative with respect to X, and of (c dt/R)/X.
    horizon : ndarray, shape (n_u,)
        Series of psi_h(u).
    """

    series: Floats
    horizon: Floats

    def at(self, u: Floats) -> RaySeries:
        """Return the series in X for each compactness.

        Parameters
        ----------
        u : ndarray, shape (n_ring,)
            2GM/(Rc²), 0 to 0.56.
        """
        angle = np.arccos(np.asarray(u) * (2.0 / RAY_TABLE_MAX_U) - 1.0)
        vander = np.cos(angle[:, None] * np.arange(len(self.horizon)))
        stack = np.swapaxes(vander @ self.series, 1, 2)
        large = np.abs(stack[::2]).max(axis=(0, 2)) > _NEGLIGIBLE
        terms = max(3, len(large) - int(np.argmax(large[::-1])))
        return RaySeries(stack[:, :terms], vander @ self.horizon)


@cache
def load_ray_table() -> RayTable:
    """Read the table that ships with the package; every call returns the same constant."""
    with shipped_table("rays.npz").open("rb") as stream, np.load(stream) as arrays:
        bend, late, horizon = arrays["bend"], arrays["delay"], arrays["horizon"]
    slope = np.zeros_like(bend)
    slope[:, :-1] = chebyshev.chebder(bend, scl=2.0 / RAY_TABLE_MAX_X, axis=1)
    return RayTable(np.stack([bend, slope, late]), horizon)
