"""Records as JSON documents: plain numbers in the units the keys name, null for what is not."""

from __future__ import annotations

import math
from typing import Any

from exptime.report.numbers import number, numbers
from exptime.report.numbers import to_json as to_json
from exptime.report.proof_document import verification_summary
from exptime.study.pulse_records import Counts, Pulse
from exptime.study.records import (
    Forecast,
    GeometryResult,
    GoalResult,
    QuantityCurve,
    ReachedFraction,
    Spread,
)

Document = dict[str, Any]


def forecast_document(forecast: Forecast) -> Document:
    """Return a forecast as the document ``exptime.forecast/1``.

    Required exposures are without the margin, which stands in a key of its own. One sigma
    everywhere; null stands for unconstrained and for not reached.
    """
    document: Document = {
        "schema": "exptime.forecast/1",
        "target": {"name": forecast.target.name, "file": forecast.target.file},
        "instruments": [{"id": each.id, "name": each.name} for each in forecast.instruments],
        "seed": forecast.seed,
        "versions": dict(forecast.versions),
        "margin": forecast.margin,
        "rates": {
            "source_per_s": number(forecast.source_per_s),
            "background_per_s": number(forecast.background_per_s),
        },
        "geometry": _geometry(forecast),
        "exposure_s": numbers(forecast.exposures_s),
        "mass_msun": _curve(forecast.mass),
        "radius_km": _curve(forecast.radius),
        "compactness": _curve(forecast.compactness),
        "correlation": {"mass_radius": _spread(forecast.correlation_mass_radius)},
        "prior_limited": {
            "mass": list(forecast.mass.is_prior_limited),
            "radius": list(forecast.radius.is_prior_limited),
            "compactness": list(forecast.compactness.is_prior_limited),
        },
        "goals": [_goal(result) for result in forecast.goals],
        "assumptions": list(forecast.assumptions),
        "warnings": list(forecast.warnings),
        "numerics": {
            "resolution_change": number(forecast.numerics.resolution_change),
            "condition": number(forecast.numerics.condition),
            "quantile_error": number(forecast.numerics.quantile_error),
            "floored_share": number(forecast.numerics.floored_share),
        },
    }
    if forecast.verification is not None:
        document["verification"] = verification_summary(forecast.verification)
    return document


def pulse_document(pulse: Pulse) -> Document:
    """Return a pulse as the document ``exptime.pulse/1``."""
    return {
        "schema": "exptime.pulse/1",
        "target": {"name": pulse.target},
        "phase": numbers(pulse.phase),
        "energy_kev": numbers(pulse.energies_kev),
        "photon_flux": numbers(pulse.photon_flux),
        "notes": list(pulse.notes),
    }


def counts_document(counts: Counts) -> Document:
    """Return expected counts as the document ``exptime.counts/1``."""
    return {
        "schema": "exptime.counts/1",
        "target": {"name": counts.target},
        "instrument": {"name": counts.instrument},
        "exposure_s": number(counts.exposure_s),
        "phase": numbers(counts.phase),
        "channel_kev": numbers(counts.channel_edges_kev),
        "source_counts": numbers(counts.source_counts),
        "background_counts": numbers(counts.background_counts),
        "notes": list(counts.notes),
    }


def _geometry(forecast: Forecast) -> Document:
    fractions = [_fraction(each) for each in forecast.pulsed_fractions]
    return {
        "known": forecast.is_geometry_known,
        "draws": len(forecast.geometries),
        "candidates": forecast.candidates,
        "effective_geometries": number(forecast.effective_geometries),
        "hidden_spots": forecast.hidden_spots,
        "pulsed_fraction": fractions[0] if fractions else None,
        "further_pulsed_fractions": fractions[1:],
        "median": _star_and_spots(forecast.geometries[forecast.median_index]),
    }


def _fraction(fraction: ReachedFraction) -> Document:
    reached = fraction.reached
    return {
        "label": fraction.label,
        "asked": number(fraction.asked),
        "uncertainty": number(fraction.uncertainty),
        "reached": [number(each) for each in (reached.p16, reached.p50, reached.p84)],
    }


def _star_and_spots(geometry: GeometryResult) -> Document:
    star = geometry.star
    return {
        "mass_msun": number(star.mass_msun),
        "radius_km": number(star.radius_km),
        "inclination_deg": math.degrees(math.acos(min(1.0, max(-1.0, star.cos_inclination)))),
        "spots": [
            {
                "colatitude_deg": math.degrees(spot.colatitude),
                "longitude_deg": math.degrees(spot.longitude),
                "angular_radius_deg": math.degrees(spot.angular_radius),
                "temperature_kev": number(spot.temperature_kev),
            }
            for spot in geometry.spots
        ],
    }


def _curve(curve: QuantityCurve) -> Document:
    return {
        "fiducial": number(curve.fiducial),
        "sigma": _spread(curve.sigma),
        "data_sigma": _spread(curve.data_sigma),
        "prior_sigma": number(curve.prior_sigma),
    }


def _goal(result: GoalResult) -> Document:
    return {
        "quantity": result.goal.quantity,
        "precision": result.goal.precision,
        "exposure_s": _spread(result.exposure_s),
        "fraction_reached": _fraction_of_one(result.fraction_reached),
        "fraction_at_exposure": [_fraction_of_one(each) for each in result.fraction_at_exposure],
    }


def _spread(spread: Spread) -> Document:
    return {
        "p16": numbers(spread.p16),
        "p50": numbers(spread.p50),
        "p84": numbers(spread.p84),
    }


def _fraction_of_one(value: float) -> float:
    """Return a sum of weights without the last digit that rounding may have put above one."""
    return min(1.0, max(0.0, float(value)))
