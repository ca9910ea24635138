"""Roots of smooth functions, many at a time."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from exptime.arrays import Floats

_STEPS = 60


def bracketed_roots(
    function: Callable[[Floats], Floats],
    low: Floats,
    high: Floats,
    values: tuple[Floats, Floats],
    tolerance: float = 1e-12,
) -> Floats:
    """Find one root in each bracket by secant steps with bisection as a safeguard.

    Parameters
    ----------
    function : callable
        Maps an array to an array of the same shape, element by element.
    low, high : ndarray, shape (n,)
        Ends of the brackets. Where the function has the same sign at both, the end with the
        smaller absolute value is returned.
    values : tuple of ndarray
        The function at `low` and at `high`.
    tolerance : float
        Stop when every bracket or step is smaller than this.

    Returns
    -------
    ndarray, shape (n,)
        Roots.

    Notes
    -----
    The Anderson-Björck variant of the false-position method: one end's value is scaled down
    when the other end moves twice running, so convergence stays faster than linear.
    """
    a, b = low.astype(float), high.astype(float)
    fa, fb = values
    same = fa * fb > 0.0
    nearest = np.where(np.abs(fa) < np.abs(fb), a, b)
    best = nearest.copy()
    for step in range(_STEPS):
        with np.errstate(all="ignore"):
            guess = b - fb * (b - a) / (fb - fa)
        outside = ~np.isfinite(guess) | ((guess - a) * (guess - b) > 0.0)
        guess = np.where(outside | (step % 8 == 7), 0.5 * (a + b), guess)
        value = function(guess)
        moved = np.abs(guess - best)
        best = guess
        crosses = value * fb <= 0.0
        with np.errstate(all="ignore"):
            scale = 1.0 - value / fb
        scale = np.where((scale > 0.0) & np.isfinite(scale), scale, 0.5)
        a, fa = np.where(crosses, b, a), np.where(crosses, fb, fa * scale)
        b, fb = guess, value
        done = (np.abs(b - a) < tolerance) | (moved < tolerance) | (value == 0.0) | same
        if step > 1 and done.all():
            break
    return np.where(same, nearest, best)
