"""Figure of the spinning star."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from exptime.star.figure import flattening, radius_km, rotation_parameter, tilt
from tests.makers.scenes import star_of


def test_rotation_parameter_is_the_square_of_spin_over_orbital_frequency() -> None:
    """In SI units: 600 Hz, 1.4 solar masses, 12 km gives 0.132."""
    omega, gravity = 2.0 * np.pi * 600.0, 1.3271244e20 * 1.4
    expected = omega**2 * 12e3**3 / gravity
    assert rotation_parameter(star_of(600.0)) == pytest.approx(expected, rel=1e-12)


def test_radius_follows_the_published_law() -> None:
    """AlGendy & Morsink 2014, ApJ 791, 78: R_e [1 + W (-0.788 + 1.030 x) cos²]."""
    star = star_of(600.0)
    x, spin = 1.4766250 * 1.4 / 12.0, rotation_parameter(star)
    theta = np.array([0.0, 0.7, np.pi / 2, 2.5])
    expected = 12.0 * (1.0 + spin * (-0.788 + 1.030 * x) * np.cos(theta) ** 2)
    np.testing.assert_allclose(radius_km(star, theta), expected, rtol=1e-7)
    assert radius_km(star, theta)[2] == pytest.approx(12.0, rel=1e-14)


def test_tilt_is_the_slope_of_the_radius() -> None:
    """Against a central difference, 1e-9; outward normals lean towards the near pole."""
    star, theta, step = star_of(650.0), np.linspace(0.1, 3.0, 9), 1e-5
    slope = (radius_km(star, theta + step) - radius_km(star, theta - step)) / (2 * step)
    radius = radius_km(star, theta)
    expected = slope / radius / np.sqrt(1.0 - star.schwarzschild_radius_km / radius)
    np.testing.assert_allclose(tilt(star, theta), expected, atol=1e-9)
    assert tilt(star, np.array([0.8]))[0] > 0.0
    assert tilt(star, np.array([2.3]))[0] < 0.0


def test_figure_is_symmetric_about_the_equator() -> None:
    """Mirrored colatitudes: same radius, opposite tilt."""
    star, theta = star_of(500.0), np.linspace(0.0, np.pi / 2, 7)
    np.testing.assert_allclose(radius_km(star, theta), radius_km(star, np.pi - theta), rtol=1e-14)
    np.testing.assert_allclose(tilt(star, theta), -tilt(star, np.pi - theta), atol=1e-15)


def test_sphere_stays_a_sphere() -> None:
    """No flattening and no tilt at any spin."""
    star = replace(star_of(700.0), figure="sphere")
    theta = np.linspace(0.0, np.pi, 5)
    assert flattening(star) == 0.0
    assert np.all(radius_km(star, theta) == 12.0)
    assert np.all(tilt(star, theta) == 0.0)
