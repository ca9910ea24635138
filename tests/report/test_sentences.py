"""The answer in words, for every state of a result."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from exptime.report.background import limits, method, references
from exptime.report.feasibility import feasibility
from exptime.report.goals import costs, exposure_factor_at_half_brightness
from exptime.report.sentences import answers, headline, notes_on_goals
from exptime.study.records import ExpectedData
from exptime.target.records import Measured
from tests.report import results
from tests.report.results import EXPOSURES_S, STATES


@pytest.mark.parametrize(
    ("state", "sentence"),
    [
        (
            "one-exposure",
            "5 per cent in radius: half of the geometries by 1.2 Ms, 84 per cent by 9.4 Ms; at the "
            "requested 1 Ms, 46 per cent reach it.",
        ),
        (
            "normal",
            "5 per cent in radius: half of the geometries by 1.2 Ms, 84 per cent by 9.4 Ms; at the "
            "longest requested 1 Ms, 46 per cent reach it.",
        ),
        (
            "margin",
            "5 per cent in radius: half of the geometries by 1.4 Ms, 84 per cent by 11 Ms; at the "
            "longest requested 1 Ms, 44 per cent reach it (including a margin of 15 per cent).",
        ),
        (
            "no-goal",
            "5 per cent in radius: half of the geometries do not reach it within 1 Ms; at the "
            "longest requested 1 Ms, 46 per cent reach it.",
        ),
        (
            "known",
            "5 per cent in radius: 694 ks at the geometry given; the longest requested 1 Ms is "
            "enough.",
        ),
        ("unconstrained", "5 per cent in radius: no geometry reaches it within 100 Ms."),
        (
            "partly-reached",
            "2 per cent in radius: half of the geometries do not reach it within 100 Ms; at the "
            "longest requested 1 Ms, 32 per cent reach it.",
        ),
        (
            "partly-beforehand",
            "20 per cent in radius: half of the geometries beforehand, 84 per cent by 400 ks; at "
            "the longest requested 1 Ms, all reach it.",
        ),
        (
            "prior-limited",
            "10 per cent in mass: known that well beforehand; no observation is needed for it.",
        ),
    ],
)
def test_the_headline_is_a_statement_over_geometries(state: str, sentence: str) -> None:
    """Word for word, in every state."""
    assert headline(STATES[state]()) == sentence


def test_the_share_of_the_headline_is_counted_by_hand() -> None:
    """Of fifty geometries those below 0.6 km at 1 Ms: 0.15 * 20^(k/49) <= 0.6 for k <= 22."""
    reached = math.floor(49 * math.log(0.6 / 0.15) / math.log(20.0)) + 1
    assert f"{2 * reached} per cent reach it" in headline(results.normal())


def test_a_prior_limited_goal_says_so_before_any_exposure() -> None:
    """It cannot be quoted as a measurement without its warning."""
    second = answers(results.prior_limited())[1]
    assert second.index("prior-limited") < second.index("200 ks")


@pytest.mark.parametrize(
    ("required_s", "precision", "flags", "uncertainty", "is_limited"),
    [
        (2e5, 0.05, (True, True, True, False, False), None, True),
        (6e5, 0.05, (True, True, True, False, False), None, False),
        # Beyond all exposures: 0.6 km is well below the 2.02 km of the flat prior.
        (5e7, 0.05, (True,) * 5, None, False),
        (5e7, 0.2, (True,) * 5, None, True),
        # A Gaussian prior of 0.8 km leaves 0.8 / sqrt(2) = 0.57 km where the data tell as much.
        (5e7, 0.05, (True,) * 5, 0.8, True),
        (5e7, 0.045, (True,) * 5, 0.8, False),
        # Before all exposures nothing is known but the size of the goal.
        (1e3, 0.05, (False,) * 5, None, False),
        (1e3, 0.2, (False,) * 5, None, True),
    ],
)
def test_prior_limited_is_judged_where_the_goal_is_met(
    required_s: float,
    precision: float,
    flags: tuple[bool, ...],
    uncertainty: float | None,
    is_limited: bool,
) -> None:
    """Not at the exposures that happen to be forecast."""
    base = results.normal()
    goal = results.goal_result("radius", precision, np.full(50, required_s), (required_s,) * 3)
    radius = Measured(value=12.0, uncertainty=uncertainty) if uncertainty else None
    forecast = replace(
        base,
        target=replace(base.target, radius=radius),
        radius=replace(base.radius, is_prior_limited=flags, prior_sigma=uncertainty or 2.02),
        goals=(goal,),
    )
    assert ("prior-limited" in headline(forecast)) is is_limited


def test_known_geometry_that_needs_longer_says_so() -> None:
    """What was requested is not enough."""
    forecast = results.known_geometry()
    goal = results.goal_result("radius", 0.02, np.array([4.34e6]), (4.34e6,) * 3)
    assert headline(replace(forecast, goals=(goal,))) == (
        "2 per cent in radius: 4.34 Ms at the geometry given; the longest requested 1 Ms is not "
        "enough."
    )
    never = results.goal_result("radius", 0.001, np.array([math.inf]), (math.inf,) * 3)
    assert headline(replace(forecast, goals=(never,), margin=0.1)) == (
        "0.1 per cent in radius: not reached within 100 Ms at the geometry given."
    )


def test_the_default_goal_is_read_off_the_curves() -> None:
    """Errors falling as the root of exposure are straight lines: the crossing is exact."""
    forecast = replace(results.without_goals(), exposures_s=EXPOSURES_S * 1e3)
    forecast = replace(
        forecast,
        geometries=tuple(
            replace(each, data_sigma_radius_km=each.data_sigma_radius_km / math.sqrt(1e3))
            for each in forecast.geometries
        ),
        exposures_s=EXPOSURES_S * 1e3,
    )
    cost = costs(forecast)[0]
    need = 1e6 * (results.SIGMAS_AT_1MS_KM / 0.6) ** 2
    low, high = EXPOSURES_S[0] * 1e3, EXPOSURES_S[-1] * 1e3
    wanted = np.where(need < low, low, np.where(need > high, math.inf, need))
    np.testing.assert_allclose(cost.required_s, wanted, rtol=1e-12)


def test_notes_say_that_no_goal_was_asked_for() -> None:
    """And only then."""
    assert any("No goal was asked for" in note for note in notes_on_goals(results.without_goals()))
    assert not any("No goal was asked" in note for note in notes_on_goals(results.normal()))


@pytest.mark.parametrize(
    ("background_per_s", "factor"),
    [(0.0, 2.0), (1e6, 4.0)],
)
def test_half_the_brightness_costs_two_to_four_times(
    background_per_s: float, factor: float
) -> None:
    """Poisson statistics: s²/(s+b) falls to a half without background, to a quarter under it."""
    forecast = replace(results.normal(), expected=results.expected(background_per_s))
    # The source reaches 0.03 counts/s in a cell, so that 1e6 is background alone to 1e-6.
    assert exposure_factor_at_half_brightness(forecast) == pytest.approx(factor, rel=1e-6)


def test_half_the_brightness_of_one_cell_by_hand() -> None:
    """Source 3 over background 1: 9/4 against (2.25)/(2.5), 2.5 times."""
    cell = ExpectedData(
        phase=np.array([0.5]),
        channel_edges_kev=np.array([1.0, 2.0]),
        source_per_s=np.array([[3.0]]),
        background_per_s=np.array([1.0]),
    )
    forecast = replace(results.normal(), expected=cell)
    assert exposure_factor_at_half_brightness(forecast) == pytest.approx(2.5, rel=1e-14)
    dark = replace(cell, source_per_s=np.array([[0.0]]))
    assert math.isnan(exposure_factor_at_half_brightness(replace(forecast, expected=dark)))


def test_the_paragraph_holds_what_a_panel_asks_for() -> None:
    """Rates, column, distance, model, exposure in whole steps, share, fallback, its bound."""
    words = feasibility(results.with_margin())
    for part in (
        *("0.0825 counts/s from Candidate A over a background of 0.054 counts/s", "(0.3-3 keV)"),
        *("a column of 1.0 × 10²⁰ cm⁻² at 260 ± 12 pc", "over 50 hot-spot geometries"),
        *("takes 1.44 Ms of good exposure for half of the geometries", "10.86 Ms for 84 per cent"),
        *("including a margin of 15 per cent", "44 per cent reach the goal, margin included"),
        *("half as bright", "estimate", "Cramér-Rao"),
    ):
        assert part in words


@pytest.mark.parametrize(
    ("state", "words"),
    [
        ("unconstrained", "is not reached within 100 Ms for half of the geometries"),
        ("partly-reached", "and is not claimed"),
        ("prior-limited", "is known beforehand and is not the aim here"),
        ("partly-beforehand", "is known beforehand for half of the geometries and is not the aim"),
        ("known", "takes 700 ks of good exposure. In 1 Ms we expect"),
    ],
)
def test_the_paragraph_claims_nothing_that_is_not_reached(state: str, words: str) -> None:
    """Every state has honest words."""
    text = feasibility(STATES[state]())
    assert words in text
    assert "none reach " not in text


def test_a_prior_limited_goal_is_not_claimed_as_a_measurement() -> None:
    """The paragraph quotes no exposure for it."""
    forecast = results.prior_limited()
    text = feasibility(replace(forecast, goals=forecast.goals[1:]))
    assert "prior-limited" in text
    assert "not claimed to measure it" in text
    assert "200 ks" not in text


def test_limits_follow_the_model() -> None:
    """An oblate star and drawn geometries have limits of their own."""
    drawn, known = results.normal(), results.known_geometry()
    assert any("arXiv:2507.02234" in each for each in limits(drawn))
    assert any("another prior on spots" in each for each in limits(drawn))
    assert not any("another prior on spots" in each for each in limits(known))
    sphere = replace(drawn, target=replace(drawn.target, figure="sphere"))
    assert any("taken as a sphere" in each for each in limits(sphere))
    assert any(
        "7 spots over all geometries never show" in x for x in method(results.hidden_spots())
    )


def test_references_name_the_abundances_in_use() -> None:
    """The set that the target file chose."""
    forecast = results.normal()
    other = replace(forecast, target=replace(forecast.target, abundances="solar-1982"))
    assert any("Wilms" in each.words for each in references(forecast))
    assert not any("Wilms" in each.words for each in references(other))
    assert any("Anders & Ebihara" in each.words for each in references(other))
