"""Whole forecasts: what one geometry gives, what many give, and how they are joined."""

from __future__ import annotations

import math

import numpy as np
import pytest

from exptime.geometry.resampling import weighted_quantiles
from exptime.instrument.reader import read_instrument
from exptime.study.case import answer, resolutions_for
from exptime.study.forecast import make_forecast
from exptime.study.geometries import known_geometry
from exptime.study.records import Forecast, Goal, Spread
from tests.study.cases import DRAWN, KNOWN, SPOT, draws_of, forecast_of, instrument_of, target_of


@pytest.fixture(scope="module")
def known() -> Forecast:
    """Return the forecast of a known geometry."""
    return forecast_of(target_of(KNOWN, mass="1.4 Msun"), margin=0.5)


@pytest.fixture(scope="module")
def drawn() -> Forecast:
    """Return the forecast of a dozen drawn geometries."""
    return forecast_of(target_of(DRAWN), draws=draws_of())


def values(spread: Spread) -> list[list[float]]:
    """Return the three quantiles as lists."""
    return [np.atleast_1d(each).tolist() for each in (spread.p16, spread.p50, spread.p84)]


def test_a_known_geometry_has_three_equal_quantiles(known: Forecast) -> None:
    """Of every curve, of the correlation and of the exposures."""
    assert known.is_geometry_known
    assert (known.candidates, known.effective_geometries, known.median_index) == (0, 1.0, 0)
    assert known.numerics.quantile_error == 0.0
    spreads = [known.correlation_mass_radius, *(goal.exposure_s for goal in known.goals)]
    for curve in (known.mass, known.radius, known.compactness):
        spreads += [curve.sigma, curve.data_sigma]
    for spread in spreads:
        low, middle, high = values(spread)
        assert low == middle == high


def test_quantiles_rest_on_the_geometries(drawn: Forecast) -> None:
    """Weights sum to one; the spread of data_sigma(radius) is that of the geometries listed."""
    weights = np.array([each.weight for each in drawn.geometries])
    assert weights.sum() == pytest.approx(1.0)
    assert len(weights) == 12
    assert drawn.effective_geometries == pytest.approx(1.0 / np.sum(weights**2))
    rows = np.array([each.data_sigma_radius_km for each in drawn.geometries])
    expected = weighted_quantiles(rows, weights, np.array([0.16, 0.5, 0.84]))
    np.testing.assert_array_equal(values(drawn.radius.data_sigma), expected)


def test_the_median_geometry_is_nearest_the_weighted_median(drawn: Forecast) -> None:
    """At the longest exposure; its star and rates stand for the forecast."""
    rows = np.array([each.data_sigma_radius_km[-1] for each in drawn.geometries])
    distance = np.abs(rows - float(drawn.radius.data_sigma.p50[-1]))
    assert distance[drawn.median_index] == distance.min()
    star = drawn.geometries[drawn.median_index].star
    assert (drawn.mass.fiducial, drawn.radius.fiducial) == (star.mass_msun, star.radius_km)
    assert drawn.source_per_s == pytest.approx(drawn.expected.source_per_s.sum(axis=1).mean())
    assert drawn.background_per_s == pytest.approx(0.1)


def test_shares_agree_with_the_geometries(drawn: Forecast) -> None:
    """A geometry reaches 5 per cent at an exposure exactly when its data_sigma says so."""
    goal, weights = drawn.goals[0], np.array([each.weight for each in drawn.geometries])
    for column, share in enumerate(goal.fraction_at_exposure):
        reached = [
            each.data_sigma_radius_km[column] <= 0.05 * each.star.radius_km
            for each in drawn.geometries
        ]
        assert share == pytest.approx(weights[reached].sum())
    assert goal.fraction_reached == goal.fraction_at_exposure[-1]
    assert 0.0 <= goal.fraction_reached <= 1.0


def test_a_required_exposure_reaches_its_goal(known: Forecast) -> None:
    """A forecast at just that exposure: 5 per cent, and the margin is not in it."""
    wanted = float(known.goals[0].exposure_s.p50)
    assert 1.0 < wanted < 1e8
    at = forecast_of(target_of(KNOWN, mass="1.4 Msun"), (wanted,))
    assert float(at.radius.data_sigma.p50[0]) == pytest.approx(0.05 * 12.0, rel=1e-5)
    assert known.margin == 0.5
    assert float(at.goals[0].exposure_s.p50) == wanted


def test_what_is_known_beforehand_takes_no_exposure() -> None:
    """A mass known to 4 per cent meets a goal of 5 at once."""
    target = target_of(KNOWN, mass="{value: 1.4 Msun, uncertainty: 4 %}")
    goal = Goal(quantity="mass", precision=0.05)
    assert float(forecast_of(target, (1e5,), goals=(goal,)).goals[0].exposure_s.p50) == 0.0


def test_exposures_are_sorted_and_said_once() -> None:
    """Whatever order they come in."""
    found = forecast_of(target_of(KNOWN), (1e6, 1e5, 1e6), goals=())
    assert found.exposures_s.tolist() == [1e5, 1e6]


def test_prior_limited_is_judged_without_the_own_prior(known: Forecast) -> None:
    """At 1 s nothing is measured: everything is prior-limited; a fixed mass always is."""
    short = forecast_of(target_of(KNOWN), (1.0, 1e8), goals=())
    for curve in (short.mass, short.radius, short.compactness):
        assert curve.is_prior_limited == (True, False)
    fixed = forecast_of(target_of(KNOWN, mass="{value: 1.4 Msun, uncertainty: 0}"), (1e8,))
    assert fixed.mass.is_prior_limited == (True,)
    assert fixed.mass.prior_sigma == 0.0
    assert known.radius.prior_sigma == pytest.approx(7.0 / math.sqrt(12.0))


