"""Where the surface is seen: horizon and transitions against slow scans with exact rays."""

from __future__ import annotations

import math

import numpy as np
import pytest

from exptime.arrays import Floats
from exptime.star.ray_table import load_ray_table
from exptime.star.rays import deflection
from exptime.star.records import Star
from exptime.star.surface import cos_sigma, horizon_azimuth, rings_at, visibility_transitions
from exptime.tables.rays import invert_deflection
from tests.makers.scenes import random_star, star_of


def slow_cos_sigma(star: Star, theta: Floats, phi: Floats) -> Floats:
    """Cosine to the surface normal by vectors, the ray found by bisecting exact integrals."""
    radius, slope = _radius_and_slope(star, theta)
    u = star.schwarzschild_radius_km / radius
    incl, zero = math.acos(star.cos_inclination), np.zeros_like(theta)
    # Unit vectors in a local frame (outwards, towards larger colatitude, eastwards).
    observer = np.stack(
        [
            math.cos(incl) * np.cos(theta) + math.sin(incl) * np.sin(theta) * np.cos(phi),
            -math.cos(incl) * np.sin(theta) + math.sin(incl) * np.cos(theta) * np.cos(phi),
            -math.sin(incl) * np.sin(phi),
        ]
    )
    psi = np.arccos(observer[0])
    alpha = invert_deflection(psi, u)
    sideways = observer * np.array([[0.0], [1.0], [1.0]])
    up = np.stack([np.cos(alpha), zero, zero])
    ray = up + np.sin(alpha) * sideways / np.sin(psi)
    steep = slope / (radius * np.sqrt(1.0 - u))
    normal = np.stack([zero + 1.0, -steep, zero]) / np.hypot(1.0, steep)
    return np.asarray(np.sum(ray * normal, axis=0))


def _radius_and_slope(star: Star, theta: Floats) -> tuple[Floats, Floats]:
    omega = 2.0 * math.pi * star.spin_hz / 299792.458
    gravity = 0.5 * star.schwarzschild_radius_km
    flat = omega**2 * star.radius_km**3 / gravity * (-0.788 + 1.030 * gravity / star.radius_km)
    flat = 0.0 if star.figure == "sphere" else flat
    radius = star.radius_km * (1.0 + flat * np.cos(theta) ** 2)
    return radius, -star.radius_km * flat * np.sin(2.0 * theta)


@pytest.mark.parametrize("spin", [1.0, 400.0, 700.0])
def test_cosine_to_the_normal_is_that_of_vectors(spin: float) -> None:
    """Fifty points a star, to 1e-11."""
    star = star_of(spin, 50.0)
    rng = np.random.default_rng(3)
    theta, phi = rng.uniform(0.1, 2.0, 50), rng.uniform(-1.8, 1.8, 50)
    fast = cos_sigma(rings_at(star, load_ray_table(), theta), np.cos(phi))
    np.testing.assert_allclose(fast, slow_cos_sigma(star, theta, phi), atol=1e-11)


def test_horizon_is_where_the_slow_cosine_changes_sign() -> None:
    """Random stars and colatitudes; the azimuth to 1e-8, far from grazing."""
    rng = np.random.default_rng(5)
    table, checked = load_ray_table(), 0
    for _ in range(12):
        star = random_star(rng)
        theta = rng.uniform(0.4, 2.8, 20)
        azimuth = horizon_azimuth(rings_at(star, table, theta))
        keep = (azimuth > 0.2) & (azimuth < math.pi - 0.2)
        theta, azimuth = theta[keep], azimuth[keep]
        assert np.all(slow_cos_sigma(star, theta, azimuth - 1e-8) > 0.0)
        assert np.all(slow_cos_sigma(star, theta, azimuth + 1e-8) < 0.0)
        checked += len(theta)
    assert checked >= 60


def test_horizon_of_a_sphere_in_closed_form() -> None:
    """cos(phi_h) = (cos psi_h - cos i cos theta)/(sin i sin theta)."""
    star = star_of(300.0, 60.0, figure="sphere")
    psi = float(deflection(0.0, star.schwarzschild_radius_km / 12.0))
    theta = np.linspace(0.02, np.pi - 0.02, 90)
    incl = math.radians(60.0)
    cosine = (math.cos(psi) - math.cos(incl) * np.cos(theta)) / (math.sin(incl) * np.sin(theta))
    expected = np.arccos(np.clip(cosine, -1.0, 1.0))
    got = horizon_azimuth(rings_at(star, load_ray_table(), theta))
    np.testing.assert_allclose(np.cos(got), np.cos(expected), atol=1e-11)


def test_transitions_of_a_sphere_in_closed_form() -> None:
    """Wholly visible up to psi_h - i, hidden from psi_h + i or beyond the far side."""
    star = star_of(300.0, 40.0, figure="sphere")
    psi = float(deflection(0.0, star.schwarzschild_radius_km / 12.0))
    incl = math.radians(40.0)
    expected = sorted(t for t in (psi - incl, psi + incl, 2 * np.pi - psi - incl) if 0 < t < np.pi)
    np.testing.assert_allclose(visibility_transitions(star, load_ray_table()), expected, atol=1e-10)


def test_transitions_are_where_the_horizon_azimuth_reaches_its_ends() -> None:
    """On random oblate stars a slow scan sees the kind of ring change there and nowhere else."""
    rng = np.random.default_rng(8)
    table, theta = load_ray_table(), np.linspace(1e-3, np.pi - 1e-3, 4001)
    for _ in range(12):
        star = random_star(rng)
        reach = horizon_azimuth(rings_at(star, table, theta))
        kind = np.where(reach >= np.pi, 2, np.where(reach <= 0.0, 0, 1))
        change = np.nonzero(np.diff(kind))[0]
        found = visibility_transitions(star, table)
        assert len(found) == len(change)
        assert np.all((theta[change] <= found) & (found <= theta[change + 1]))


def test_a_pole_on_star_shows_whole_rings_or_none() -> None:
    """At zero inclination the azimuth plays no part."""
    star = star_of(500.0, 0.0)
    reach = horizon_azimuth(rings_at(star, load_ray_table(), np.linspace(0.05, 3.1, 40)))
    assert set(np.round(reach, 12)) == {0.0, round(math.pi, 12)}
