"""Weighted sets: effective number, thinning without bias, quantiles and their errors."""

from __future__ import annotations

import numpy as np

from exptime.arrays import Floats, Integers

_RESAMPLES = 400


def effective_number(weights: Floats) -> float:
    """Return (sum w)²/sum w²; zero when all weights are."""
    total = float(np.sum(weights))
    return total**2 / float(np.sum(weights**2)) if total > 0.0 else 0.0


def thin(weights: Floats, count: int, random: np.random.Generator) -> tuple[Integers, Floats]:
    """Choose members of a weighted set, each at most once, without bias.

    Parameters
    ----------
    weights : ndarray, shape (n,)
        Not negative.
    count : int
        Number to choose.
    random : numpy.random.Generator
        Source of the one random number needed.

    Returns
    -------
    indices : ndarray of int, shape (m,)
        Increasing; m = count, or less when fewer weights are positive.
    weights : ndarray, shape (m,)
        New weights, summing to one.

    References
    ----------
    Fearnhead & Clifford 2003, J. R. Stat. Soc. B 65, 887: members heavier than 1/c are kept with
    their weight, the others stand with weight 1/c when systematic sampling picks them.
    """
    share = weights / weights.sum()
    positive = np.nonzero(share > 0.0)[0]
    if len(positive) <= count:
        return positive, share[positive]
    level = _threshold(share[positive], count)
    chance = np.minimum(share * level, 1.0)
    ends = np.cumsum(chance)
    marks = random.random() + np.arange(count)
    # The last end is `count` up to rounding: never look past it.
    indices = np.unique(np.searchsorted(ends, np.minimum(marks, ends[-1] * (1 - 1e-12)), "right"))
    indices = indices[share[indices] > 0.0]
    kept = np.maximum(share[indices], 1.0 / level)
    return indices, kept / kept.sum()


def _threshold(share: Floats, count: int) -> float:
    """Solve sum of min(c w, 1) = count for c."""
    ordered = np.sort(share)[::-1]
    rest = np.cumsum(ordered[::-1])[::-1]
    for heavy in range(count):
        level = (count - heavy) / float(rest[heavy])
        if level * ordered[heavy] <= 1.0:
            return level
    return 1.0 / float(ordered[count - 1])


def weighted_quantiles(values: Floats, weights: Floats, quantiles: Floats) -> Floats:
    """Quantiles of a weighted set; infinite members count.

    Parameters
    ----------
    values : ndarray, shape (n, ...)
        May hold +infinity.
    weights : ndarray, shape (n,)
        Summing to one.
    quantiles : ndarray, shape (q,)
        0 to 1.

    Returns
    -------
    ndarray, shape (q, ...)
        The smallest value at which the cumulative weight, half of its own included, reaches
        the quantile, interpolated between finite neighbours.
    """
    values = np.asarray(values, float)
    flat = values.reshape(len(values), -1)
    columns = [
        _quantiles_of(flat[:, column], weights, quantiles) for column in range(flat.shape[1])
    ]
    return np.stack(columns, axis=1).reshape(len(quantiles), *values.shape[1:])


def _quantiles_of(values: Floats, weights: Floats, quantiles: Floats) -> Floats:
    order = np.argsort(values, kind="stable")
    ordered, share = values[order], weights[order]
    position = np.cumsum(share) - 0.5 * share
    upper = np.clip(np.searchsorted(position, quantiles), 0, len(ordered) - 1)
    lower = np.clip(upper - 1, 0, None)
    gap = position[upper] - position[lower]
    part = np.divide(
        np.clip(quantiles - position[lower], 0.0, None), gap, out=np.ones_like(gap), where=gap > 0
    )
    part = np.clip(part, 0.0, 1.0)
    low, high = ordered[lower], ordered[upper]
    with np.errstate(invalid="ignore"):
        between = low + part * (high - low)
    return np.where(np.isfinite(high), between, np.where(part > 0.0, high, low))


def median_error(values: Floats, weights: Floats, random: np.random.Generator) -> float:
    """Monte-Carlo error of a weighted median over the median, by resampling the set.

    Parameters
    ----------
    values, weights : ndarray, shape (n,)
        As for `weighted_quantiles`.
    random : numpy.random.Generator
        Source of the resamples.

    Returns
    -------
    float
        Infinite when the median, or a resampled one, is.
    """
    half = np.array([0.5])
    center = float(weighted_quantiles(values, weights, half)[0])
    medians = []
    for _ in range(_RESAMPLES):
        chosen = random.integers(0, len(values), len(values))
        share = weights[chosen] / weights[chosen].sum()
        medians.append(float(weighted_quantiles(values[chosen], share, half)[0]))
    if not np.all(np.isfinite(medians)) or not np.isfinite(center):
        return float("inf")
    return float(np.std(medians)) / center
