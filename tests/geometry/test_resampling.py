"""Weighted sets: thinning without bias, quantiles that keep the infinite, errors of medians."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from exptime.geometry.resampling import effective_number, median_error, thin, weighted_quantiles

QUANTILES = np.array([0.16, 0.5, 0.84])


def test_effective_number() -> None:
    """Equal weights count in full, one heavy weight counts once, none counts nothing."""
    assert effective_number(np.full(40, 0.3)) == pytest.approx(40.0)
    assert effective_number(np.array([1.0, 1e-9])) == pytest.approx(1.0)
    assert effective_number(np.zeros(5)) == 0.0


@given(st.integers(0, 2**31), st.integers(1, 60), st.floats(0.0, 6.0))
def test_thinning_keeps_the_count_and_the_whole(seed: int, count: int, spread: float) -> None:
    """Exactly the number asked for, each once, of positive weight; the new weights sum to one."""
    random = np.random.default_rng(seed)
    weights = np.exp(spread * random.standard_normal(80))
    weights[random.random(80) < 0.2] = 0.0
    indices, share = thin(weights, count, random)
    assert len(indices) == min(count, np.count_nonzero(weights))
    assert np.all(np.diff(indices) > 0)
    assert np.all(weights[indices] > 0.0)
    assert share.sum() == pytest.approx(1.0, rel=1e-12)


@pytest.mark.parametrize("spread", [0.3, 1.0, 3.0])
def test_thinning_has_no_bias(spread: float) -> None:
    """The mean over 4000 thinnings of each member's weight is its weight, to five errors."""
    random = np.random.default_rng(11)
    weights = np.exp(spread * random.standard_normal(30))
    weights /= weights.sum()
    total, trials, light = np.zeros(30), 4000, 1.0
    for _ in range(trials):
        indices, share = thin(weights, 8, random)
        total[indices] += share
        light = min(light, float(share.min()))
    # A light member is picked with chance w/light and then weighs `light`.
    error = np.sqrt(weights * light / trials)
    np.testing.assert_array_less(np.abs(total / trials - weights), 5.0 * error)


def test_thinning_a_small_set_changes_nothing() -> None:
    """Fewer members than wanted: all of them with their own weights."""
    indices, share = thin(np.array([0.0, 3.0, 1.0]), 5, np.random.default_rng(1))
    np.testing.assert_array_equal(indices, [1, 2])
    np.testing.assert_allclose(share, [0.75, 0.25])


def test_quantiles_of_equal_weights_are_the_textbook_ones() -> None:
    """Against numpy's rule with positions (k + 1/2)/n."""
    values = np.random.default_rng(3).standard_normal((101, 2))
    expected = np.quantile(values, QUANTILES, axis=0, method="hazen")
    found = weighted_quantiles(values, np.full(101, 1.0 / 101.0), QUANTILES)
    np.testing.assert_allclose(found, expected, rtol=1e-9)


def test_a_weight_counts_like_so_many_members() -> None:
    """Integer weights against repeated members, up to the steps between members."""
    random = np.random.default_rng(9)
    values, times = np.sort(random.standard_normal(4000)), random.integers(1, 6, 4000)
    found = weighted_quantiles(values, times / times.sum(), QUANTILES)
    repeated = np.quantile(np.repeat(values, times), QUANTILES, method="hazen")
    np.testing.assert_allclose(found, repeated, atol=2.0 * np.diff(values[400:3600]).max())


@pytest.mark.parametrize(
    ("infinite", "expected"), [(1, [False, False, False]), (3, [False, False, True])]
)
def test_infinite_members_count(infinite: int, expected: list[bool]) -> None:
    """Of ten equal members one or three infinite: never dropped, so p84 is infinite with three."""
    values = np.concatenate([np.arange(10.0 - infinite), np.full(infinite, np.inf)])
    found = weighted_quantiles(values, np.full(10, 0.1), QUANTILES)
    assert np.isinf(found).tolist() == expected
    assert not np.isnan(found).any()
    # Finite quantiles are those of the set with any large number in place of the infinite.
    large = weighted_quantiles(np.where(np.isinf(values), 1e9, values), np.full(10, 0.1), QUANTILES)
    finite = np.isfinite(found)
    np.testing.assert_allclose(found[finite], large[finite])


def test_quantiles_of_infinite_members_alone_and_of_one_member() -> None:
    """All infinite: infinite; one member: itself three times."""
    assert np.isinf(weighted_quantiles(np.full(4, np.inf), np.full(4, 0.25), QUANTILES)).all()
    assert weighted_quantiles(np.array([3.0]), np.ones(1), QUANTILES).tolist() == [3.0, 3.0, 3.0]


def test_quantiles_grow() -> None:
    """p16 <= p50 <= p84 for many weighted sets with infinite members."""
    random = np.random.default_rng(21)
    for _ in range(200):
        values = np.where(random.random(12) < 0.3, np.inf, random.random(12))
        weights = random.exponential(size=12) ** 3
        found = weighted_quantiles(values, weights / weights.sum(), QUANTILES)
        assert found[0] <= found[1] <= found[2]


def test_the_error_of_a_median_is_the_known_one() -> None:
    """Normal numbers: the median of n has the error sqrt(pi/2n); 400 resamples of 2000."""
    random = np.random.default_rng(17)
    values = 10.0 + random.standard_normal(2000)
    found = median_error(values, np.full(2000, 1.0 / 2000.0), random)
    expected = math.sqrt(0.5 * math.pi / 2000.0) / 10.0
    # The bootstrap of a median is itself good to about n^(-1/4), here 15 per cent.
    assert found == pytest.approx(expected, rel=0.3)


def test_the_error_of_an_infinite_median_is_infinite() -> None:
    """Also where only some of the resamples are."""
    random = np.random.default_rng(1)
    values = np.concatenate([np.ones(11), np.full(10, np.inf)])
    assert median_error(values, np.full(21, 1.0 / 21.0), random) == math.inf
