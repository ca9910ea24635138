"""The JSON documents hold what they promise, and only what JSON knows."""

from __future__ import annotations

import json
import math
from dataclasses import replace
from typing import Any

import jsonschema
import numpy as np
import pytest

from exptime.report.json_document import (
    counts_document,
    forecast_document,
    pulse_document,
    to_json,
)
from tests.cli import schemas
from tests.report import results
from tests.report.results import STATES


def strict(text: str) -> Any:
    """Parse JSON and refuse the words that only some parsers know."""

    def refuse(word: str) -> float:
        raise ValueError(word)

    return json.loads(text, parse_constant=refuse)


@pytest.mark.parametrize("state", STATES)
def test_every_state_of_a_forecast_obeys_the_schema(state: str) -> None:
    """Every key is there, of its type, with one entry for each exposure."""
    forecast = STATES[state]()
    document = strict(to_json(forecast_document(forecast)))
    schema = schemas.forecast(len(forecast.exposures_s))
    if state == "unconstrained":
        # A singular matrix has no condition number.
        schema["properties"]["numerics"]["properties"]["condition"] = schemas.NUMBER_OR_NULL
    jsonschema.validate(document, schema)


def test_a_schema_that_is_broken_is_noticed() -> None:
    """The schema refuses a document without its goals."""
    document = forecast_document(results.normal())
    del document["goals"]
    with pytest.raises(jsonschema.ValidationError, match="goals"):
        jsonschema.validate(document, schemas.forecast(5))


def test_numbers_are_those_of_the_record() -> None:
    """Nothing is rounded, converted or moved to another key."""
    forecast = results.normal()
    document = forecast_document(forecast)
    assert document["target"] == {"name": "Candidate A", "file": "candidate.yaml"}
    assert document["instruments"] == [{"id": "invented-array", "name": "Invented array"}]
    assert document["radius_km"]["data_sigma"]["p84"] == forecast.radius.data_sigma.p84.tolist()
    assert document["radius_km"]["sigma"]["p16"] == forecast.radius.sigma.p16.tolist()
    assert document["mass_msun"]["fiducial"] == 1.5
    assert document["compactness"]["prior_sigma"] == 0.03
    assert document["goals"][0]["exposure_s"] == {"p16": 1.65e5, "p50": 1.249e6, "p84": 9.44e6}
    assert document["geometry"]["pulsed_fraction"]["asked"] == 0.6
    assert document["geometry"]["pulsed_fraction"]["reached"] == [0.55, 0.6, 0.65]
    assert document["geometry"]["draws"] == 50
    assert math.isclose(document["geometry"]["median"]["inclination_deg"], 60.0)
    # At 100 ks half of the geometries give 2.1 km, more than the 2.02 km of the flat prior.
    assert document["prior_limited"]["radius"] == [True, False, False, False, False]


def test_exposures_of_goals_are_without_the_margin() -> None:
    """The margin is a key of its own."""
    document = forecast_document(results.with_margin())
    assert document["margin"] == 0.15
    assert document["goals"][0]["exposure_s"]["p50"] == 1.249e6


def test_infinite_and_unknown_numbers_are_null() -> None:
    """Unconstrained, not reached and without meaning are null."""
    document = forecast_document(results.unconstrained())
    assert document["radius_km"]["data_sigma"]["p50"] == [None] * 5
    assert document["radius_km"]["sigma"]["p50"] == [2.0] * 5
    assert document["goals"][0]["exposure_s"] == {"p16": None, "p50": None, "p84": None}
    assert document["correlation"]["mass_radius"]["p50"] is None
    assert document["numerics"]["condition"] is None


def test_several_pulsed_fractions_all_stand() -> None:
    """The first keeps its key; the others follow in a list."""
    forecast = results.normal()
    other = replace(forecast.pulsed_fractions[0], label="rms, 1-2 keV", asked=0.2)
    both = replace(forecast, pulsed_fractions=(*forecast.pulsed_fractions, other))
    geometry = forecast_document(both)["geometry"]
    assert geometry["pulsed_fraction"]["asked"] == 0.6
    assert [each["label"] for each in geometry["further_pulsed_fractions"]] == ["rms, 1-2 keV"]


def test_shares_never_exceed_one() -> None:
    """A sum of weights that rounding pushed above one is one."""
    forecast = results.normal()
    goal = replace(
        forecast.goals[0],
        fraction_reached=1.0 + 4e-16,
        fraction_at_exposure=np.full(5, 1.0 + 4e-16),
    )
    document = forecast_document(replace(forecast, goals=(goal,)))
    assert document["goals"][0]["fraction_reached"] == 1.0
    assert max(document["goals"][0]["fraction_at_exposure"]) == 1.0


def test_pulse_and_counts_obey_their_schemas() -> None:
    """Shapes and keys of both kinds of pulse."""
    pulse, counts = results.pulse(), results.counts()
    jsonschema.validate(strict(to_json(pulse_document(pulse))), schemas.pulse(16, 3))
    document = strict(to_json(counts_document(counts)))
    jsonschema.validate(document, schemas.counts(32, 27))
    assert document["source_counts"] == counts.source_counts.tolist()
    assert document["channel_kev"] == counts.channel_edges_kev.tolist()


def test_nan_is_refused_where_it_slips_through() -> None:
    """No document is written that other parsers would refuse."""
    with pytest.raises(ValueError, match="JSON"):
        to_json({"x": math.nan})
