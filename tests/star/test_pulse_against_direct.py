"""Pulses against direct integration: a stored set, random stars, and physics broken on purpose."""

from __future__ import annotations

import json
import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from exptime.arrays import Floats
from exptime.star.convergence import photon_flux
from exptime.star.records import Emission, HotSpot, Star
from exptime.star.view import star_fault
from tests.star.direct_integration import Mesh, direct_photon_flux, element_photon_flux
from tests.star.direct_surface import Belt, Mistake

REFERENCES = json.loads(
    Path(__file__).with_name("reference_pulses.json").read_text(encoding="utf-8")
)
PROMISED = 1e-5
"""Largest difference over the peak of its energy that the program promises."""

FAST = Star(mass_msun=1.4, radius_km=12.0, spin_hz=700.0, cos_inclination=0.4)
DARKENED = Emission(model="limb-darkened", coefficient=0.8)
ENERGIES = np.array([0.3, 1.0, 2.0])


def difference(one: Floats, other: Floats) -> float:
    """Return the largest difference over the peak of its energy."""
    return float(np.max(np.abs(one - other) / np.max(other, axis=0)))


@pytest.mark.parametrize("case", REFERENCES, ids=[case["name"] for case in REFERENCES])
def test_pulse_is_that_of_direct_integration(case: dict[str, Any]) -> None:
    """Within the promised 1e-5; the reference itself is good to 1e-6."""
    assert case["error"] < 1e-6
    flux = np.array(case["photon_flux"])
    ours = photon_flux(
        Star(**case["star"]),
        [HotSpot(**spot) for spot in case["spots"]],
        Emission(**case["emission"]),
        case["distance_pc"],
        np.array(case["energies_kev"]),
        len(flux),
    )
    assert ours.shape == flux.shape
    assert difference(ours, flux) < PROMISED


def test_references_cover_what_is_promised() -> None:
    """From 1 to 700 Hz, 0.01 to 1.2 rad, both figures and laws, poles covered, one or two spots."""
    stars = [case["star"] for case in REFERENCES]
    spots = [spot for case in REFERENCES for spot in case["spots"]]
    radii = [spot["angular_radius"] for spot in spots]
    assert len(REFERENCES) >= 16
    assert (min(s["spin_hz"] for s in stars), max(s["spin_hz"] for s in stars)) == (1.0, 700.0)
    assert (min(radii), max(radii)) == (0.01, 1.2)
    assert {s["figure"] for s in stars} == {"oblate", "sphere"}
    assert {case["emission"]["model"] for case in REFERENCES} == {"blackbody", "limb-darkened"}
    assert {len(case["spots"]) for case in REFERENCES} == {1, 2}
    assert any(s["colatitude"] < s["angular_radius"] for s in spots)
    assert any(math.pi - s["colatitude"] < s["angular_radius"] for s in spots)
    assert any(np.min(case["photon_flux"]) == 0.0 for case in REFERENCES)


stars = st.builds(
    Star,
    mass_msun=st.floats(1.2, 2.0),
    radius_km=st.floats(11.0, 13.5),
    spin_hz=st.floats(0.0, math.log(700.0)).map(math.exp) | st.floats(300.0, 700.0),
    cos_inclination=st.floats(0.0, 1.0),
    figure=st.sampled_from(["oblate", "sphere"]),
).filter(lambda star: star_fault(star) is None)
hot_spots = st.builds(
    HotSpot,
    colatitude=st.floats(0.0, math.pi),
    longitude=st.floats(0.0, 2.0 * math.pi),
    angular_radius=st.floats(math.log(0.01), math.log(1.2)).map(math.exp),
    temperature_kev=st.floats(0.08, 0.3),
)
emissions = st.just(Emission()) | st.builds(
    Emission, model=st.just("limb-darkened"), coefficient=st.floats(0.0, 2.0)
)


