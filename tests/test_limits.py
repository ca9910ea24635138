"""Which stars the model refuses."""

from __future__ import annotations

import pytest
from astropy import constants, units
from hypothesis import given
from hypothesis import strategies as st

from exptime.limits import MAX_COMPACTNESS_U, RAY_TABLE_MAX_U, pole_radius_km, rotation, star_faults
from exptime.star.figure import radius_km
from exptime.star.records import Star


def test_rotation_is_the_square_of_spin_over_kepler() -> None:
    """Against astropy's constants for 600 Hz, 1.4 Msun, 12 km."""
    omega = 2.0 * 3.141592653589793 * 600.0 / units.s
    kepler = constants.G * 1.4 * constants.M_sun / (12.0 * units.km) ** 3
    expected = (omega**2 / kepler).to_value(units.dimensionless_unscaled)
    # astropy's M_sun carries the uncertainty of G: 1e-4 is ample.
    assert rotation(1.4, 12.0, 600.0) == pytest.approx(expected, rel=1e-4)


@given(st.floats(1.0, 2.2), st.floats(10.0, 15.0), st.floats(1.0, 600.0))
def test_pole_radius_is_that_of_the_figure(mass: float, radius: float, spin: float) -> None:
    """Limits and star use the same figure."""
    star = Star(mass_msun=mass, radius_km=radius, spin_hz=spin, cos_inclination=0.5)
    import numpy as np

    assert pole_radius_km(mass, radius, spin) == pytest.approx(
        float(radius_km(star, np.zeros(1))[0]), rel=1e-12
    )


@pytest.mark.parametrize(
    ("mass", "radius", "spin"), [(1.4, 12.0, 1.0), (1.4, 12.0, 700.0), (2.0, 11.0, 300.0)]
)
def test_ordinary_stars_pass(mass: float, radius: float, spin: float) -> None:
    """Stars of the usual kind have no faults."""
    assert star_faults(mass, radius, spin) == ()


@pytest.mark.parametrize(
    ("mass", "radius", "spin", "words"),
    [
        (2.4, 12.0, 100.0, "too compact"),
        (1.4, 16.0, 700.0, "break-up"),
        (0.1, 12.0, 100.0, "mass of 0.1 Msun lies outside 0.5 to 3"),
        (1.4, 120.0, 100.0, "radius of 120 km"),
        (1.4, 12.0, 1000.0, "spin frequency of 1000 Hz"),
        (float("nan"), 12.0, 100.0, "mass"),
    ],
)
def test_others_are_refused_with_the_number(
    mass: float, radius: float, spin: float, words: str
) -> None:
    """The reason names what is out of range and the bound."""
    assert words in "; ".join(star_faults(mass, radius, spin))


def test_flattening_makes_a_star_too_compact_at_its_pole() -> None:
    """A sphere of the same radius passes."""
    mass, radius = 1.85, 10.0  # u = 0.546
    assert star_faults(mass, radius, 500.0, "sphere") == ()
    assert "at its pole" in star_faults(mass, radius, 500.0, "oblate")[0]


def test_bound_leaves_room_inside_the_ray_table() -> None:
    """Derivatives step a little beyond the fiducial star."""
    assert MAX_COMPACTNESS_U < RAY_TABLE_MAX_U
