"""A verification as JSON: plain numbers in the units the keys name, null for what is open."""

from __future__ import annotations

import math
from typing import Any

from exptime.report.numbers import number, numbers
from exptime.report.proof import verdict_sentence
from exptime.study.profile import Profile
from exptime.study.verdict import overall
from exptime.study.verify_records import CheckedGeometry, Simulations, Verification

Document = dict[str, Any]


def verification_document(verification: Verification) -> Document:
    """Return a verification as the document ``exptime.verify/1``."""
    return {
        "schema": "exptime.verify/1",
        "target": {"name": verification.target, "file": verification.file},
        "instrument": {"name": verification.instrument},
        "exposure_s": verification.exposure_s,
        "seed": verification.seed,
        "versions": dict(verification.versions),
        "verdict": overall([geometry.verdict for geometry in verification.geometries]),
        "sentence": verdict_sentence(verification),
        "geometries": [_geometry(geometry) for geometry in verification.geometries],
        "notes": list(verification.notes),
    }


def verification_summary(verification: Verification) -> Document:
    """Return what a forecast carries of its verification."""
    return {
        "exposure_s": verification.exposure_s,
        "verdict": overall([geometry.verdict for geometry in verification.geometries]),
        "sentence": verdict_sentence(verification),
        "geometries": [
            {
                "label": geometry.label,
                "verdict": geometry.verdict,
                "reason": geometry.reason,
                "ratio": _ratios(geometry.profiles),
                "ratio_within_limits": _ratios(geometry.bounded_profiles),
                "other_solutions": len(geometry.humps),
                "simulations": _simulations(geometry.simulations),
            }
            for geometry in verification.geometries
        ],
    }


def _ratios(profiles: tuple[Profile, ...]) -> Document:
    return {profile.quantity: number(profile.ratio) for profile in profiles}


def _geometry(geometry: CheckedGeometry) -> Document:
    star = geometry.star
    return {
        "label": geometry.label,
        "verdict": geometry.verdict,
        "reason": geometry.reason,
        "prior_limited": geometry.is_prior_limited,
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
        "profiles": [_profile(profile) for profile in geometry.profiles],
        "profiles_within_limits": [_profile(profile) for profile in geometry.bounded_profiles],
        "other_solutions": [
            {
                "deviance": number(hump.rise),
                "mass_msun": number(hump.mass_msun),
                "radius_km": number(hump.radius_km),
                "inclination_deg": math.degrees(hump.inclination),
                "colatitudes_deg": [math.degrees(angle) for angle in hump.colatitudes],
            }
            for hump in geometry.humps
        ],
        "simulations": _simulations(geometry.simulations),
    }


def _profile(profile: Profile) -> Document:
    first, second = profile.intervals
    return {
        "quantity": profile.quantity,
        "value": number(profile.truth),
        "bound": number(profile.bound),
        "ratio": number(profile.ratio),
        "interval_68": numbers([first.lower, first.upper]),
        "interval_95": numbers([second.lower, second.upper]),
        "points": [
            {
                "value": number(point.value),
                "deviance": number(point.rise),
                "converged": point.has_converged,
            }
            for point in profile.points
        ],
    }


def _simulations(simulations: Simulations | None) -> Document | None:
    if simulations is None:
        return None
    return {
        "asked": simulations.asked,
        "converged": simulations.converged,
        "elsewhere": simulations.elsewhere,
        "elsewhere_radius_km": numbers(simulations.elsewhere_radius_km),
        "quantities": [
            {
                "quantity": item.quantity,
                "bound": number(item.bound),
                "scatter": number(item.deviation),
                "ratio": number(item.ratio),
                "bias": number(item.bias),
                "coverage": number(item.coverage),
                "coverage_error": number(item.coverage_error),
            }
            for item in simulations.scatter
        ],
    }
