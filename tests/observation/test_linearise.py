"""Derivatives against high-order differences of the rates."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest

from exptime.arrays import Floats
from exptime.observation.linearise import (
    SPOT_PARAMETERS,
    STAR_PARAMETERS,
    linearise,
    parameter_names,
)
from exptime.observation.rates import source_rates
from exptime.observation.scene import Scene
from exptime.star.records import HotSpot
from exptime.star.resolution import Resolution
from tests.makers.scenes import star_of, toy_edges, toy_response, two_spot_scene

RESPONSE = replace(toy_response(toy_edges(0.3)), time_bin_s=1e-4)
RESOLUTION = Resolution(harmonics=64, rings=24, redshift_terms=22)
WEIGHTS = {1: 3 / 4, 2: -3 / 20, 3: 1 / 60}


def moved(scene: Scene, name: str, step: float) -> Scene:
    """Return the scene with one parameter changed."""
    star = scene.star
    if name == "mass":
        return replace(scene, star=replace(star, mass_msun=star.mass_msun + step))
    if name == "radius":
        return replace(scene, star=replace(star, radius_km=star.radius_km + step))
    if name == "cos_inclination":
        return replace(scene, star=replace(star, cos_inclination=star.cos_inclination + step))
    if name == "distance":
        return replace(scene, distance_pc=scene.distance_pc + step)
    if name == "column_density":
        return replace(scene, column_cm2=scene.column_cm2 + step)
    number, quantity = int(name[4]) - 1, name.split(".")[1]
    spot = scene.spots[number]
    if quantity == "log_temperature":
        changed = replace(spot, temperature_kev=spot.temperature_kev * math.exp(step))
    elif quantity == "colatitude":
        changed = _over_the_pole(spot, spot.colatitude + step)
    elif quantity == "longitude":
        changed = replace(spot, longitude=spot.longitude + step)
    else:
        changed = replace(spot, angular_radius=spot.angular_radius + step)
    spots = list(scene.spots)
    spots[number] = changed
    return replace(scene, spots=tuple(spots))


def _over_the_pole(spot: HotSpot, colatitude: float) -> HotSpot:
    """Fold a colatitude below 0 or above pi back, on the other side."""
    if colatitude < 0.0:
        return replace(spot, colatitude=-colatitude, longitude=spot.longitude + math.pi)
    if colatitude > math.pi:
        beyond = 2.0 * math.pi - colatitude
        return replace(spot, colatitude=beyond, longitude=spot.longitude + math.pi)
    return replace(spot, colatitude=colatitude)


def difference(rates: Callable[[float], Floats], step: float) -> Floats:
    """Sixth-order central difference."""
    parts = [w * (rates(k * step) - rates(-k * step)) / step for k, w in WEIGHTS.items()]
    return np.asarray(sum(parts))


STEPS = {
    "mass": 2e-3,
    "radius": 2e-2,
    "distance": 0.5,
    "cos_inclination": 2e-3,
    "column_density": 1e17,
    "colatitude": 2e-3,
    "longitude": 5e-3,
    "angular_radius": 5e-4,
    "log_temperature": 2e-3,
}


@pytest.mark.parametrize("spin", [200.0, 600.0])
@pytest.mark.parametrize("name", parameter_names(2))
def test_derivatives_are_those_of_sixth_order_differences(name: str, spin: float) -> None:
    """To 2e-6 of the largest: the steps of the central differences leave some 1e-7."""
    scene = two_spot_scene(star_of(spin))
    linear = linearise(scene, RESPONSE, 16, [RESOLUTION] * 2)
    got = linear.derivatives[linear.names.index(name)]
    expected = difference(
        lambda step: source_rates(moved(scene, name, step), RESPONSE, 16, [RESOLUTION] * 2),
        STEPS[name.split(".")[-1]],
    )
    assert np.abs(got - expected).max() < 2e-6 * np.abs(expected).max()


def test_names_and_order() -> None:
    """Five of the star, four of each spot."""
    assert parameter_names(1) == (*STAR_PARAMETERS, *(f"spot1.{n}" for n in SPOT_PARAMETERS))
    assert len(parameter_names(2)) == 13


def test_rates_are_those_of_the_plain_route() -> None:
    """Another redshift interval, the same rates to 1e-9."""
    scene = two_spot_scene(star_of(500.0))
    linear = linearise(scene, RESPONSE, 16, [RESOLUTION] * 2)
    plain = source_rates(scene, RESPONSE, 16, [RESOLUTION] * 2)
    assert np.abs(linear.source_per_s - plain).max() < 1e-9 * plain.max()
    assert linear.floored_share == 0.0


@pytest.mark.parametrize("colatitude", [0.05, 0.123, 0.31, 0.77, 0.99, 1.5, 3.0])
def test_the_derivative_in_colatitude_holds_anywhere(colatitude: float) -> None:
    """Rounding of the colatitude must not make a centre count as carried over a pole."""
    spot = HotSpot(colatitude=colatitude, longitude=0.7, angular_radius=0.3, temperature_kev=0.12)
    scene = two_spot_scene(star_of(400.0, 85.0), (spot,))
    linear = linearise(scene, RESPONSE, 16, [RESOLUTION])
    got = linear.derivatives[linear.names.index("spot1.colatitude")]
    expected = difference(
        lambda step: source_rates(
            moved(scene, "spot1.colatitude", step), RESPONSE, 16, [RESOLUTION]
        ),
        2e-3,
    )
    counted = got != 0.0  # an eclipsed spot leaves cells that are floored
    assert counted.mean() > 0.5
    assert np.abs(got - expected)[counted].max() < 5e-6 * np.abs(expected).max()


@pytest.mark.parametrize("colatitude", [0.0, 1e-4, math.pi - 1e-4, math.pi])
def test_a_centre_carried_over_a_pole_comes_down_on_the_other_side(colatitude: float) -> None:
    """The derivative in colatitude stays that of a smooth function of the place."""
    spot = HotSpot(colatitude=colatitude, longitude=0.7, angular_radius=0.5, temperature_kev=0.12)
    star = star_of(400.0, 60.0)
    if colatitude > 1.0:
        star = replace(star, cos_inclination=0.05)
    scene = two_spot_scene(star, (spot,))
    linear = linearise(scene, RESPONSE, 16, [RESOLUTION])
    got = linear.derivatives[linear.names.index("spot1.colatitude")]
    expected = difference(
        lambda step: source_rates(
            moved(scene, "spot1.colatitude", step), RESPONSE, 16, [RESOLUTION]
        ),
        2e-3,
    )
    assert np.abs(expected).max() > 0.0
    assert np.abs(got - expected).max() < 5e-6 * np.abs(expected).max()


def test_cells_where_truncation_leaves_next_to_nothing_are_floored() -> None:
    """An eclipsed spot: rates at 1e-6 of the channel's peak, no derivative, the share told."""
    spot = HotSpot(colatitude=2.4, longitude=0.3, angular_radius=0.1, temperature_kev=0.12)
    scene = two_spot_scene(star_of(200.0, 80.0), (spot,))
    linear = linearise(scene, RESPONSE, 32, [RESOLUTION])
    peak = linear.source_per_s.max(axis=0)
    plain = source_rates(scene, RESPONSE, 32, [RESOLUTION])
    low = plain < 1e-6 * plain.max(axis=0)
    assert 0.1 < linear.floored_share < 0.9
    assert linear.floored_share == pytest.approx(low.mean(), abs=0.02)
    assert np.all(linear.source_per_s >= 0.999999e-6 * peak)
    assert np.all(linear.derivatives[:, low] == 0.0)
    assert np.any(linear.derivatives[:, ~low] != 0.0)


