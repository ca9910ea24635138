"""Vectors of parameters become scenes and counts, over the poles too."""

from __future__ import annotations

import numpy as np
import pytest

from exptime.information.model import Model
from exptime.observation.instrument_response import instrument_response
from exptime.study.case import Question
from exptime.study.geometries import known_geometry
from exptime.study.setting import setting_of
from tests.study.cases import KNOWN, instrument_of, target_of


@pytest.fixture(scope="module")
def model() -> Model:
    """Return the model of one spot seen by a small instrument."""
    from exptime.interstellar.absorption import load_absorption

    target, instrument = target_of(KNOWN), instrument_of()
    question = Question(
        target=target,
        instrument=instrument,
        response=instrument_response(instrument, load_absorption()),
        exposures_s=np.array([1e5]),
        goals=(),
    )
    return setting_of(question, known_geometry(target), 1e5)[0].model


def test_a_scene_survives_its_vector(model: Model) -> None:
    """Made into a vector and back it is the same."""
    vector = model.vector_of(model.scene)
    back = model.scene_at(vector)
    assert back is not None
    np.testing.assert_allclose(model.vector_of(back), vector, rtol=1e-14)
    assert back.star == model.scene.star


def test_a_spot_carried_over_a_pole_comes_down_on_the_other_side(model: Model) -> None:
    """Colatitude -0.2 at longitude L is colatitude 0.2 at L + pi."""
    over = model.vector_of(model.scene)
    colatitude, longitude = (model.names.index(f"spot1.{n}") for n in ("colatitude", "longitude"))
    over[colatitude] = -0.2
    same = over.copy()
    same[colatitude], same[longitude] = 0.2, over[longitude] + np.pi
    first, second = model.source(over), model.source(same)
    assert first is not None
    assert second is not None
    np.testing.assert_allclose(first, second, rtol=1e-12)


@pytest.mark.parametrize("colatitude", [0.7, -0.3])
def test_derivatives_are_those_of_the_counts(model: Model, colatitude: float) -> None:
    """Central differences, on both sides of the pole; every parameter."""
    vector = model.vector_of(model.scene)
    vector[model.names.index("spot1.colatitude")] = colatitude
    local = model.linearised(vector)
    assert local is not None
    for row, name in enumerate(model.names):
        step = 1e-4 * max(abs(vector[row]), 0.1)
        upper, lower = vector.copy(), vector.copy()
        upper[row] += step
        lower[row] -= step
        above, below = model.source(upper), model.source(lower)
        assert above is not None
        assert below is not None
        # Steps of 1e-4: the third derivative leaves some 1e-7, rounding less; the analytic
        # derivatives are good to the resolution asked for, 2e-5.
        expected = (above - below) / (2.0 * step)
        size = np.abs(expected).max()
        np.testing.assert_allclose(
            local[1][row], expected, rtol=0.0, atol=2e-3 * size + 1e-9, err_msg=name
        )


@pytest.mark.parametrize(
    ("name", "value"),
    [
        ("mass", -1.0),
        ("mass", 3.5),
        ("radius", 4.0),
        ("cos_inclination", 1.01),
        ("distance", 0.0),
        ("spot1.angular_radius", -0.01),
    ],
)
def test_nothing_is_computed_outside_the_model(model: Model, name: str, value: float) -> None:
    """Such vectors have no scene and no counts."""
    vector = model.vector_of(model.scene)
    vector[model.names.index(name)] = value
    assert model.scene_at(vector) is None
    assert model.source(vector) is None
    assert model.linearised(vector) is None


def test_the_area_factor_multiplies_the_source(model: Model) -> None:
    """Counts are in proportion, and its derivative is the source itself."""
    vector = model.vector_of(model.scene)
    wide = vector.copy()
    wide[model.names.index("area_factor")] = 1.2
    narrow, broad, local = model.source(vector), model.source(wide), model.linearised(vector)
    assert narrow is not None
    assert broad is not None
    assert local is not None
    np.testing.assert_allclose(broad, 1.2 * narrow, rtol=1e-12)
    np.testing.assert_allclose(local[1][-1], local[0], rtol=1e-12)
