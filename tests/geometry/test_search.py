"""The search against plain rejection, its prior, its refusals, and the geometries it returns."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import pytest

from exptime.arrays import Floats
from exptime.errors import UnreachableError
from exptime.geometry import search as search_module
from exptime.geometry.candidates import Candidate, Search, evaluate
from exptime.geometry.resampling import effective_number, weighted_quantiles
from exptime.geometry.search import Geometries, find_geometries
from exptime.observation.rates import source_harmonics
from exptime.parallel import workers
from exptime.star.convergence import Accuracy, resolution_needed
from exptime.star.records import HotSpot
from exptime.star.view import view_of
from tests.geometry.targets import fraction, search_of
from tests.makers.scenes import star_of

QUANTILES = np.array([0.16, 0.5, 0.84])
Finder = Callable[..., Geometries]


def find(search: Search, count: int, seed: int = 1) -> Geometries:
    """Find geometries in this process."""
    with workers(1) as team:
        return find_geometries(search, count, np.random.default_rng(seed), team)


def cheap_fractions(points: Floats) -> Floats:
    """Return stand-ins for pulsed fractions, 0 to 1."""
    return np.asarray(
        np.sin(np.pi * points[:, 0]) * np.sin(np.pi * points[:, 4]) * abs(2 * points[:, 2] - 1)
    )


def cheap_candidate(search: Search, point: Floats) -> Candidate | None:
    """Stand in for a star: a fraction and a likelihood at once, a quarter of the cube without."""
    if point[3] < 0.25:
        return None
    value = cheap_fractions(point[None])
    measured = search.target.pulsed_fractions[0]
    misfit = float(value[0] - measured.value) / measured.uncertainty
    # The colatitudes carry the point through the search, for the comparison below.
    spots = tuple(
        HotSpot(colatitude=x, longitude=0.0, angular_radius=0.1, temperature_kev=0.1)
        for x in point[:5]
    )
    return Candidate(star=star_of(), spots=spots, fractions=value, log_likelihood=-0.5 * misfit**2)


@pytest.fixture
def cheap(monkeypatch: pytest.MonkeyPatch) -> None:
    """Search with the cheap candidate."""
    monkeypatch.setattr(search_module, "evaluate", cheap_candidate)


@pytest.mark.usefixtures("cheap")
@pytest.mark.parametrize(
    ("value", "uncertainty"),
    [
        (0.03, 0.01),
        pytest.param(0.5, 0.04, marks=pytest.mark.slow),
        pytest.param(0.95, 0.02, marks=pytest.mark.slow),
    ],
)
def test_weights_reproduce_plain_rejection(value: float, uncertainty: float) -> None:
    """Quantiles of every coordinate against draws accepted with their likelihood.

    Eight searches of 128 lie about the rejection sample's quantiles: their mean within five of
    its standard errors. A centre that vouches for itself fails this at 0.03.
    """
    search = search_of(pulsed_fraction=fraction(value, uncertainty))
    random = np.random.default_rng(5)
    points = random.random((400_000, len(search.axes)))
    points = points[points[:, 3] >= 0.25]
    misfit = (cheap_fractions(points) - value) / uncertainty
    accepted = points[random.random(len(points)) < np.exp(-0.5 * misfit**2)][:, :5]
    # The periodic coordinate peaks at both ends of its axis: fold it.
    accepted[:, 2] = np.abs(accepted[:, 2] - 0.5)
    expected = np.quantile(accepted, QUANTILES, axis=0)
    found = []
    for seed in range(8):
        chosen = find(search, 128, seed)
        values = np.array([[s.colatitude for s in each.spots] for each in chosen.candidates])
        values[:, 2] = np.abs(values[:, 2] - 0.5)
        found.append(weighted_quantiles(values, chosen.weights, QUANTILES))
        assert effective_number(chosen.weights) > 50.0
    spread = np.std(found, axis=0, ddof=1)
    resamples = [accepted[random.integers(0, len(accepted), len(accepted))] for _ in range(50)]
    plain = np.std([np.quantile(each, QUANTILES, axis=0) for each in resamples], axis=0)
    error = np.hypot(spread / math.sqrt(8.0), plain)
    np.testing.assert_array_less(np.abs(np.mean(found, axis=0) - expected), 5.0 * error)


@pytest.mark.usefixtures("cheap")
def test_one_seed_gives_the_same_geometries_and_another_others() -> None:
    """Every random number comes from the generator handed in."""
    search = search_of(pulsed_fraction=fraction(0.5, 0.04))
    first, again, other = (find(search, 64, seed) for seed in (1, 1, 2))
    assert [each.spots for each in first.candidates] == [each.spots for each in again.candidates]
    np.testing.assert_array_equal(first.weights, again.weights)
    assert [each.spots for each in first.candidates] != [each.spots for each in other.candidates]


@pytest.mark.usefixtures("cheap")
def test_an_unreachable_fraction_is_refused_with_the_range_that_can_be() -> None:
    """The cheap candidate reaches 1 at most."""
    search = search_of(pulsed_fraction=fraction(1.5, 0.02, "full-swing"))
    with pytest.raises(UnreachableError, match=r"1\.5 \(full-swing, 0\.5-2 keV\)") as caught:
        find(search, 64)
    assert "span 0.00" in str(caught.value)


def test_a_pulse_seen_from_the_pole_cannot_be_deep(monkeypatch: pytest.MonkeyPatch) -> None:
    """0.999 +- 0.0005 at an inclination of 2 deg: refused, the reachable range is given."""
    monkeypatch.setattr(search_module, "_FIRST_ROUND", 64)
    monkeypatch.setattr(search_module, "_ROUND", 32)
    monkeypatch.setattr(search_module, "_MOST_ROUNDS", 3)
    search = search_of(
        True, inclination="{value: 2 deg, uncertainty: 1 deg}",
        pulsed_fraction=fraction(0.999, 0.0005),
    )  # fmt: skip
    with pytest.raises(UnreachableError, match="cannot be reached") as caught:
        find(search, 32)
    assert " span 0.0" in str(caught.value)


@pytest.fixture(scope="module")
def drawn() -> list[Candidate]:
    """Return what 250 uniform points give, stars free."""
    search = search_of(pulsed_fraction=fraction(0.5, 0.04))
    points = np.random.default_rng(31).random((250, len(search.axes)))
    return [each for each in (evaluate(search, point) for point in points) if each is not None]


def test_uninformed_draws_follow_the_prior(drawn: list[Candidate]) -> None:
    """Each of cos i, centres, longitude and ratio uniform: Kolmogorov's test at 1e-4.

    At this flux hardly a point is refused, so that acceptance bends nothing.
    """
    from scipy.stats import kstest

    assert len(drawn) > 215
    columns = {
        "cos_inclination": [each.star.cos_inclination for each in drawn],
        "first centre": [0.5 + 0.5 * math.cos(each.spots[0].colatitude) for each in drawn],
        "second centre": [0.5 + 0.5 * math.cos(each.spots[1].colatitude) for each in drawn],
        "longitude": [each.spots[1].longitude / (2.0 * math.pi) for each in drawn],
        "mass": [(each.star.mass_msun - 1.2) / 0.8 for each in drawn],
        "radius": [(each.star.radius_km - 11.0) / 2.0 for each in drawn],
        "ratio": [
            0.5 + 0.5 * math.log(each.spots[0].angular_radius / each.spots[1].angular_radius, 3.0)
            for each in drawn
        ],
    }
    for name, values in columns.items():
        assert kstest(values, "uniform").pvalue > 1e-4, name


def test_drawn_spots_do_not_overlap(drawn: list[Candidate]) -> None:
    """The angle between the centres is at least the sum of the radii; none exceeds 90 deg."""
    for each in drawn:
        one, two = (
            np.array(
                [
                    math.sin(spot.colatitude) * math.cos(spot.longitude),
                    math.sin(spot.colatitude) * math.sin(spot.longitude),
                    math.cos(spot.colatitude),
                ]
            )
            for spot in each.spots
        )
        apart = math.acos(min(max(float(one @ two), -1.0), 1.0))
        radii = [spot.angular_radius for spot in each.spots]
        assert apart >= sum(radii) - 1e-9
        assert max(radii) <= 0.5 * math.pi
        assert each.spots[0].temperature_kev == each.spots[1].temperature_kev == 0.12


def test_sizes_reproduce_the_flux_and_fractions_hold(drawn: list[Candidate]) -> None:
    """Against converged pulses: flux to 0.3 per cent, the fraction to a hundredth."""
    from exptime.geometry.candidates import _scene
    from exptime.geometry.light_curve import pulsed_fraction

    search = search_of(pulsed_fraction=fraction(0.5, 0.04))
    accuracy = Accuracy(phase_bins=32, lowest_kev=0.5, highest_kev=2.0, tolerance=1e-5)
    assert search.target.flux is not None
    for each in drawn[:25]:
        view = view_of(each.star)
        chosen = [
            resolution_needed(view, spot, search.target.emission, accuracy) for spot in each.spots
        ]
        scene = _scene(search.target, each.star, each.spots)
        flux = source_harmonics(scene, view, search.flux, chosen)[0, 0].real
        assert flux == pytest.approx(search.target.flux.value, rel=3e-3)
        pulse = source_harmonics(scene, view, search.pulses, chosen)[:, 0]
        value = pulsed_fraction(pulse, "peak-to-trough")
        assert each.fractions[0] == pytest.approx(value, abs=0.01)


def test_observed_temperatures_are_hotter_at_the_surface() -> None:
    """By the redshift of the star that is drawn."""
    point = np.full(7, 0.4)
    seen = evaluate(search_of(temperature="{value: 0.1 keV, frame: observed}"), point)
    assert seen is not None
    star = seen.star
    expected = 0.1 / math.sqrt(1.0 - star.schwarzschild_radius_km / star.radius_km)
    assert seen.spots[0].temperature_kev == pytest.approx(expected, rel=1e-12)


def test_what_is_given_is_not_drawn() -> None:
    """Mass, radius and inclination as given; a fixed star where asked for."""
    given = search_of(mass="1.6 Msun", radius="12.5 km", inclination="40 deg")
    assert given.axes == ("cos_colatitude_1", "cos_colatitude_2", "longitude", "ratio")
    found = evaluate(given, np.full(4, 0.4))
    assert found is not None
    assert (found.star.mass_msun, found.star.radius_km) == (1.6, 12.5)
    assert found.star.cos_inclination == pytest.approx(math.cos(math.radians(40.0)))
    fixed = evaluate(search_of(True), np.full(5, 0.4))
    assert fixed is not None
    assert (fixed.star.mass_msun, fixed.star.radius_km) == (1.4, 12.0)


@pytest.mark.slow
@pytest.mark.parametrize(("value", "uncertainty"), [(0.95, 0.02), (0.03, 0.01)])
def test_tails_are_reached(value: float, uncertainty: float) -> None:
    """More than fifty effective geometries, and more a candidate than plain draws give."""
    search = search_of(pulsed_fraction=fraction(value, uncertainty))
    found = find(search, 128)
    effective = effective_number(found.weights)
    assert effective > 50.0
    points = np.random.default_rng(8).random((300, len(search.axes)))
    plain = [each for each in (evaluate(search, point) for point in points) if each is not None]
    weights = np.exp([each.log_likelihood for each in plain])
    share = effective_number(weights) / len(points)
    print(f"{value}: plain {share:.3f}, search {effective / found.tried:.3f} of {found.tried}")
    assert effective / found.tried > share
