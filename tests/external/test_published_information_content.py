"""Published statements on how well pulses measure mass and radius: orders of magnitude.

Sources, by what their abstracts state:

* Lo, Miller, Bhattacharyya & Lamb 2013, ApJ 776, 19 (arXiv:1304.2330): 2-30 keV, 10 m² class
  area, 1e6 counts from the spot. Spot within 10° of the rotation equator: mass and radius each
  usually to about 10 per cent; within 20° of the pole: no useful constraint.
* Psaltis, Özel & Chakrabarty 2014, ApJ 787, 136 (arXiv:1311.1571): spins of 300-800 Hz, two
  energy bands; a bolometric profile alone cannot separate mass and radius, 1e6 counts in the
  profile suffice for 5 per cent or better in radius.
* Miller & Lamb 2015, ApJ 808, 31 (arXiv:1407.2579): spin of 600 Hz or more, spot and observer
  both within 30° of the equator, fractional rms of 10 per cent or more, 1e7 counts or more: both
  to 7 per cent or better.

Assumed here, as the abstracts leave it open: 1.6 solar masses, 11.8 km; one circular spot of 25°
(10° for Psaltis et al.); 2 keV (1 keV) at the surface; I(mu) ~ 1 + mu/2 for the first and last,
isotropic for the second; no absorbing column; grey area of 10 m² in 28 log-spaced channels; 32
phase bins; distance free; no prior at all. Background: for Lo et al. nine counts for each of
the spot's (a figure from memory), for Miller & Lamb four, both with the spot's mean spectrum and
an unknown level in every channel; none for Psaltis et al. Factors of two are allowed, since a
Fisher bound is optimistic and none of the papers' posteriors can be repeated from the abstracts.
"""

from __future__ import annotations

import math

import numpy as np
import pytest

from exptime.arrays import Floats
from exptime.information.covariance import invert
from exptime.information.matrix import background_levels, information_per_second
from exptime.instrument.records import BackgroundKnowledge
from exptime.observation.linearise import linearise
from exptime.observation.scene import Scene
from exptime.star.records import Emission, HotSpot, Star
from tests.external.recording import Checks
from tests.makers.scenes import flat_response, resolutions_of

pytestmark = pytest.mark.external

LO = "Lo, Miller, Bhattacharyya & Lamb 2013, ApJ 776, 19, abstract"
MILLER = "Miller & Lamb 2015, ApJ 808, 31, abstract"
PSALTIS = "Psaltis, Özel & Chakrabarty 2014, ApJ 787, 136, abstract"

EMISSION = {
    "darkened": Emission(model="limb-darkened", coefficient=0.5),
    "isotropic": Emission(),
}


