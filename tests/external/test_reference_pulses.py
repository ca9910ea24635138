"""Pulses of point spots with exact bending against tables worked out from the published relations.

Relations: Poutanen & Gierlinski 2003, MNRAS 343, 1301; Poutanen & Beloborodov 2006, MNRAS 373,
836; Beloborodov 2002, ApJ 566, L85. The tables were computed from them with mpmath, 25 digits,
apart from this program; a spot of 1e-4 rad stands for a point (1e-9 of the flux).
"""

from __future__ import annotations

import math

import numpy as np
import pytest

from exptime.arrays import Floats
from exptime.constants import BLACKBODY_PHOTONS, PARSEC_KM, SOLAR_MASS_KM
from exptime.star.convergence import photon_flux
from exptime.star.pulse import photon_harmonics
from exptime.star.ray_table import Bent, load_ray_table
from exptime.star.records import Emission, HotSpot, Star
from exptime.star.resolution import Resolution
from exptime.star.view import view_of
from tests.external.recording import Checks

pytestmark = pytest.mark.external

THIRD = 1.0 / 3.0
# Every sixteenth of a turn, spot at 30 degrees, observer at 60, u = 1/3:
# alpha (degrees), f of the spot, f of its antipode, f = cos(alpha) dcos(alpha)/dcos(psi)/(1-u).
SLOW = (
    (24.400249821145, 0.910736842220457, 0.0),
    (27.28890070878, 0.888792007794826, 0.0),
    (34.297942610882, 0.826332148377549, 0.0),
    (42.91012581992, 0.732940397216243, 0.0),
    (51.550523564045, 0.622878122900947, 0.0384655072741719),
    (59.264370239524, 0.512843605657551, 0.154408289069907),
    (65.354998527181, 0.419457473048235, 0.249822263533777),
    (69.26918788797, 0.356907781609, 0.312848823932085),
    (70.62127350885, 0.334895015190077, 0.334895015190077),
)
# Every sixteenth of a turn, 1.4 solar masses, 12 km, sphere, 400 Hz, spot at 50 degrees, observer
# at 60: cos(xi), delta, bolometric flux, delay (microseconds), arrival phase.
FAST = (
    (0.0, 0.995459292326, 0.4157729103487, 0.608510339172, 0.000243404135669),
    (-0.269878698164, 0.970527155252, 0.3540095783897, 2.63707794637, 0.0635548311785),
    (-0.50568481809, 0.949743178423, 0.2864413384529, 8.46681141193, 0.128386724565),
    (-0.677257824515, 0.935171614581, 0.2219092640053, 17.3597755161, 0.194443910206),
    (-0.760862376212, 0.928231966265, 0.1647447216671, 28.1754972026, 0.261270198881),
    (-0.739243832689, 0.930016535185, 0.1167538913592, 39.4702045404, 0.328288081816),
    (-0.600309273409, 0.941651114529, 0.07916895042717, 49.5823800299, 0.394832952012),
    (-0.342612717835, 0.964020002089, 0.05459200621664, 56.7327169591, 0.460193086784),
    (0, 0.995459292326, 0.04965249262837, 59.3424185406, 0.523736967416),
    (0.342612717835, 1.02901835398, 0.07565095850869, 56.7327169591, 0.585193086784),
    (0.600309273409, 1.0557896147, 0.1402786869905, 49.5823800299, 0.644832952012),
    (0.739243832689, 1.07080925362, 0.2362536851692, 39.4702045404, 0.703288081816),
    (0.760862376212, 1.0731848507, 0.3403310501047, 28.1754972026, 0.761270198881),
    (0.677257824515, 1.06405573866, 0.4231952103616, 17.3597755161, 0.819443910206),
    (0.50568481809, 1.0457990799, 0.463709567848, 8.46681141193, 0.878386724565),
    (0.269878698164, 1.02170618138, 0.4577271362562, 2.63707794637, 0.938554831179),
)
KEV = 0.1
RELATIONS = (
    "Poutanen & Gierlinski 2003, MNRAS 343, 1301; Poutanen & Beloborodov 2006, MNRAS 373, 836; "
    "worked out with mpmath, 25 digits"
)
SIXTEENTHS = [f"phase {k}/16" for k in range(16)]
POINT = 1e-4
DISTANCE_PC = 100.0


