"""What the JSON documents hold, as JSON Schema."""

from __future__ import annotations

from typing import Any

Schema = dict[str, Any]

TEXT: Schema = {"type": "string"}
NUMBER: Schema = {"type": "number"}
POSITIVE: Schema = {"type": "number", "exclusiveMinimum": 0}
SHARE: Schema = {"type": "number", "minimum": 0, "maximum": 1}
NUMBER_OR_NULL: Schema = {"type": ["number", "null"]}


def record(**keys: Schema) -> Schema:
    """Return the schema of an object with these keys and perhaps more."""
    return {"type": "object", "required": list(keys), "properties": keys}


def array(items: Schema, length: int | None = None) -> Schema:
    """Return the schema of a list."""
    if length is None:
        return {"type": "array", "items": items}
    return {"type": "array", "items": items, "minItems": length, "maxItems": length}


def quantiles(items: Schema) -> Schema:
    """Return the schema of three quantiles."""
    return record(p16=items, p50=items, p84=items)


def forecast(exposures: int) -> Schema:
    """Return the schema of a forecast of so many exposures."""
    per_exposure = quantiles(array(NUMBER_OR_NULL, exposures))
    curve = record(
        fiducial=POSITIVE, sigma=per_exposure, data_sigma=per_exposure, prior_sigma=NUMBER_OR_NULL
    )
    flags = array({"type": "boolean"}, exposures)
    goal = record(
        quantity={"enum": ["mass", "radius", "compactness"]},
        precision=POSITIVE,
        exposure_s=quantiles(NUMBER_OR_NULL),
        fraction_reached=SHARE,
        fraction_at_exposure=array(SHARE, exposures),
    )
    return record(
        schema={"const": "exptime.forecast/1"},
        target=record(name=TEXT, file=TEXT),
        instruments=array(record(id=TEXT, name=TEXT), 1),
        seed={"type": "integer"},
        versions={"type": "object", "required": ["exptime"], "additionalProperties": TEXT},
        rates=record(source_per_s=POSITIVE, background_per_s=NUMBER),
        geometry=record(
            known={"type": "boolean"},
            draws={"type": "integer"},
            effective_geometries=POSITIVE,
            hidden_spots={"type": "integer", "minimum": 0},
            pulsed_fraction={"type": ["object", "array", "null"]},
        ),
        exposure_s=array(POSITIVE, exposures),
        mass_msun=curve,
        radius_km=curve,
        compactness=curve,
        correlation=record(mass_radius=quantiles(NUMBER_OR_NULL)),
        prior_limited=record(mass=flags, radius=flags, compactness=flags),
        goals=array(goal),
        assumptions=array(TEXT),
        warnings=array(TEXT),
        numerics=record(
            resolution_change=NUMBER, condition=POSITIVE, quantile_error=NUMBER_OR_NULL
        ),
    )


def pulse(phases: int, energies: int) -> Schema:
    """Return the schema of a pulse."""
    return record(
        schema={"const": "exptime.pulse/1"},
        phase=array(SHARE, phases),
        energy_kev=array(POSITIVE, energies),
        photon_flux=array(array({"type": "number", "minimum": 0}, energies), phases),
    )


def counts(phases: int, channels: int) -> Schema:
    """Return the schema of expected counts."""
    cells = array(array({"type": "number", "minimum": 0}, channels), phases)
    return record(
        schema={"const": "exptime.counts/1"},
        phase=array(SHARE, phases),
        channel_kev=array(POSITIVE, channels + 1),
        source_counts=cells,
        background_counts=cells,
    )


INSTRUMENTS = record(instruments={"minItems": 3, **array(record(id=TEXT, name=TEXT))})
