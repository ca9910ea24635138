"""Emission of the surface."""

from __future__ import annotations

import numpy as np
import pytest

from exptime.constants import BLACKBODY_PHOTONS
from exptime.star.emission import angular_factor, occupation, occupation_by_log_temperature
from exptime.star.records import Emission


@pytest.mark.parametrize("h", [-0.5, 0.0, 0.5, 20.0])
def test_limb_darkening_keeps_the_flux(h: float) -> None:
    """The flux-weighted mean 2 int I mu dmu is one for any coefficient."""
    x, weight = np.polynomial.legendre.leggauss(8)
    mu = 0.5 * (x + 1.0)
    factor = angular_factor(Emission(model="limb-darkened", coefficient=h), mu)
    assert np.sum(weight * mu * factor) == pytest.approx(1.0, rel=1e-14)
    if h > 0.0:
        assert np.all(np.diff(factor) > 0.0)


def test_planck_limits() -> None:
    """kT/E at low, exp(-E/kT) at high energy; no overflow at absurd ones."""
    assert occupation(np.array(1e-8)) == pytest.approx(1e8, rel=1e-7)
    assert occupation(np.array(40.0)) == pytest.approx(np.exp(-40.0), rel=1e-15)
    assert occupation(np.array(1e5)) == 0.0


def test_blackbody_photon_flux() -> None:
    """Pi times the integral over energy: 2.3760555e32 (kT/keV)³ cm^-2 s^-1 (CODATA constants)."""
    x, weight = np.polynomial.laguerre.laggauss(60)
    kev = 0.3
    integral = np.sum(weight * np.exp(x) * x**2 * occupation(x)) * kev**3
    assert np.pi * BLACKBODY_PHOTONS * integral == pytest.approx(2.3760555e32 * kev**3, rel=1e-6)


@pytest.mark.parametrize("ratio", [0.01, 0.5, 3.0, 12.0])
def test_temperature_derivative(ratio: float) -> None:
    """Against a fourth-order difference in ln kT, 1e-9."""
    step = 1e-3

    def at(shift: float) -> float:
        return float(occupation(np.array(ratio * np.exp(-shift))))

    slope = (8 * (at(step) - at(-step)) - (at(2 * step) - at(-2 * step))) / (12 * step)
    got = float(occupation_by_log_temperature(np.array(ratio)))
    assert got == pytest.approx(slope, rel=1e-9)
