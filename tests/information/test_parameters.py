"""Priors, word by word."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from exptime.information.parameters import parameters_of, prior_matrix
from exptime.observation.linearise import parameter_names
from exptime.target.records import KnownSpot, Measured, Target
from tests.makers.scenes import toy_target


def sigmas(target: Target, cosine: float = 0.5, area: float = 0.03) -> dict[str, float]:
    return {p.name: p.prior_sigma for p in parameters_of(target, area, 2, cosine)}


def test_flat_priors_have_the_variance_of_their_width() -> None:
    """W²/12: 1.1 to 2.6 Msun, 9 to 16 km, 0 to 1, pi, 2 pi, pi/2, a factor of ten."""
    got = sigmas(toy_target())
    widths = {
        "mass": 1.5,
        "radius": 7.0,
        "cos_inclination": 1.0,
        "spot1.colatitude": math.pi,
        "spot2.longitude": 2.0 * math.pi,
        "spot1.angular_radius": math.pi / 2,
        "spot2.log_temperature": math.log(10.0),
    }
    for name, width in widths.items():
        assert got[name] ** -2 == pytest.approx(12.0 / width**2, rel=1e-12)


def test_no_prior_on_the_column_unless_it_was_measured() -> None:
    """Infinite, and a Gaussian with an uncertainty."""
    assert math.isinf(sigmas(toy_target())["column_density"])
    known = replace(toy_target(), column_density=Measured(value=1e20, uncertainty=2e19))
    assert sigmas(known)["column_density"] == 2e19


def test_an_uncertainty_makes_a_gaussian_in_place_of_the_flat_prior() -> None:
    """Mass, radius and distance in their own units; a bare value changes nothing."""
    target = replace(
        toy_target(), mass=Measured(value=1.5, uncertainty=0.1), radius=Measured(value=12.0)
    )
    parameters = {p.name: p for p in parameters_of(target, 0.03, 2, 0.5)}
    assert parameters["mass"].prior_sigma == 0.1
    assert not parameters["mass"].is_flat
    assert parameters["radius"].is_flat
    assert parameters["radius"].prior_sigma == pytest.approx(7.0 / math.sqrt(12.0))
    assert parameters["distance"].prior_sigma == 30.0
    assert not parameters["distance"].is_flat


def test_zero_holds_a_parameter_fixed() -> None:
    """Mass, radius, distance, inclination, column and the area factor."""
    zero = Measured(value=1.0, uncertainty=0.0)
    target = replace(
        toy_target(), mass=zero, radius=zero, distance=zero, inclination=zero, column_density=zero
    )
    fixed = {p.name for p in parameters_of(target, 0.0, 2, 0.5) if p.is_fixed}
    names = {"mass", "radius", "distance", "cos_inclination", "column_density", "area_factor"}
    assert fixed == names


@pytest.mark.parametrize("degrees", [0.0, 1.0, 40.0, 90.0])
def test_inclination_rule(degrees: float) -> None:
    """sigma(cos i) = max(sigma sin i, sigma²/2)."""
    incl, sigma = math.radians(degrees), math.radians(3.0)
    target = replace(toy_target(), inclination=Measured(value=incl, uncertainty=sigma))
    expected = max(sigma * math.sin(incl), sigma**2 / 2.0)
    got = sigmas(target, math.cos(incl))["cos_inclination"]
    assert got == pytest.approx(expected, rel=1e-9)


def test_known_spots_bring_their_own_priors() -> None:
    """Radians as they are; a temperature becomes relative; the rest stays flat."""
    spot = KnownSpot(
        colatitude=Measured(value=1.0, uncertainty=0.05),
        longitude=Measured(value=0.0, uncertainty=0.0),
        angular_radius=Measured(value=0.2),
        temperature_kev=Measured(value=0.1, uncertainty=0.004),
    )
    target = replace(toy_target(), hot_spots=(spot, spot))
    parameters = {p.name: p for p in parameters_of(target, 0.03, 2, 0.5)}
    assert parameters["spot2.colatitude"].prior_sigma == 0.05
    assert parameters["spot1.longitude"].is_fixed
    assert parameters["spot1.angular_radius"].is_flat
    assert parameters["spot1.log_temperature"].prior_sigma == pytest.approx(0.04)


def test_order_is_that_of_the_derivatives() -> None:
    """Star, spots, then the grey factor on the effective area."""
    names = tuple(p.name for p in parameters_of(toy_target(), 0.05, 2, 0.5))
    assert names == (*parameter_names(2), "area_factor")


def test_prior_matrix_leaves_out_what_is_asked_for() -> None:
    """All, without mass and radius, or without them only where they are flat."""
    target = replace(toy_target(), mass=Measured(value=1.5, uncertainty=0.1))
    parameters = parameters_of(target, 0.03, 1, 0.5)
    everything = np.diagonal(prior_matrix(parameters))
    without = np.diagonal(prior_matrix(parameters, ("mass", "radius")))
    flat_only = np.diagonal(prior_matrix(parameters, ("mass", "radius"), flat_only=True))
    assert everything[0] == pytest.approx(100.0)
    assert everything[4] == 0.0
    np.testing.assert_array_equal(without[:2], [0.0, 0.0])
    assert flat_only[0] == everything[0]
    assert flat_only[1] == 0.0
    np.testing.assert_array_equal(without[2:], everything[2:])
