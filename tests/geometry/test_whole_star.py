"""The most that a star can radiate, against the pulse of a star hot all over."""

from __future__ import annotations

import math
import re

import numpy as np
import pytest
from scipy.integrate import simpson

from exptime.constants import KEV_ERG
from exptime.errors import UnreachableError
from exptime.geometry.whole_star import refuse_too_bright, whole_star_flux
from exptime.star.convergence import photon_flux
from exptime.star.records import Emission, HotSpot
from tests.geometry.targets import search_of
from tests.makers.scenes import star_of


@pytest.mark.parametrize("emission", [Emission(), Emission(model="limb-darkened", coefficient=0.8)])
def test_a_star_covered_by_one_spot(emission: Emission) -> None:
    """A spot of radius pi on a slow sphere, integrated over the band by Simpson's rule."""
    search = search_of(column_density="0 cm-2")
    star = star_of(1.0, 50.0, figure="sphere")
    everywhere = HotSpot(
        colatitude=1.0, longitude=0.0, angular_radius=math.pi, temperature_kev=0.12
    )
    energies = np.linspace(0.5, 2.0, 301)
    photons = photon_flux(star, (everywhere,), emission, 400.0, energies, 4).mean(axis=0)
    expected = float(simpson(photons * energies, x=energies)) * KEV_ERG
    assert whole_star_flux(search, star, 0.12) == pytest.approx(expected, rel=1e-5)


def test_a_star_that_could_do_it_is_not_refused() -> None:
    """Just below and just above the most of a star of fixed mass and radius."""
    changes = {"mass": "1.4 Msun", "radius": "12 km"}
    star = star_of(250.0)
    most = whole_star_flux(search_of(**changes), star, 0.12)
    for factor, is_refused in ((0.999, False), (1.001, True)):
        flux = f"{{value: {most * factor:.8e} erg s-1 cm-2, band: 0.5-2.0 keV, absorbed: true}}"
        search = search_of(flux=flux, **changes)
        if is_refused:
            with pytest.raises(UnreachableError):
                refuse_too_bright(search)
        else:
            refuse_too_bright(search)


@pytest.mark.parametrize("band", [(0.1, 0.2), (2.0, 4.0)])
def test_the_brightest_of_the_stars_that_may_be_drawn_counts(band: tuple[float, float]) -> None:
    """A heavy star is brighter in soft light, a light one in hard light: neither is refused."""
    text = f"band: {band[0]}-{band[1]} keV, absorbed: true"
    probe = search_of(flux=f"{{value: 1e-13 erg s-1 cm-2, {text}}}")
    most = max(
        whole_star_flux(probe, star_of(250.0, mass_msun=mass, radius_km=13.0), 0.12)
        for mass in (1.2, 2.0)
    )
    refuse_too_bright(search_of(flux=f"{{value: {0.99 * most:.8e} erg s-1 cm-2, {text}}}"))
    with pytest.raises(UnreachableError):
        refuse_too_bright(search_of(flux=f"{{value: {1.01 * most:.8e} erg s-1 cm-2, {text}}}"))


def test_the_message_names_what_would_do() -> None:
    """The distance and the temperature it gives are no longer refused."""
    flux = "{value: 3e-10 erg s-1 cm-2, band: 0.5-2.0 keV, absorbed: true}"
    with pytest.raises(UnreachableError) as caught:
        refuse_too_bright(search_of(flux=flux))
    message = str(caught.value)
    assert "t.yaml, flux" in message
    found = re.search(r"distance below ([\d.]+) pc or a temperature above ([\d.]+) keV", message)
    assert found
    distance, temperature = (float(text) for text in found.groups())
    refuse_too_bright(search_of(flux=flux, distance=f"{0.99 * distance} pc"))
    hotter = f"{{value: {1.01 * temperature} keV, frame: surface}}"
    refuse_too_bright(search_of(flux=flux, temperature=hotter))