def relative_errors(
    angles_deg: tuple[float, float],
    counts: float,
    *,
    spin_hz: float = 600.0,
    background: float = 0.0,
    radius_deg: float = 25.0,
    kev: float = 2.0,
    law: str = "darkened",
    channels: int = 28,
) -> tuple[float, float, float]:
    """Return sigma(M)/M, sigma(R)/R and the fractional rms of all counts.

    `angles_deg`: inclination and colatitude; `counts` from the spot and `background` per count.
    """
    star = Star(
        mass_msun=1.6,
        radius_km=11.8,
        spin_hz=spin_hz,
        cos_inclination=math.cos(math.radians(angles_deg[0])),
    )
    spot = HotSpot(
        colatitude=math.radians(angles_deg[1]),
        longitude=0.0,
        angular_radius=math.radians(radius_deg),
        temperature_kev=kev,
    )
    scene = Scene(
        star=star, spots=(spot,), emission=EMISSION[law], distance_pc=8000.0, column_cm2=0.0
    )
    response = flat_response(2.0, 30.0, channels, 112 // channels, 1e5)
    linear = linearise(scene, response, 32, resolutions_of(scene, highest_kev=30.0))
    source = linear.source_per_s
    spectrum = source.mean(axis=0)
    exposure = counts / spectrum.sum()
    level = background * spectrum
    knowledge = BackgroundKnowledge(kind="unknown" if background else "known")
    information = information_per_second(
        source,
        linear.derivatives,
        level,
        background_levels(knowledge, level, np.geomspace(2.0, 30.0, channels + 1)),
    )
    free = [index for index, name in enumerate(linear.names) if name != "column_density"]
    matrix: Floats = information.at(np.array([exposure]))[0][np.ix_(free, free)]
    directions = np.zeros((2, len(free)))
    directions[0, 0], directions[1, 1] = 1.0 / 1.6, 1.0 / 11.8
    sigma = np.sqrt(np.diagonal(invert(matrix).covariance(directions)))
    total = source.sum(axis=1) + level.sum()
    return float(sigma[0]), float(sigma[1]), float(total.std() / total.mean())


@pytest.mark.parametrize("angles", [(90.0, 80.0), (60.0, 80.0), (75.0, 85.0)])
def test_a_million_counts_from_near_the_equator_give_ten_per_cent(
    checks: Checks,
    angles: tuple[float, float],
) -> None:
    """Lo et al. 2013: about 10 per cent in mass and radius, within a factor of two."""
    mass, radius, _ = relative_errors(angles, 1e6, background=9.0)
    for name, error in (("mass", mass), ("radius", radius)):
        checks.between(
            "spot by the equator, 1e6 counts: relative error", error, 0.05, 0.20,
            at=f"{name}, i = {angles[0]:g}°, theta = {angles[1]:g}°", theirs="usually about 0.10",
            source=LO, kind="published", note="inputs that the abstract leaves open are assumed",
        )  # fmt: skip


@pytest.mark.parametrize("angles", [(90.0, 20.0), (60.0, 20.0), (90.0, 10.0)])
def test_a_million_counts_from_near_the_pole_give_nothing_useful(
    checks: Checks,
    angles: tuple[float, float],
) -> None:
    """Lo et al. 2013: no useful constraint, here read as worse than 40 per cent in both."""
    mass, radius, _ = relative_errors(angles, 1e6, background=9.0)
    for name, error in (("mass", mass), ("radius", radius)):
        checks.between(
            "spot by the pole, 1e6 counts: relative error", error, 0.40, math.inf,
            at=f"{name}, i = {angles[0]:g}°, theta = {angles[1]:g}°",
            theirs="no useful constraint", source=LO, kind="published",
        )  # fmt: skip


@pytest.mark.parametrize("angles", [(70.0, 80.0), (75.0, 75.0), (80.0, 65.0)])
def test_ten_million_counts_at_600_hz_give_seven_per_cent(
    checks: Checks, angles: tuple[float, float]
) -> None:
    """Miller & Lamb 2015: 7 per cent or better at an rms of 10 per cent, within a factor of two."""
    mass, radius, rms = relative_errors(angles, 2e6, background=4.0)
    assert rms > 0.10
    for name, error in (("mass", mass), ("radius", radius)):
        checks.between(
            "600 Hz, 1e7 counts, rms of 10 %: relative error", error, 0.01, 0.14,
            at=f"{name}, i = {angles[0]:g}°, theta = {angles[1]:g}°", theirs="0.07 or better",
            source=MILLER, kind="published",
        )  # fmt: skip


@pytest.mark.parametrize("angles", [(60.0, 60.0), (80.0, 70.0)])
def test_a_million_counts_of_a_pulse_give_five_per_cent_in_radius(
    checks: Checks,
    angles: tuple[float, float],
) -> None:
    """Psaltis et al. 2014: 5 per cent or better, within a factor of two; 300 Hz is worse."""
    _, fast, _ = relative_errors(angles, 1e6, radius_deg=10.0, kev=1.0, law="isotropic")
    _, slow, _ = relative_errors(
        angles, 1e6, radius_deg=10.0, kev=1.0, law="isotropic", spin_hz=300.0
    )
    checks.between(
        "1e6 counts in the profile: relative error of the radius", fast, 0.005, 0.10,
        at=f"i = {angles[0]:g}°, theta = {angles[1]:g}°", theirs="0.05 or better",
        source=PSALTIS, kind="published",
    )  # fmt: skip
    assert fast < slow < 0.20


def test_a_bolometric_profile_alone_does_not_separate_mass_and_radius(checks: Checks) -> None:
    """Psaltis et al. 2014: one channel in place of 28 costs more than a factor of five."""
    many = relative_errors((60.0, 60.0), 1e6, radius_deg=10.0, kev=1.0, law="isotropic")
    one = relative_errors((60.0, 60.0), 1e6, radius_deg=10.0, kev=1.0, law="isotropic", channels=1)
    checks.between(
        "one energy channel over 28: error of the radius", one[1] / many[1], 5.0, math.inf,
        theirs="mass and radius cannot be separated", source=PSALTIS, kind="published",
    )  # fmt: skip
    assert one[1] > 0.2
