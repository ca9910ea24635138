"""Remake the table of light rays: ``python -m exptime.tables.rays [FILE]``.

Two-dimensional Chebyshev series, in X = psi²/psi_h(u)² and u, of (1 - cos alpha)/X and
(c dt/R)/X, and a one-dimensional one of psi_h(u), the deflection at alpha = 90 deg. Both
functions are analytic at X = 0, and X reaches past 1 for surfaces tilted by rotation.
"""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np

from exptime.arrays import Floats
from exptime.limits import RAY_TABLE_MAX_U, RAY_TABLE_MAX_X
from exptime.star.rays import deflection_of_angle, delay_of_angle

COEFFICIENTS_X = 48
COEFFICIENTS_U = 44
_STEEPEST = np.pi / 2 + 0.45


def chebyshev_points(count: int, lower: float, upper: float) -> Floats:
    """Return the Chebyshev points of the first kind on an interval, increasing."""
    t = -np.cos(np.pi * (np.arange(count) + 0.5) / count)
    return np.asarray(0.5 * (upper + lower) + 0.5 * (upper - lower) * t)


def fit_axis(values: Floats, axis: int) -> Floats:
    """Return Chebyshev coefficients of samples at `chebyshev_points`, along one axis."""
    count = values.shape[axis]
    t = -np.cos(np.pi * (np.arange(count) + 0.5) / count)
    basis = np.polynomial.chebyshev.chebvander(t, count - 1)
    scale = np.full(count, 2.0 / count)
    scale[0] = 1.0 / count
    return np.moveaxis(
        np.tensordot(scale[:, None] * basis.T, np.moveaxis(values, axis, 0), axes=1), 0, axis
    )


def invert_deflection(psi: Floats, u: Floats) -> Floats:
    """Solve deflection_of_angle(alpha, u) = psi for alpha (rad), by bisection then secants."""
    low, high = np.zeros_like(psi), np.full_like(psi, _STEEPEST)
    for _ in range(24):
        middle = 0.5 * (low + high)
        value = deflection_of_angle(middle, u)
        above = np.isnan(value) | (value > psi)
        low, high = np.where(above, low, middle), np.where(above, middle, high)
    a, b = low, 0.5 * (low + high)
    fa, fb = deflection_of_angle(a, u) - psi, deflection_of_angle(b, u) - psi
    for _ in range(3):
        with np.errstate(all="ignore"):
            step = np.where(fb != fa, fb * (b - a) / (fb - fa), 0.0)
        a, fa, b = b, fb, b - step
        fb = deflection_of_angle(b, u) - psi
    return b


def compute() -> dict[str, Floats]:
    """Compute the three series.

    Returns
    -------
    dict of ndarray
        ``bend`` and ``delay``, shape (COEFFICIENTS_U, COEFFICIENTS_X), and ``horizon``, shape
        (COEFFICIENTS_U,).
    """
    x = chebyshev_points(COEFFICIENTS_X, 0.0, RAY_TABLE_MAX_X)
    u = chebyshev_points(COEFFICIENTS_U, 0.0, RAY_TABLE_MAX_U)
    horizon = deflection_of_angle(np.full_like(u, np.pi / 2), u)
    psi = horizon[:, None] * np.sqrt(x)
    grid_u = np.broadcast_to(u[:, None], psi.shape)
    alpha = invert_deflection(psi, grid_u)
    bend = 2.0 * np.sin(0.5 * alpha) ** 2 / x
    late = delay_of_angle(alpha, grid_u) / x
    return {
        "bend": fit_axis(fit_axis(bend, 0), 1),
        "delay": fit_axis(fit_axis(late, 0), 1),
        "horizon": fit_axis(horizon, 0),
    }


def main() -> None:
    """Write the table to the file named, or to where the package keeps it."""
    default = Path(__file__).with_name("data") / "rays.npz"
    target = Path(sys.argv[1]) if len(sys.argv) > 1 else default
    with target.open("wb") as stream:
        series = compute()
        np.savez_compressed(
            stream, bend=series["bend"], delay=series["delay"], horizon=series["horizon"]
        )


if __name__ == "__main__":
    main()
