"""Given geometries beside what was measured; frames of temperature; drawn sets."""

from __future__ import annotations

import math

import numpy as np
import pytest

from exptime.errors import OutOfRangeError
from exptime.instrument.reader import read_instrument
from exptime.interstellar.absorption import load_absorption
from exptime.parallel import workers
from exptime.study.forecast import make_forecast
from exptime.study.geometries import GeometrySet, geometries_of, known_geometry
from exptime.target.records import Target
from tests.study.cases import DRAWN, KNOWN, draws_of, instrument_of, target_of

FLUX = "{{value: {} erg s-1 cm-2, uncertainty: {}, band: 0.5-2.0 keV, absorbed: true}}"
FRACTION = "{{value: {:.6f}, uncertainty: {}, definition: rms, band: 0.5-2.0 keV}}"


def geometries(target: Target, count: int = 12) -> GeometrySet:
    """Return the geometries of a target."""
    absorption = load_absorption(target.abundances)
    with workers(1) as team:
        return geometries_of(target, draws_of(count), absorption, read_instrument, team)


def test_a_fraction_beside_the_hot_spots_is_compared() -> None:
    """Within two of its standard deviations nothing is said; beyond, the hot spots stand."""
    probe = geometries(target_of(KNOWN, pulsed_fraction=FRACTION.format(0.4, 0.04)))
    value = float(probe.fractions[0, 0])
    for offset, count in ((1.9, 0), (-1.9, 0), (2.1, 1), (-2.1, 1)):
        text = FRACTION.format(value + 0.04 * offset, 0.04)
        found = geometries(target_of(KNOWN, pulsed_fraction=text))
        assert len(found.warnings) == count
        assert found.geometries == probe.geometries
        assert all("The hot spots stand." in each and "rms" in each for each in found.warnings)


def test_a_flux_beside_the_hot_spots_is_compared() -> None:
    """By its uncertainty, or by 10 per cent where none was given."""
    probe = geometries(target_of(KNOWN, flux=FLUX.format("1e-10", "1 %")))
    assert len(probe.warnings) == 1
    value = float(probe.warnings[0].split("flux of ")[1].split()[0])
    for factor, uncertainty, count in ((1.08, "5 %", 0), (1.15, "5 %", 1), (1.15, None, 0)):
        text = FLUX.format(f"{value * factor:.4e}", uncertainty)
        if uncertainty is None:
            text = text.replace("uncertainty: None, ", "")
        assert len(geometries(target_of(KNOWN, flux=text)).warnings) == count


def test_a_known_geometry_is_the_one_given() -> None:
    """Angles in radians, the star at 1.4 Msun and 12 km where nothing else was said."""
    star, spots = known_geometry(target_of(KNOWN))
    assert (star.mass_msun, star.radius_km, star.spin_hz) == (1.4, 12.0, 300.0)
    assert star.cos_inclination == pytest.approx(0.5)
    assert len(spots) == 1
    assert spots[0].colatitude == pytest.approx(math.radians(70.0))
    assert spots[0].angular_radius == pytest.approx(math.radians(12.0))
    star, _ = known_geometry(target_of(KNOWN, mass="1.7 Msun", radius="11 km"))
    assert (star.mass_msun, star.radius_km) == (1.7, 11.0)


def test_an_edge_on_star_has_no_negative_cosine() -> None:
    """Rounding of 90 deg must not look from below."""
    star, _ = known_geometry(target_of(KNOWN, inclination="90 deg"))
    assert 0.0 <= star.cos_inclination < 1e-15


def test_a_star_outside_the_model_is_refused() -> None:
    """However it came about."""
    from dataclasses import replace

    target = target_of(KNOWN)
    assert target.radius is None
    from exptime.target.records import Measured

    dense = replace(target, mass=Measured(value=2.5), radius=Measured(value=9.0))
    with pytest.raises(OutOfRangeError):
        known_geometry(dense)


@pytest.mark.slow
def test_an_observed_temperature_is_the_surface_one_redshifted() -> None:
    """The same geometries from both frames, for a star whose redshift is known."""
    star = {"mass": "1.4 Msun", "radius": "12 km"}
    hot = 0.12
    redshift = 1.0 / math.sqrt(1.0 - 2.0 * 1.476625 * 1.4 / 12.0)
    surface = geometries(target_of(DRAWN, **star))
    seen = f"{{value: {hot / redshift:.10f} keV, frame: observed}}"
    observed = geometries(target_of(DRAWN, temperature=seen, **star))
    np.testing.assert_allclose(observed.weights, surface.weights, rtol=1e-3)
    for (_, one), (_, two) in zip(observed.geometries, surface.geometries, strict=True):
        for here, there in zip(one, two, strict=True):
            assert here.temperature_kev == pytest.approx(there.temperature_kev, rel=1e-5)
            assert here.angular_radius == pytest.approx(there.angular_radius, rel=1e-3)
            assert here.colatitude == there.colatitude


def test_what_is_not_given_is_an_assumption_said_once() -> None:
    """Each word of the trade stands in one sentence; given things are no assumption."""
    found = make_forecast(
        target_of(KNOWN), instrument_of(), [1e6], read_instrument=read_instrument
    ).assumptions
    assert len(set(found)) == len(found)
    for words in (
        *("blackbod", "abundances", "oblate", "The mass was not given"),
        *("The radius was not given", "column was given without", "dark", "drag space"),
        "The instrument is invented.",
    ):
        assert sum(words in sentence for sentence in found) == 1, words
    everything = target_of(
        KNOWN,
        mass="{value: 1.4 Msun, uncertainty: 0.1 Msun}",
        radius="{value: 12 km, uncertainty: 1 km}",
        column_density="{value: 2e20 cm-2, uncertainty: 5 %}",
        emission="{model: limb-darkened, coefficient: 0.5}",
        figure="sphere",
        abundances="solar-1982",
    )
    text = "\n".join(
        make_forecast(
            everything, instrument_of(), [1e6], read_instrument=read_instrument
        ).assumptions
    )
    assert "not given" not in text
    for words in ("1 + 0.5 mu", "a sphere", "Anders & Ebihara (1982)"):
        assert text.count(words) == 1
