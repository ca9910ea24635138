"""Moments of a spot against a slow trapezoid in observed phase with exact rays."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from exptime.arrays import Complexes, Floats
from exptime.star.circle import stack
from exptime.star.moments import spot_moments, widened
from exptime.star.rays import deflection_of_angle, delay_of_angle
from exptime.star.records import Emission, HotSpot, Star
from exptime.star.resolution import Resolution
from exptime.star.view import view_of
from exptime.tables.rays import invert_deflection
from tests.makers.scenes import star_of

LIGHT = 299792.458


def seen(
    star: Star, emission: Emission, theta: float, phi: Floats
) -> tuple[Floats, Floats, Floats]:
    """Return photon kernel (km²), lag (rad) and redshift factor of points, formula by formula."""
    gravity = star.schwarzschild_radius_km
    omega = 2.0 * math.pi * star.spin_hz / LIGHT
    flat = 2.0 * omega**2 * star.radius_km**3 / gravity
    flat *= -0.788 + 0.515 * gravity / star.radius_km
    r = star.radius_km * (1.0 + flat * math.cos(theta) ** 2)
    u = np.full_like(phi, gravity / r)
    root = math.sqrt(1.0 - gravity / r)
    steep = -star.radius_km * flat * math.sin(2.0 * theta) / (r * root)
    incl = math.acos(star.cos_inclination)
    cos_psi = math.cos(incl) * math.cos(theta) + math.sin(incl) * math.sin(theta) * np.cos(phi)
    psi = np.arccos(cos_psi)
    alpha = invert_deflection(psi, u)
    step = 1e-3
    slope = (
        8.0 * (deflection_of_angle(alpha + step, u) - deflection_of_angle(alpha - step, u))
        - (deflection_of_angle(alpha + 2 * step, u) - deflection_of_angle(alpha - 2 * step, u))
    ) / (12.0 * step)
    lensing = np.sin(alpha) / (np.sin(psi) * slope)
    ratio = np.sin(alpha) / np.sin(psi)
    lean = math.cos(incl) * math.sin(theta) - math.sin(incl) * math.cos(theta) * np.cos(phi)
    tau = math.atan(steep)
    cos_sigma = np.cos(alpha) * math.cos(tau) + ratio * lean * math.sin(tau)
    beta = omega * r * math.sin(theta) / root
    gamma = 1.0 / math.sqrt(1.0 - beta**2)
    boost = 1.0 / (gamma * (1.0 + beta * ratio * math.sin(incl) * np.sin(phi)))
    mu = boost * cos_sigma
    h = emission.coefficient
    area = gamma * r**2 * math.sin(theta) * math.sqrt(1.0 + steep**2)
    photons = area * lensing * mu * (1.0 + h * mu) / (1.0 + 2.0 * h / 3.0) / (1.0 - gravity / r)
    late = r * delay_of_angle(alpha, u) + (star.radius_km - r)
    late += gravity * math.log((star.radius_km - gravity) / (r - gravity))
    shown = cos_sigma > 0.0
    return np.where(shown, photons, 0.0), omega * np.nan_to_num(late), 1.0 / (boost * root)


def ring_harmonics(
    star: Star, emission: Emission, theta: float, points: int, highest: int
) -> Complexes:
    """Harmonics of a ring's kernel times e², by points evenly spaced in observed phase."""
    observed = 2.0 * np.pi * (np.arange(points) + 0.5) / points - np.pi
    phi = observed.copy()
    for _ in range(9):
        phi = observed - seen(star, emission, theta, phi)[1]
    photons, _, redshift = seen(star, emission, theta, phi)
    waves = np.exp(-1j * np.outer(np.arange(highest + 1), observed))
    return np.asarray(waves @ (photons * redshift**2) / points)