def bolometric(star: Star, colatitude: float, phases: Floats) -> Floats:
    """Return the energy flux of a point over intensity times comoving area by distance squared."""
    spot = HotSpot(colatitude=colatitude, longitude=0.0, angular_radius=POINT, temperature_kev=KEV)
    x, weight = np.polynomial.legendre.leggauss(120)
    energies = 0.5 * 60.0 * KEV * (x + 1.0)
    harmonics = photon_harmonics(
        view_of(star),
        [spot],
        Emission(),
        DISTANCE_PC,
        energies,
        [Resolution(harmonics=96, rings=8, redshift_terms=28)],
    )
    amplitudes = harmonics @ (0.5 * 60.0 * KEV * weight * energies)
    order = np.arange(len(amplitudes))
    waves = np.exp(2j * math.pi * np.outer(phases, order)) * np.where(order == 0, 1.0, 2.0)
    intensity = BLACKBODY_PHOTONS * KEV**4 * math.pi**4 / 15.0
    speed = 2.0 * math.pi * star.spin_hz * star.radius_km * math.sin(colatitude)
    beta = speed * star.redshift_factor / 299792.458
    area = star.radius_km**2 * 2.0 * math.pi * (1.0 - math.cos(POINT)) / math.sqrt(1.0 - beta**2)
    return np.real(waves @ amplitudes) / (intensity * area / (DISTANCE_PC * PARSEC_KM) ** 2)


def bent_towards(u: float, inclination: float, colatitude: float, azimuth: Floats) -> Bent:
    cos_psi = math.cos(inclination) * math.cos(colatitude)
    cos_psi = cos_psi + math.sin(inclination) * math.sin(colatitude) * np.cos(azimuth)
    return load_ray_table().at(np.array([u])).bend(cos_psi[None, :])


def still_star(inclination: float) -> Star:
    """Return a star of u = 1/3 that turns too slowly for any effect above 1e-9."""
    return Star(
        mass_msun=12.0 * THIRD / (2.0 * SOLAR_MASS_KM),
        radius_km=12.0,
        spin_hz=1e-6,
        cos_inclination=math.cos(inclination),
        figure="sphere",
    )


def test_rays_give_the_slow_pulse_and_its_antipode(checks: Checks) -> None:
    """1e-11: the table's digits; the antipode where it shows."""
    table = np.array(SLOW)
    azimuth = 2.0 * math.pi * np.arange(len(table)) / 16.0
    for column, colatitude, turn in ((1, 30.0, 0.0), (2, 150.0, math.pi)):
        bent = bent_towards(THIRD, math.radians(60.0), math.radians(colatitude), azimuth + turn)
        flux = np.maximum(bent.cos_alpha[0], 0.0) * bent.lensing[0] / (1.0 - THIRD)
        checks.close(
            "slow pulse, i = 60°, theta = 30°, u = 1/3: point and its antipode, f", flux,
            table[:, column], absolute=1e-11,
            at=[f"{('spot', 'antipode')[column - 1]}, {label}" for label in SIXTEENTHS[:9]],
            source=RELATIONS, kind="computed independently",
        )  # fmt: skip
        if column == 1:
            checks.close(
                "slow pulse: angle alpha (degrees)", np.degrees(np.arccos(bent.cos_alpha[0])),
                table[:, 0], relative=1e-11, at=SIXTEENTHS[:9], source=RELATIONS,
                kind="computed independently",
            )  # fmt: skip
    both = table[:, 1] + table[:, 2]
    assert both[8] == pytest.approx(0.669790030380154, abs=1e-14)


