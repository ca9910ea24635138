"""Photons and energy in bands against scipy.integrate.quad; counts of an instrument."""

from __future__ import annotations

import itertools
from dataclasses import replace

import numpy as np
import pytest
from scipy.integrate import quad

from exptime.arrays import Floats
from exptime.constants import KEV_ERG
from exptime.instrument.reader import read_instrument
from exptime.instrument.records import (
    BackgroundKnowledge,
    EffectiveArea,
    Instrument,
    Redistribution,
)
from exptime.interstellar.absorption import Absorption, load_absorption
from exptime.observation.bands import Band, band_energy, band_responses
from exptime.observation.response import Response, timing_factor
from exptime.target.records import Flux

COLUMN, KT = 3e20, 0.15
BANDS = [(0.3, 1.5), (0.5, 2.0), (2.0, 8.0)]


@pytest.fixture(scope="module")
def absorption() -> Absorption:
    """Return the shipped cross-section."""
    return load_absorption("interstellar")


def photons(energies: Floats | float) -> Floats:
    """Return a blackbody photon spectrum with an arbitrary scale."""
    energy = np.asarray(energies, float)
    return np.asarray(energy**2 / np.expm1(energy / KT))


def folded(response: Response) -> Floats:
    """Fold the spectrum behind the column."""
    through = np.exp(-response.cross_section_cm2 * COLUMN)
    return np.asarray((photons(response.nodes_kev) * through) @ response.matrix)


def integral(absorption: Absorption, band: tuple[float, float], power: int, column: float) -> float:
    """Integrate energy**power times the spectrum behind a column, piece by piece."""
    inside = [float(edge) for edge in absorption.edges_kev if band[0] < edge < band[1]]

    def integrand(energy: float) -> float:
        section = float(absorption.cross_section_cm2(np.array([energy]))[0])
        return float(photons(energy)) * energy**power * float(np.exp(-section * column))

    ends = [band[0], *inside, band[1]]
    return sum(
        quad(integrand, low * (1 + 1e-13), high * (1 - 1e-13), epsrel=1e-9, limit=200)[0]
        for low, high in itertools.pairwise(ends)
    )


def instrument_of(area: EffectiveArea | None = None) -> Instrument:
    """Return an instrument without redistribution."""
    edges = np.linspace(0.3, 3.0, 28)
    return Instrument(
        id="invented",
        name="Invented",
        area=area
        or EffectiveArea(
            energies_kev=np.array([0.1, 1.0, 9.0]),
            area_cm2=np.array([100.0, 1000.0, 200.0]),
            source="invented",
        ),
        redistribution=Redistribution(),
        channel_edges_kev=edges,
        background_per_s=np.full(27, 0.01),
        background_knowledge=BackgroundKnowledge(kind="unknown"),
    )


def refuse(name: str) -> Instrument:
    """Read no instrument."""
    raise AssertionError(name)


@pytest.mark.parametrize("band", BANDS)
@pytest.mark.parametrize("absorbed", [True, False])
def test_energy_in_a_band(
    absorption: Absorption, band: tuple[float, float], absorbed: bool
) -> None:
    """Quad over the pieces between absorption edges; the column counts where it is absorbed."""
    flux = Flux(value=1.0, uncertainty=None, band_kev=band, absorbed=absorbed)
    expected = integral(absorption, band, 1, COLUMN if absorbed else 0.0) * KEV_ERG
    assert folded(band_energy(flux, absorption))[0] == pytest.approx(expected, rel=1e-6)


def test_photons_in_several_bands(absorption: Absorption) -> None:
    """One channel each, in the order asked for; no instrument is read."""
    bands = [Band(band_kev=band, instrument=None) for band in BANDS]
    found = folded(band_responses(bands, absorption, refuse))
    expected = [integral(absorption, band, 0, COLUMN) for band in BANDS]
    np.testing.assert_allclose(found, expected, rtol=1e-6)


def test_counts_are_weighted_by_the_area(absorption: Absorption) -> None:
    """A flat area of 500 cm²: photons times 500, beside the photons of another band."""
    flat = EffectiveArea(
        energies_kev=np.array([0.1, 9.0]), area_cm2=np.full(2, 500.0), source="flat"
    )
    bands = [
        Band(band_kev=(0.5, 2.0), instrument="flat"),
        Band(band_kev=(0.3, 1.5), instrument=None),
    ]
    found = folded(band_responses(bands, absorption, lambda name: instrument_of(flat)))
    counts = 500.0 * integral(absorption, (0.5, 2.0), 0, COLUMN)
    assert found[0] == pytest.approx(counts, rel=1e-5)
    assert found[1] == pytest.approx(integral(absorption, (0.3, 1.5), 0, COLUMN), rel=1e-6)


def test_a_band_of_counts_is_a_band_of_measured_energy(absorption: Absorption) -> None:
    """With a broad redistribution, soft photons are counted in a harder band."""
    broad = replace(
        instrument_of(), redistribution=Redistribution(fwhm_kev=0.5, at_kev=1.0, law="constant")
    )
    band = [Band(band_kev=(2.0, 3.0), instrument="broad")]
    spread = folded(band_responses(band, absorption, lambda name: broad))[0]
    sharp = folded(band_responses(band, absorption, lambda name: instrument_of()))[0]
    assert spread > 1.2 * sharp


def test_counts_of_a_coarse_clock_lose_their_harmonics() -> None:
    """A band measured in counts keeps the time bin of its instrument; photons keep everything."""
    bands = (
        Band(band_kev=(0.5, 1.5), instrument=None),
        Band(band_kev=(0.5, 1.5), instrument="coarse-imager"),
    )
    response = band_responses(bands, load_absorption(), read_instrument)
    factor = timing_factor(response, 300.0, 2)
    np.testing.assert_allclose(factor[:, 0], 1.0, rtol=0, atol=0)
    expected = np.sinc(np.arange(3) * 300.0 * 1.5e-3)
    smear = np.exp(-0.5 * (2.0 * np.pi * np.arange(3) * 300.0 * 20e-6) ** 2)
    np.testing.assert_allclose(factor[:, 1], expected * smear, rtol=1e-12)
