"""Every number in a report gets its digits in one place."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from exptime.report.digits import (
    duration,
    percent,
    precision,
    requested_time,
    share,
    share_number,
    significant,
    uncertainty,
    value_with_uncertainty,
)


@pytest.mark.external
@pytest.mark.parametrize(
    ("value", "sigma", "expected"),
    [
        (0.827, 0.119, "0.83 ± 0.12"),
        (0.827, 0.367, "0.8 ± 0.4"),
        (0.827, 0.354, "0.83 ± 0.35"),
        (0.827, 0.355, "0.8 ± 0.4"),
        (0.827, 0.949, "0.8 ± 0.9"),
        (0.827, 0.950, "0.8 ± 1.0"),
        (12.134712, 0.2927, "12.13 ± 0.29"),
        (1234.0, 567.0, "1200 ± 600"),
        (1234.0, 998.0, "1200 ± 1000"),
        (0.18861, 0.0034, "0.1886 ± 0.0034"),
    ],
)
def test_uncertainties_are_rounded_by_the_354_949_rule(
    value: float, sigma: float, expected: str
) -> None:
    """Particle Data Group, Review of Particle Physics, Introduction: its 0.827 and the limits."""
    assert value_with_uncertainty(value, sigma) == expected


@pytest.mark.parametrize(
    ("value", "sigma", "expected"),
    [
        (1.4, 0.0, "1.40 (fixed)"),
        (12.0, math.inf, "12.0 (unconstrained)"),
        (12.0, 1e30, "12.0 (unconstrained)"),
        (12.0, math.nan, "not known"),
        (math.nan, 1.0, "not known"),
        (0.0, 0.12, "0.00 ± 0.12"),
        (-3.21, 0.12, "-3.21 ± 0.12"),
    ],
)
def test_strange_uncertainties_have_words(value: float, sigma: float, expected: str) -> None:
    """Nothing prints nan, inf or a row of zeros."""
    assert value_with_uncertainty(value, sigma) == expected


@pytest.mark.parametrize(
    ("seconds", "expected"),
    [
        (1.2e6, "1.2 Ms"),
        (1.2000001e6, "1.2 Ms"),
        (3.5e5, "350 ks"),
        (354001.0, "354 ks"),
        (999_999.0, "1 Ms"),
        (1e5, "100 ks"),
        (12.0, "12 s"),
        (0.25, "0.25 s"),
        (0.0, "0 s"),
        (math.inf, "not reached"),
        (math.nan, "not known"),
        (1e8, "100 Ms"),
    ],
)
def test_times_stand_in_natural_units(seconds: float, expected: str) -> None:
    """Seconds, kiloseconds, megaseconds; three digits at most."""
    assert duration(seconds) == expected


def test_times_with_a_monte_carlo_error_keep_two_digits() -> None:
    """To the nearest, carried into the next unit where it must."""
    assert [duration(each, 2) for each in (1.249e6, 351e3, 996e3)] == ["1.2 Ms", "350 ks", "1 Ms"]


@pytest.mark.parametrize(
    ("seconds", "expected"),
    [
        (278_506.0, "280 ks"),
        (281_000.0, "285 ks"),
        (300_000.0, "300 ks"),
        (300_000.00000001, "300 ks"),
        (501_000.0, "510 ks"),
        (3_373_239.0, "3.38 Ms"),
        (12.0, "5 ks"),
        (math.inf, "not reached"),
    ],
)
def test_requested_times_are_whole_5_or_10_ks(seconds: float, expected: str) -> None:
    """Common practice of proposals (no source): a multiple of 5 ks, of 10 ks when long."""
    assert requested_time(seconds) == expected


@pytest.mark.parametrize(
    ("fraction", "words", "number"),
    [
        (0.0, "none", "0 %"),
        (0.004, "less than 1 per cent", "< 1 %"),
        (0.46, "46 per cent", "46 %"),
        (0.996, "more than 99 per cent", "> 99 %"),
        (1.0, "all", "100 %"),
        (1.0 - 1e-12, "all", "100 %"),
        (math.nan, "not known", "not known"),
    ],
)
def test_a_share_is_never_rounded_to_all_or_none(fraction: float, words: str, number: str) -> None:
    """All and none are said only where they hold."""
    assert share(fraction) == words
    assert share_number(fraction) == number


def test_precisions_and_plain_numbers() -> None:
    """Two digits for what is itself an uncertainty; powers of ten where zeros would run on."""
    assert precision(0.29, 12.0) == "2.4 %"
    assert precision(math.inf, 12.0) == precision(1e9, 12.0) == "unconstrained"
    assert precision(1.0, 0.0) == "not known"
    assert percent(0.05) == "5"
    assert percent(0.123) == "12"
    assert percent(1.0) == "100"
    assert uncertainty(0.2927, 12.0) == "0.29"
    assert uncertainty(math.nan, 12.0) == "not known"
    assert significant(22_763_811.0, 3) == "2.28 × 10⁷"
    assert significant(3.2e-7, 2) == "3.2 × 10⁻⁷"
    assert significant(math.inf, 3) == "infinite"
    assert significant(0.0, 3) == "0"
    assert significant(9.996, 3) == "10.0"


@given(st.floats(1e-3, 1e9), st.floats(1e-4, 1e3))
def test_rounding_keeps_the_uncertainty_within_its_digits(value: float, sigma: float) -> None:
    """The rule moves an uncertainty by at most 15 per cent, a value by at most half of it."""
    words = value_with_uncertainty(value, sigma)
    if "±" in words:
        shown_value, shown_sigma = map(float, words.split(" ± "))
        # 355 becomes 400: 12.7 per cent; 145 becomes 140 or 150: 3.4 per cent.
        assert abs(shown_sigma / sigma - 1.0) < 0.13
        assert abs(shown_value - value) <= 0.51 * shown_sigma


@given(st.floats(1.0, 1e8))
def test_requested_times_are_never_too_short(seconds: float) -> None:
    """What is asked for suffices, and exceeds the need by less than a step."""
    units = {"s": 1.0, "ks": 1e3, "Ms": 1e6}
    number, unit = requested_time(seconds).split()
    shown = float(number) * units[unit]
    assert seconds * (1.0 - 1e-9) <= shown <= seconds + 1e4
