"""Stars that the model accepts and refuses."""

from __future__ import annotations

import numpy as np
import pytest

from exptime.errors import OutOfRangeError
from exptime.star.view import check_star, star_fault, view_of
from tests.makers.scenes import star_of


@pytest.mark.parametrize(
    ("spin", "radius"),
    [(s, r) for s in (0.1, 100.0, 600.0) for r in (10.5, 12.0, 13.0)]
    + [(700.0, 10.5), (700.0, 11.5), (700.0, 12.0)],
)
def test_ordinary_stars_are_accepted(spin: float, radius: float) -> None:
    """1.4 solar masses at any radius that matters up to 600 Hz, at 700 Hz up to 12 km."""
    check_star(star_of(spin, radius_km=radius))


def test_too_compact_a_star_is_refused_with_the_reason_and_the_remedy() -> None:
    """2GM/(Rc²) beyond 0.55."""
    with pytest.raises(OutOfRangeError, match=r"too compact") as caught:
        check_star(star_of(mass_msun=2.2, radius_km=10.0))
    message = str(caught.value)
    assert "2.2" in message
    assert "10" in message
    assert "0.55" in message
    assert "larger radius" in message


def test_a_pole_too_compact_is_refused_though_the_equator_is_not() -> None:
    """Flattening makes the pole more compact than the equator."""
    slow, fast = (star_of(spin, mass_msun=1.8, radius_km=9.9) for spin in (1.0, 720.0))
    assert star_fault(slow) is None
    assert star_fault(fast) is not None


def test_too_flattened_a_star_is_refused() -> None:
    """A light large star near break-up."""
    fault = star_fault(star_of(750.0, mass_msun=1.0, radius_km=16.0))
    assert fault is not None
    assert fault.remedy


def test_the_same_star_as_a_sphere_is_accepted() -> None:
    """The remedy that the message offers works."""
    assert star_fault(star_of(750.0, mass_msun=1.0, radius_km=16.0, figure="sphere")) is None


def test_a_star_beyond_break_up_is_refused_without_a_warning() -> None:
    """Even a figure with a vanishing polar radius gets a sentence, not a traceback."""
    assert star_fault(star_of(2500.0, radius_km=16.0)) is not None


def test_accepted_stars_have_transitions_inside_the_sphere() -> None:
    """A view holds increasing colatitudes."""
    transitions = view_of(star_of(600.0)).transitions
    assert np.all(np.diff(transitions) > 0.0)
    assert np.all((transitions > 0.0) & (transitions < np.pi))
