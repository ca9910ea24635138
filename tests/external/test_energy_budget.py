"""What leaves a star arrives: full-surface and flat limits, and the sky summed over.

Closed forms, from conservation alone: a still sphere that shines everywhere is a disc of apparent
radius R/sqrt(1-u) and temperature T sqrt(1-u) in every direction; every photon that leaves a
sphere (inward rays do not start there) crosses the sky at a rate slowed by its redshift and, on a
moving element, by 1/gamma. Relations: Misner, Thorne & Wheeler 1973, chapters 22, 25; the
comoving area gamma dS of an element fixed to the star: Bogdanov et al. 2019, ApJL 887, L26.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace

import numpy as np
import pytest

from exptime.arrays import Floats
from exptime.constants import BLACKBODY_PHOTONS, PARSEC_KM, SOLAR_MASS_KM
from exptime.star.convergence import photon_flux
from exptime.star.records import Emission, HotSpot, Star
from tests.external.recording import Checks

pytestmark = pytest.mark.external

KEV = 0.15
DISTANCE_PC = 300.0
BLACKBODY = Emission()
DARKENED = Emission(model="limb-darkened", coefficient=0.7)
APERY = 1.2020569031595942
CONSERVATION = "closed form, from conservation of photons and energy"


def sphere(spin_hz: float, cos_inclination: float, u: float = 0.34, radius: float = 12.0) -> Star:
    return Star(
        mass_msun=u * radius / (2.0 * SOLAR_MASS_KM),
        radius_km=radius,
        spin_hz=spin_hz,
        cos_inclination=cos_inclination,
        figure="sphere",
    )


def cap(colatitude: float, radius: float) -> HotSpot:
    return HotSpot(colatitude=colatitude, longitude=0.4, angular_radius=radius, temperature_kev=KEV)


WHOLE = (cap(0.0, math.pi / 2), cap(math.pi, math.pi / 2))
"""Two caps that together cover the star once."""


def planck(energies: Floats, kev: float) -> Floats:
    """Return the photon intensity, photons cm^-2 s^-1 keV^-1 sr^-1."""
    return np.asarray(BLACKBODY_PHOTONS * energies**2 / np.expm1(energies / kev))


def logarithmic_energies(count: int = 200) -> tuple[Floats, Floats]:
    """Return energies and weights that integrate a Planck law by number to 1e-10 and better."""
    x, weight = np.polynomial.legendre.leggauss(count)
    low, high = math.log(1e-7), math.log(60.0 * KEV)
    energies = np.exp(low + 0.5 * (high - low) * (x + 1.0))
    return energies, 0.5 * (high - low) * weight * energies


@pytest.mark.parametrize("emission", [BLACKBODY, DARKENED])
@pytest.mark.parametrize("cos_inclination", [0.0, 0.5, 1.0])
@pytest.mark.parametrize("u", [0.1, 0.34, 0.5])
def test_whole_still_star_is_its_apparent_disc(
    checks: Checks, u: float, cos_inclination: float, emission: Emission
) -> None:
    """Flux = pi (R_inf/D)² B(E, T sqrt(1-u)) at any inclination and darkening.

    The law I(mu) ~ (1 + h mu)/(1 + 2h/3) is made so that a disc gives the same flux. 2e-6: two
    hemispheres, each to 1e-6.
    """
    star = sphere(0.01, cos_inclination, u)
    energies = np.array([0.2, 0.5, 1.5])
    flux = photon_flux(star, WHOLE, emission, DISTANCE_PC, energies, 8)
    apparent = star.radius_km / math.sqrt(1.0 - u) / (DISTANCE_PC * PARSEC_KM)
    expected = math.pi * apparent**2 * planck(energies, KEV * math.sqrt(1.0 - u))
    checks.close(
        "whole still star: its apparent disc at the redshifted temperature", flux, expected,
        relative=2e-6, at=f"u = {u:g}, {emission.model}",
        source=CONSERVATION, kind="computed independently",
    )  # fmt: skip


@pytest.mark.parametrize("cos_inclination", [0.1, 0.7])
def test_one_spot_of_radius_pi_covers_the_star(checks: Checks, cos_inclination: float) -> None:
    """The spot that is the whole star, wherever it is centred."""
    star = sphere(0.01, cos_inclination)
    energies = np.array([0.3, 1.0])
    apparent = star.radius_km / math.sqrt(1.0 - 0.34) / (DISTANCE_PC * PARSEC_KM)
    expected = math.pi * apparent**2 * planck(energies, KEV * math.sqrt(1.0 - 0.34))
    for colatitude in (0.0, 1.1):
        flux = photon_flux(star, [cap(colatitude, math.pi)], BLACKBODY, DISTANCE_PC, energies, 8)
        checks.close(
            "one spot of radius pi: the same disc", flux, expected, relative=2e-6,
            source=CONSERVATION, kind="computed independently",
        )  # fmt: skip


def test_flat_space_shows_a_spot_by_its_cosine(checks: Checks) -> None:
    """For u = 1e-9: mean projected area of a small cap that never sets, and its pulse.

    A cap of radius rho has the projected area pi sin²(rho) cos(psi) R². Bins average cos(phi) by
    sinc(1/n). 2e-6 of the peak, twice the promise, for the weak field left.
    """
    theta, cos_i, rho, bins = 0.5, 0.8, 0.2, 16
    star = sphere(0.01, cos_i, u=1e-9)
    spot = HotSpot(colatitude=theta, longitude=0.0, angular_radius=rho, temperature_kev=KEV)
    energies = np.array([0.4])
    flux = photon_flux(star, [spot], BLACKBODY, DISTANCE_PC, energies, bins)[:, 0]
    phi = 2.0 * math.pi * (np.arange(bins) + 0.5) / bins
    swing = math.sqrt(1.0 - cos_i**2) * math.sin(theta)
    cosine = cos_i * math.cos(theta) + swing * np.cos(phi) * np.sinc(1.0 / bins)
    area = math.pi * math.sin(rho) ** 2 * (star.radius_km / (DISTANCE_PC * PARSEC_KM)) ** 2
    expected = area * cosine * planck(energies, KEV)
    checks.close(
        "flat space: projected area of a cap over a turn", flux / expected.max(),
        expected / expected.max(), absolute=2e-6, source="geometry", kind="computed independently",
    )  # fmt: skip


def over_the_sky(
    star: Star, spots: Sequence[HotSpot], emission: Emission, energies: Floats, nodes: int
) -> Floats:
    """Return 4 pi D² times the phase-averaged photon flux averaged over all directions.

    Directions below the equator are directions above it with the star turned over.
    """
    x, weight = np.polynomial.legendre.leggauss(nodes)
    total = np.zeros(len(energies))
    for node, share in zip(x, weight, strict=True):
        seen = replace(star, cos_inclination=abs(node))
        turned = [
            spot if node > 0 else replace(spot, colatitude=math.pi - spot.colatitude)
            for spot in spots
        ]
        flux = photon_flux(seen, turned, emission, DISTANCE_PC, energies, 8)
        total += 0.5 * share * flux.mean(axis=0)
    return 4.0 * math.pi * (DISTANCE_PC * PARSEC_KM) ** 2 * 1e10 * total


def photons_emitted(star: Star, spot: HotSpot) -> float:
    """Return photons per second of a static far clock that leave a spot.

    An element of comoving area gamma dS sends out pi times the integral of the photon intensity
    per proper second; a proper second lasts gamma/sqrt(1-u) far seconds: gamma cancels.
    """
    per_area = 2.0 * math.pi * BLACKBODY_PHOTONS * APERY * KEV**3
    area = 2.0 * math.pi * (1.0 - math.cos(spot.angular_radius)) * (star.radius_km * 1e5) ** 2
    return per_area * area * math.sqrt(1.0 - 2.0 * star.compactness)


@pytest.mark.parametrize(
    ("spin_hz", "colatitude", "radius"),
    [
        (0.01, 1.3, 0.3),
        (300.0, 1.3, 0.3),
        (700.0, 1.3, 0.3),
        (300.0, 0.3, 0.5),  # over the pole
        pytest.param(700.0, 0.3, 0.5, marks=pytest.mark.slow),
    ],
)
def test_every_photon_of_a_spinning_sphere_crosses_the_sky(
    checks: Checks, spin_hz: float, colatitude: float, radius: float
) -> None:
    """Photon number over the sky against photons emitted: Doppler, area, delay, bending at once.

    A factor gamma forgotten would be 1.3 per cent at 700 Hz by the equator. 1e-5: Gauss nodes over
    directions, where the mean flux has a kink of high order when the spot begins to set.
    """
    star, spot = sphere(spin_hz, 0.5), cap(colatitude, radius)
    energies, weight = logarithmic_energies(60)
    number = float(weight @ over_the_sky(star, [spot], BLACKBODY, energies, 16))
    checks.close(
        "photons of a spinning sphere over the whole sky, over those emitted",
        number / photons_emitted(star, spot), 1.0, relative=1e-5,
        at=f"{spin_hz:g} Hz, colatitude {colatitude:g}",
        source=CONSERVATION, kind="computed independently",
    )  # fmt: skip


def test_darkening_leaves_the_number_of_photons(checks: Checks) -> None:
    """The angular law redistributes photons over the sky, by the comoving angle at any speed."""
    star, spot = sphere(600.0, 0.5), cap(1.3, 0.4)
    energies, weight = logarithmic_energies(60)
    number = float(weight @ over_the_sky(star, [spot], DARKENED, energies, 16))
    checks.close(
        "limb-darkened photons at 600 Hz over the whole sky, over those emitted",
        number / photons_emitted(star, spot), 1.0, relative=1e-5,
        source=CONSERVATION, kind="computed independently",
    )  # fmt: skip


def test_luminosity_at_infinity_is_redshifted_twice(checks: Checks) -> None:
    """Still sphere with one spot: energy over the sky is L (1-u), L = area times sigma T⁴."""
    star, spot = sphere(0.01, 0.5), cap(1.0, 0.4)
    energies, weight = logarithmic_energies(60)
    power = float((weight * energies) @ over_the_sky(star, [spot], BLACKBODY, energies, 16))
    area = 2.0 * math.pi * (1.0 - math.cos(0.4)) * (star.radius_km * 1e5) ** 2
    local = BLACKBODY_PHOTONS * math.pi**5 / 15.0 * KEV**4 * area
    checks.close(
        "energy over the whole sky, over area times sigma T⁴ times (1-u)",
        power / (local * (1.0 - 0.34)), 1.0, relative=1e-5,
        source=CONSERVATION, kind="computed independently",
    )  # fmt: skip


def budget_of_an_oblate_spot(star: Star, spot: HotSpot) -> tuple[float, float]:
    """Return photons and energy (keV) per far second from a spot, by plain quadrature.

    Photons: sqrt(1-u) dS each second, as on a sphere. Energy: the far energy of what leaves per
    proper second is gamma sqrt(1-u) times the comoving one (its momentum along the motion cancels
    over the hemisphere about the normal), so (1-u) gamma dS: the factor gamma of the area stays.
    Figure: AlGendy & Morsink 2014, ApJ 791, 78, leading terms.
    """
    x, weight = np.polynomial.legendre.leggauss(60)
    rho = 0.5 * spot.angular_radius * (x + 1.0)
    chi = 2.0 * math.pi * np.arange(120) / 120
    solid = 0.5 * spot.angular_radius * weight * np.sin(rho) * 2.0 * math.pi / 120
    cosine = math.cos(spot.colatitude) * np.cos(rho)[:, None] - math.sin(
        spot.colatitude
    ) * np.outer(np.sin(rho), np.cos(chi))
    sine = np.sqrt(1.0 - cosine**2)
    x_star = star.compactness
    turning = (2.0 * math.pi * star.spin_hz * star.radius_km / 299792.458) ** 2 / x_star
    flat = turning * (-0.788 + 1.030 * x_star)
    radius = star.radius_km * (1.0 + flat * cosine**2)
    u = star.schwarzschild_radius_km / radius
    lean = -2.0 * star.radius_km * flat * sine * cosine / (radius * np.sqrt(1.0 - u))
    beta = 2.0 * math.pi * star.spin_hz * radius * sine / (299792.458 * np.sqrt(1.0 - u))
    area = solid[:, None] * (radius * 1e5) ** 2 * np.sqrt(1.0 + lean**2)
    photons = 2.0 * math.pi * BLACKBODY_PHOTONS * APERY * KEV**3 * area * np.sqrt(1.0 - u)
    energy = BLACKBODY_PHOTONS * math.pi**5 / 15.0 * KEV**4 * area * (1.0 - u)
    return float(photons.sum()), float((energy / np.sqrt(1.0 - beta**2)).sum())


@pytest.mark.parametrize(
    ("colatitude", "radius", "emission"),
    [
        pytest.param(0.8, 0.4, DARKENED, marks=pytest.mark.slow, id="darkened, tilted"),
        pytest.param(1.5, 0.3, BLACKBODY, id="by the equator"),
    ],
)
def test_budget_of_a_spinning_oblate_star(
    checks: Checks, colatitude: float, radius: float, emission: Emission
) -> None:
    """Photons and energy over the sky against those emitted, at 700 Hz on the oblate figure.

    Every direction above the tilted surface maps to one on the sky; leaving out rays that start
    inwards, gamma, the tilt's area or the local redshift shows. 1e-5, as on the sphere.
    """
    star, spot = replace(sphere(700.0, 0.5), figure="oblate"), cap(colatitude, radius)
    energies, weight = logarithmic_energies(60)
    spectrum = over_the_sky(star, [spot], emission, energies, 16)
    photons, energy = budget_of_an_oblate_spot(star, spot)
    for name, sent, arrived in (
        ("photons", photons, float(weight @ spectrum)),
        ("energy", energy, float((weight * energies) @ spectrum)),
    ):
        checks.close(
            "oblate star at 700 Hz: what crosses the whole sky, over what is emitted",
            arrived / sent, 1.0, relative=1e-5, at=f"{name}, {emission.model}",
            source="conservation, on the figure of AlGendy & Morsink 2014, ApJ 791, 78",
            kind="computed independently",
        )  # fmt: skip