@pytest.mark.parametrize(
    ("inclination", "colatitude", "h", "points", "tolerance"),
    [
        (25.0, 0.8, 0.7, 192, 1e-9),
        (75.0, 1.9, 0.0, 240, 6e-4),
        pytest.param(75.0, 1.9, 0.0, 6000, 2e-6, marks=pytest.mark.slow),
        pytest.param(75.0, 1.9, 0.7, 6000, 2e-6, marks=pytest.mark.slow),
    ],
)
def test_moments_are_those_of_a_slow_trapezoid(
    inclination: float, colatitude: float, h: float, points: int, tolerance: float
) -> None:
    """Whole rings converge spectrally, cut ones only as the square of the step."""
    star, emission = star_of(600.0, inclination), Emission(model="limb-darkened", coefficient=h)
    spot = HotSpot(colatitude=colatitude, longitude=0.0, angular_radius=0.2, temperature_kev=0.1)
    resolution = Resolution(harmonics=12, rings=3, redshift_terms=3)
    view = view_of(star)
    moments = spot_moments(view, emission, spot, resolution)
    low, high = moments.redshift_range
    nodes = np.array([low, 0.5 * (low + high), high])
    square = np.asarray(
        np.polynomial.Chebyshev.fit(nodes, nodes**2, 2, domain=[low, high]).coef, float
    )
    order = np.arange(13)
    expected = np.zeros(13, complex)
    rings = stack(spot.colatitude, spot.angular_radius, view.transitions, resolution.rings)
    for theta, weight, width in zip(rings.colatitude, rings.weight, rings.half_width, strict=True):
        extent = np.where(
            order == 0, 2.0 * width, 2.0 * np.sin(order * width) / np.maximum(order, 1)
        )
        expected += weight * extent * ring_harmonics(star, emission, float(theta), points, 12)
    got = moments.values @ square
    assert np.abs(got - expected).max() < tolerance * abs(expected[0])


def test_a_wider_interval_changes_nothing_but_the_basis() -> None:
    """The same function of the redshift factor on another interval gives the same harmonics."""
    view, emission = view_of(star_of(300.0)), Emission()
    spot = HotSpot(colatitude=1.0, longitude=0.0, angular_radius=0.2, temperature_kev=0.1)
    resolution = Resolution(harmonics=8, rings=4, redshift_terms=12)
    results = []
    for interval in (None, (1.0, 1.6)):
        moments = spot_moments(view, emission, spot, resolution, interval)
        low, high = moments.redshift_range
        points = np.polynomial.chebyshev.chebpts1(60)
        values = np.exp(-3.0 * (0.5 * (low + high) + 0.5 * (high - low) * points))
        series = np.polynomial.chebyshev.chebfit(points, values, 11)
        results.append(moments.values @ series)
    np.testing.assert_allclose(results[0], results[1], atol=1e-10 * abs(results[0][0]))


def test_a_spot_behind_the_star_has_no_moments() -> None:
    """Hidden is said, and every moment is exactly zero."""
    star = star_of(300.0, 10.0)
    spot = HotSpot(colatitude=math.pi, longitude=0.0, angular_radius=0.1, temperature_kev=0.1)
    resolution = Resolution(harmonics=8, rings=4, redshift_terms=2)
    moments = spot_moments(view_of(star), Emission(), spot, resolution)
    assert moments.is_hidden
    assert not moments.values.any()
    seen_spot = replace(spot, colatitude=0.3)
    assert not spot_moments(view_of(star), Emission(), seen_spot, resolution).is_hidden


def test_moments_of_a_small_spot_grow_with_its_area() -> None:
    """Twice the radius is four times the area, to the order of the radius squared."""
    view = view_of(star_of(200.0))
    resolution = Resolution(harmonics=4, rings=6, redshift_terms=1)
    small, large = (
        spot_moments(
            view,
            Emission(),
            HotSpot(colatitude=1.1, longitude=0.0, angular_radius=rho, temperature_kev=0.1),
            resolution,
        )
        .values[0, 0]
        .real
        for rho in (1e-3, 2e-3)
    )
    assert large / small == pytest.approx(4.0, rel=1e-5)


def test_widened_intervals_contain_the_original() -> None:
    """By a share of each end."""
    assert widened((1.0, 2.0), 0.1) == pytest.approx((0.9, 2.2))
