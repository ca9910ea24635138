"""The table of rays against the integrals it stands for."""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
import pytest

from exptime.arrays import Floats
from exptime.star.ray_table import RAY_TABLE_MAX_U, RAY_TABLE_MAX_X, load_ray_table
from exptime.star.rays import deflection_of_angle, delay_of_angle
from exptime.tables import rays as maker


@pytest.fixture(scope="module")
def points() -> tuple[Floats, Floats, Floats]:
    """Random compactness, emission angle and deflection, inward rays included."""
    rng = np.random.default_rng(11)
    u = rng.uniform(0.01, 0.555, 4000)
    alpha = rng.uniform(0.01, np.pi / 2 + 0.16, 4000)
    with np.errstate(all="ignore"):
        psi = deflection_of_angle(alpha, u)
    horizon = deflection_of_angle(np.full_like(u, np.pi / 2), u)
    keep = (psi / horizon) ** 2 < 0.999 * RAY_TABLE_MAX_X
    keep &= psi < np.pi - 0.05
    return u[keep], alpha[keep], psi[keep]


def test_points_include_rays_that_leave_inwards(points: tuple[Floats, Floats, Floats]) -> None:
    """The checks below would miss the tilted surface otherwise."""
    assert np.mean(points[1] > np.pi / 2) > 0.03


def test_table_agrees_with_the_integrals(points: tuple[Floats, Floats, Floats]) -> None:
    """To 1e-12, plus what rounding of cos(psi) does where sin(psi) is small."""
    u, alpha, psi = points
    bent = load_ray_table().at(u).bend(np.cos(psi)[:, None])
    rounding = 4e-16 / np.sin(psi)
    assert np.all(np.abs(bent.cos_alpha[:, 0] - np.cos(alpha)) < 1e-12 + rounding)
    assert np.all(np.abs(bent.delay[:, 0] - delay_of_angle(alpha, u)) < 1e-12 + 4 * rounding)
    ratio = np.sin(alpha) / np.sin(psi)
    assert np.all(np.abs(bent.sine_ratio[:, 0] / ratio - 1.0) < 2e-12 + rounding / np.sin(psi))


def test_lensing_is_the_derivative_of_the_integral(points: tuple[Floats, Floats, Floats]) -> None:
    """sin(alpha)/(sin(psi) dpsi/dalpha), the slope by an eighth-order difference: 1e-9."""
    u, alpha, psi = (values[:1500] for values in points)
    step = 2e-3
    weights = {1: 4 / 5, 2: -1 / 5, 3: 4 / 105, 4: -1 / 280}
    slope = (
        sum(
            weight
            * (deflection_of_angle(alpha + k * step, u) - deflection_of_angle(alpha - k * step, u))
            for k, weight in weights.items()
        )
        / step
    )
    expected = np.sin(alpha) / (np.sin(psi) * slope)
    bent = load_ray_table().at(u).bend(np.cos(psi)[:, None])
    np.testing.assert_allclose(bent.lensing[:, 0], expected, rtol=1e-9)


def test_one_point_per_ring_agrees_with_many(points: tuple[Floats, Floats, Floats]) -> None:
    """The quick route to cos(alpha) is the same series."""
    u, _, psi = points
    series = load_ray_table().at(u)
    np.testing.assert_allclose(
        series.cos_alpha(np.cos(psi)), series.bend(np.cos(psi)[:, None]).cos_alpha[:, 0], atol=2e-14
    )


def test_straight_up_is_regular() -> None:
    """At psi = 0 the lensing factor is 1 - u and the ratio of sines sqrt(1 - u)."""
    u = np.array([0.1, 0.3, 0.5])
    bent = load_ray_table().at(u).bend(np.ones((3, 1)))
    np.testing.assert_allclose(bent.lensing[:, 0], 1.0 - u, rtol=1e-12)
    np.testing.assert_allclose(bent.sine_ratio[:, 0], np.sqrt(1.0 - u), rtol=1e-12)
    np.testing.assert_allclose(bent.delay[:, 0], 0.0, atol=1e-14)


def test_beyond_the_table_rays_are_those_of_its_end() -> None:
    """Nothing visible lies there; the values stay finite and on the dark side of the horizon."""
    u = np.array([0.2, 0.4])
    series = load_ray_table().at(u)
    end = series.psi_horizon * np.sqrt(RAY_TABLE_MAX_X)
    beyond = np.minimum(end + 0.3, np.pi - 1e-3)
    at_end = series.cos_alpha(np.cos(end))
    np.testing.assert_allclose(series.cos_alpha(np.cos(beyond)), at_end, rtol=1e-12)
    assert np.all(at_end < 0.0)
    bent = series.bend(np.cos(beyond)[:, None])
    assert np.isfinite(bent.lensing).all()
    assert np.isfinite(bent.delay).all()


def test_remade_table_is_the_shipped_one(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """`python -m exptime.tables.rays FILE` writes the same coefficients to 1e-13."""
    target = tmp_path / "rays.npz"
    monkeypatch.setattr(sys, "argv", ["rays", str(target)])
    maker.main()
    shipped = Path(maker.__file__).with_name("data") / "rays.npz"
    with np.load(target) as new, np.load(shipped) as old:
        assert set(new) == set(old) == {"bend", "delay", "horizon"}
        for name in new:
            np.testing.assert_allclose(new[name], old[name], rtol=0, atol=1e-13)


def test_series_have_converged() -> None:
    """The last coefficients in each variable are at rounding."""
    table = load_ray_table()
    for series in table.series[[0, 2]]:
        assert np.abs(series[:, -3:]).max() < 1e-12
        assert np.abs(series[-3:]).max() < 1e-12
    assert RAY_TABLE_MAX_U < 0.568