def test_sigma_is_never_above_data_sigma(drawn: Forecast) -> None:
    """Flat priors only add; both fall with exposure."""
    for curve in (drawn.mass, drawn.radius, drawn.compactness):
        for name in ("p16", "p50", "p84"):
            everything, data = getattr(curve.sigma, name), getattr(curve.data_sigma, name)
            assert np.all(everything <= data * (1.0 + 1e-9))
            assert np.all(np.diff(everything) < 0.0)


def test_a_hidden_spot_is_kept_and_counted() -> None:
    """Its presence changes no precision, and its share of the answer is said."""
    hidden = "{colatitude: 179 deg, longitude: 0 deg, angular_radius: 3 deg, temperature: 0.1 keV}"
    inclination = "{value: 30 deg, uncertainty: 3 deg}"
    one = forecast_of(target_of(KNOWN, inclination=inclination), goals=())
    two = forecast_of(
        target_of(KNOWN, inclination=inclination, hot_spots=f"[{SPOT}, {hidden}]"), goals=()
    )
    assert (one.hidden_spots, two.hidden_spots) == (0, 1)
    assert len(two.geometries[0].spots) == 2
    np.testing.assert_allclose(two.radius.data_sigma.p50, one.radius.data_sigma.p50, rtol=1e-5)


def test_a_spot_that_never_shows_leaves_the_radius_unconstrained() -> None:
    """Infinite in every quantile, and a warning that says so."""
    hidden = "{colatitude: 178 deg, longitude: 0 deg, angular_radius: 3 deg, temperature: 0.1 keV}"
    found = forecast_of(target_of(KNOWN, inclination="20 deg", hot_spots=f"[{hidden}]"))
    assert np.isinf(values(found.radius.data_sigma)).all()
    assert np.isinf(values(found.goals[0].exposure_s)).all()
    assert found.goals[0].fraction_reached == 0.0
    assert any("100 per cent of the geometries the data leave" in text for text in found.warnings)
    assert np.isfinite(values(found.radius.sigma)).all()


def test_an_inclination_above_90_deg_is_the_reflected_one() -> None:
    """120 deg with the colatitudes turned over: the same forecast, and it is said."""
    turned = SPOT.replace("70 deg", "110 deg")
    there = target_of(
        KNOWN, inclination="{value: 120 deg, uncertainty: 3 deg}", hot_spots=f"[{turned}]"
    )
    here, mirrored = forecast_of(target_of(KNOWN), goals=()), forecast_of(there, goals=())
    np.testing.assert_allclose(
        mirrored.radius.data_sigma.p50, here.radius.data_sigma.p50, rtol=1e-6
    )
    assert any("reflected" in text for text in mirrored.warnings)


def test_doubling_the_resolution_is_reported(known: Forecast) -> None:
    """The figure is that of a run by hand, below one per cent."""
    assert 0.0 <= known.numerics.resolution_change < 0.01
    assert known.numerics.condition > 1.0


def test_few_geometries_are_warned_of(drawn: Forecast) -> None:
    """A dozen is fewer than fifty; the number of candidates is told."""
    assert any("effective geometries, fewer than 50" in text for text in drawn.warnings)
    assert drawn.candidates >= 12


def test_progress_ends_with_the_work() -> None:
    """Never beyond the whole, and the whole in the end."""
    told: list[tuple[int, int]] = []
    forecast_of(target_of(KNOWN), progress=lambda *done: told.append(done), goals=())
    assert told
    assert all(0 <= done <= total for done, total in told)
    assert told[-1][0] == told[-1][1]


@pytest.mark.slow
def test_a_seed_gives_the_same_forecast_and_another_another(drawn: Forecast) -> None:
    """Bit by bit."""
    again = forecast_of(target_of(DRAWN), draws=draws_of())
    other = forecast_of(target_of(DRAWN), draws=draws_of(seed=2))
    assert values(again.radius.data_sigma) == values(drawn.radius.data_sigma)
    assert values(other.radius.data_sigma) != values(drawn.radius.data_sigma)


def test_a_resolution_chosen_by_hand_gives_the_same() -> None:
    """`answer` with the resolutions that need chooses, and with twice as many of everything."""
    from exptime.interstellar.absorption import load_absorption
    from exptime.observation.instrument_response import instrument_response
    from exptime.study.case import Question

    target, instrument = target_of(KNOWN), instrument_of()
    question = Question(
        target=target,
        instrument=instrument,
        response=instrument_response(instrument, load_absorption(target.abundances)),
        exposures_s=np.array([1e6]),
        goals=(),
    )
    geometry = known_geometry(target)
    chosen = resolutions_for(question, geometry)
    here = answer(question, geometry, chosen).sigma
    there = answer(question, geometry, [each.doubled() for each in chosen]).sigma
    np.testing.assert_allclose(here, there, rtol=0.01)
    np.testing.assert_array_equal(here, answer(question, geometry).sigma)


def test_no_goal_is_no_goal() -> None:
    """A forecast without goals has none."""
    found = make_forecast(target_of(KNOWN), instrument_of(), [1e6], read_instrument=read_instrument)
    assert found.goals == ()