def test_pulse_of_a_slow_point_is_the_published_one(checks: Checks) -> None:
    """Energy flux I (1-u)² f dS/D². 1e-8: spot of finite size, 1e-9, and the quadrature."""
    table = np.array(SLOW)
    flux = bolometric(still_star(math.radians(60.0)), math.radians(30.0), np.arange(9) / 16.0)
    checks.close(
        "slow pulse through the whole pulse model, f", flux / (1.0 - THIRD) ** 2, table[:, 1],
        relative=1e-8, at=SIXTEENTHS[:9], source=RELATIONS, kind="computed independently",
    )  # fmt: skip


def test_pulse_of_a_fast_point_is_the_published_one(checks: Checks) -> None:
    """Energy flux I (1-u) delta⁵ cos(alpha) dcos(alpha)/dcos(psi) dS'/D² at the arrival phase.

    3e-8 of the peak: spot of finite size, expansion in the redshift, and arrival phases that the
    table gives to 1e-12.
    """
    table = np.array(FAST)
    star = Star(
        mass_msun=1.4,
        radius_km=12.0,
        spin_hz=400.0,
        cos_inclination=0.5,
        figure="sphere",
    )
    flux = bolometric(star, math.radians(50.0), table[:, 4])
    checks.close(
        "fast pulse, 400 Hz, i = 60°, theta = 50°, through the whole pulse model: bolometric flux",
        flux, table[:, 2], absolute=3e-8 * table[:, 2].max(), at=SIXTEENTHS, source=RELATIONS,
        kind="computed independently",
    )  # fmt: skip


def test_delays_of_the_fast_pulse_are_the_published_ones(checks: Checks) -> None:
    """Delays behind the radial ray to 1e-10, the table's digits."""
    table = np.array(FAST)
    star = Star(mass_msun=1.4, radius_km=12.0, spin_hz=400.0, cos_inclination=0.5, figure="sphere")
    azimuth = 2.0 * math.pi * np.arange(16) / 16.0
    u = 2.0 * star.compactness
    bent = bent_towards(u, math.radians(60.0), math.radians(50.0), azimuth)
    late = bent.delay[0] * star.radius_km / 299792.458
    checks.close(
        "fast pulse: delay (microseconds)", late * 1e6, table[:, 3], relative=1e-10,
        at=SIXTEENTHS, source=RELATIONS, kind="computed independently",
    )  # fmt: skip
    checks.close(
        "fast pulse: arrival phase", azimuth / (2.0 * math.pi) + star.spin_hz * late,
        table[:, 4], relative=1e-10, at=SIXTEENTHS, source=RELATIONS,
        kind="computed independently",
    )  # fmt: skip


def test_spot_on_the_limb_of_the_cosine_relation_is_hidden(checks: Checks) -> None:
    """At i = theta = 60 degrees, u = 1/3: psi = 120 degrees at the back, above 119.074.

    Beloborodov's relation puts it exactly on the limb. The bins about phase 1/2 hold nothing while
    cos(psi) < cos(119.074 degrees); the next ones hold some. 1e-6 of the peak is what is promised.
    """
    sixty = math.radians(60.0)
    spot = HotSpot(colatitude=sixty, longitude=0.0, angular_radius=1e-3, temperature_kev=KEV)
    flux = photon_flux(still_star(sixty), [spot], Emission(), DISTANCE_PC, np.array([0.5]), 128)[
        :, 0
    ]
    edge = (math.cos(math.radians(119.0740394988)) - 0.25) / 0.75
    hidden = 0.5 - math.acos(edge) / (2.0 * math.pi)  # half-width about phase 1/2
    away = np.abs((np.arange(128) + 0.5) / 128 - 0.5)
    inside = away + 0.5 / 128 < hidden - 1e-3
    outside = away - 0.5 / 128 > hidden + 1e-3
    assert inside.sum() >= 4
    checks.between(
        "point at psi = 120° beyond the horizon of 119.074°: flux over its peak",
        float(flux[inside].max() / flux.max()), -1e-6, 1e-6, theirs="0", source=RELATIONS,
        kind="computed independently",
    )  # fmt: skip
    assert flux[outside].min() > 1e-5 * flux.max()