@pytest.mark.slow
@settings(max_examples=40)
@given(star=stars, spot=hot_spots, emission=emissions)
def test_pulse_of_any_star_is_that_of_direct_integration(
    star: Star, spot: HotSpot, emission: Emission
) -> None:
    """Within 1e-5, where the spot reaches 1e-6 of what it would give face-on at all.

    A spot that only peeps over the limb has a peak too low to divide by.
    """
    scene = (star, [spot], emission, 250.0, ENERGIES, 32)
    face_on = Star(
        mass_msun=star.mass_msun, radius_km=star.radius_km, spin_hz=1.0, cos_inclination=1.0
    )
    pole = HotSpot(
        colatitude=0.0,
        longitude=0.0,
        angular_radius=spot.angular_radius,
        temperature_kev=spot.temperature_kev,
    )
    peak = photon_flux(face_on, [pole], emission, 250.0, ENERGIES, 32)[0]
    direct, ours = direct_photon_flux(*scene, mesh=Mesh(rows=200)), photon_flux(*scene)
    floor = np.maximum(direct.max(axis=0), 1e-6 * peak)
    assert float(np.max(np.abs(ours - direct) / floor)) < PROMISED


def test_rows_and_surface_elements_give_the_same_pulse() -> None:
    """Two ways to sum that share no geometry of the spot; a cap over the pole, never cut."""
    cap = HotSpot(colatitude=0.2, longitude=1.0, angular_radius=0.4, temperature_kev=0.15)
    scene = (FAST, [cap], DARKENED, 250.0, ENERGIES, 32)
    elements = element_photon_flux(*scene, radial=10, azimuthal=32)
    assert difference(elements, direct_photon_flux(*scene)) < 1e-9


@pytest.mark.slow
def test_surface_elements_converge_to_rows_where_the_horizon_cuts() -> None:
    """Their error falls with the cube of their size: by five at least for half of it.

    The finer sum lies within the promise of the rows.
    """
    spot = HotSpot(colatitude=1.0, longitude=0.7, angular_radius=0.3, temperature_kev=0.15)
    scene = (FAST, [spot], DARKENED, 250.0, ENERGIES, 32)
    rows = direct_photon_flux(*scene)
    coarse, fine = (
        difference(element_photon_flux(*scene, radial=n, azimuthal=3 * n), rows) for n in (8, 16)
    )
    assert fine < PROMISED
    assert fine < coarse / 5.0


@settings(max_examples=40)
@given(theta=st.floats(0.1, 3.0), azimuth=st.floats(-1.5, 1.5))
def test_twin_sees_elements_stretched_by_their_motion(theta: float, azimuth: float) -> None:
    """At one observer time an element of longitude spans 1/(1 - beta cos xi) of azimuth.

    This stretching, from retarded time alone, is the factor delta gamma in the flux. A central
    difference of 1e-4 turns, good to 1e-7.
    """
    belt, row = Belt(FAST, np.array([theta])), np.array([0])
    light = belt.light(np.array([azimuth]), row)
    arrival = belt.arrival(np.array([azimuth]), row)
    step = 1e-4
    after, before = (belt.emission_azimuth(arrival + sign * step, row) for sign in (1.0, -1.0))
    stretched = float((after - before)[0]) / (4.0 * math.pi * step)
    expected = 1.0 / (1.0 - float(belt.beta[0] * light.cos_xi[0]))
    assert stretched == pytest.approx(expected, rel=1e-6)


@pytest.mark.parametrize(
    "mistake",
    [
        "drop_delay",
        "flip_tilt",
        "forget_gamma",
        "limb_at_static_angle",
        "forget_redshift_in_beta",
        "drop_backward_rays",
        "drop_radial_delay",
    ],
)
def test_broken_physics_would_be_noticed(mistake: Mistake) -> None:
    """Each mistake moves the pulse of a fast oblate star ten times further than the check allows.

    The same twin without it agrees with the program, so that the comparison tells them apart.
    """
    spots = [HotSpot(colatitude=1.9, longitude=0.7, angular_radius=0.5, temperature_kev=0.15)]
    scene = (FAST, spots, DARKENED, 250.0, ENERGIES, 32)
    ours = photon_flux(*scene)
    mesh = Mesh(rows=120)
    assert difference(direct_photon_flux(*scene, mesh=mesh), ours) < PROMISED
    broken = direct_photon_flux(*scene, mesh=mesh, mistake=mistake)
    assert difference(broken, ours) > 10.0 * PROMISED