def test_a_hidden_spot_is_named_and_moves_nothing() -> None:
    """Its rates and derivatives vanish; those of the other spot stay."""
    hidden = HotSpot(colatitude=math.pi, longitude=0.0, angular_radius=0.2, temperature_kev=0.1)
    seen = two_spot_scene().spots[0]
    scene = two_spot_scene(star_of(300.0, 20.0), (hidden, seen))
    linear = linearise(scene, RESPONSE, 16, [RESOLUTION] * 2)
    assert linear.is_hidden == (True, False)
    assert not linear.derivatives[5:9].any()
    assert linear.derivatives[9:].any(axis=(1, 2)).all()
    assert np.all(linear.source_per_s > 0.0)


def test_a_star_with_nothing_to_see_has_no_counts() -> None:
    """No floor, no negative rate and no nan where every spot is hidden."""
    hidden = HotSpot(colatitude=math.pi, longitude=0.0, angular_radius=0.2, temperature_kev=0.1)
    scene = two_spot_scene(star_of(300.0, 20.0), (hidden,))
    linear = linearise(scene, RESPONSE, 16, [RESOLUTION])
    assert linear.is_hidden == (True,)
    assert not linear.source_per_s.any()
    assert not linear.derivatives.any()


@pytest.mark.parametrize("cosine", [0.0, 1.0])
def test_both_ends_of_the_inclination_are_finite(cosine: float) -> None:
    """Face-on and edge-on stars have finite derivatives in every parameter."""
    star = replace(star_of(300.0), cos_inclination=cosine)
    linear = linearise(two_spot_scene(star), RESPONSE, 16, [RESOLUTION] * 2)
    assert np.isfinite(linear.derivatives).all()
    assert np.abs(linear.derivatives[3]).max() > 0.0
