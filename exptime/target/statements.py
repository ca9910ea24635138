"""Sentences about what a target file does not say, for every report."""

from __future__ import annotations

import math

from exptime.documents.values import Values
from exptime.target.defaults import (
    DISTANCE_UNCERTAINTY,
    DRAWN_MASS_MSUN,
    DRAWN_RADIUS_KM,
    FIXED_MASS_MSUN,
    FIXED_RADIUS_KM,
    FLAT_MASS_MSUN,
    FLAT_RADIUS_KM,
    FRACTION_UNCERTAINTY,
)
from exptime.target.fields import TARGET_FIELDS


def assumptions(values: Values) -> tuple[str, ...]:
    """Return a sentence for everything that was not given.

    Parameters
    ----------
    values : Values
        A target file without faults.
    """
    sentences = []
    has_spots = values.is_given("hot_spots")
    if not has_spots:
        sentences.append(
            "The geometry is not known: two circular hot spots of equal temperature, centres "
            "uniform over the sphere, not overlapping, radius ratio 1/3 to 3, sizes scaled to the "
            "flux."
        )
    for key, unit, flat, drawn, fixed in (
        ("mass", "Msun", FLAT_MASS_MSUN, DRAWN_MASS_MSUN, FIXED_MASS_MSUN),
        ("radius", "km", FLAT_RADIUS_KM, DRAWN_RADIUS_KM, FIXED_RADIUS_KM),
    ):
        prior = f"a flat prior from {flat[0]:g} to {flat[1]:g} {unit}"
        if not values.is_given(key):
            where = (
                f"the forecast is made at {fixed:g} {unit}"
                if has_spots
                else f"drawn from {drawn[0]:g} to {drawn[1]:g} {unit} unless the star is held "
                f"at {fixed:g} {unit}"
            )
            sentences.append(f"The {key} was not given: {prior}; {where}.")
        elif not _has_uncertainty(values, key):
            sentences.append(f"The {key} was given without an uncertainty: {prior} about it.")
    if not values.is_given("inclination"):
        sentences.append("The inclination was not given: directions of sight are uniform.")
    elif not _has_uncertainty(values, "inclination"):
        sentences.append(
            "The inclination was given without an uncertainty: its cosine has a flat prior."
        )
    if not _has_uncertainty(values, "distance"):
        sentences.append(
            f"The distance is taken to be {DISTANCE_UNCERTAINTY:.0%} uncertain: no uncertainty "
            "was given.".replace("%", " %")
        )
    if not _has_uncertainty(values, "column_density"):
        sentences.append("The column was given without an uncertainty: it is free.")
    sentences.extend(_fraction_sentences(values))
    sentences.extend(
        field.assumption
        for field in TARGET_FIELDS
        if field.assumption and not values.is_given(field.key)
    )
    return tuple(sentences)


def _fraction_sentences(values: Values) -> list[str]:
    """Return what was assumed of the pulsed fractions."""
    sentences = []
    for fraction in values.list("pulsed_fraction"):
        label = f"{fraction.text('definition')}, {fraction.written.get('band', '')}"
        if not fraction.is_given("uncertainty"):
            share = f"{FRACTION_UNCERTAINTY:.0%}".replace("%", " %")
            sentences.append(
                f"The pulsed fraction ({label}) is taken to be uncertain by {share} of its value: "
                "no uncertainty was given."
            )
        elif fraction.written["uncertainty"].endswith("%"):
            sentences.append(
                f"The uncertainty of the pulsed fraction ({label}), "
                f"{fraction.written['uncertainty']}, is relative to its value: "
                f"{fraction.numbers['uncertainty']:.3g}."
            )
    return sentences


def warnings(values: Values) -> tuple[str, ...]:
    """Return doubts about what was given.

    Parameters
    ----------
    values : Values
        A target file without faults.
    """
    sentences = []
    inclination = values.group("inclination")
    angle = inclination.numbers["value"] if inclination is not None else 0.0
    if angle > 0.5 * math.pi:
        given, seen = math.degrees(angle), math.degrees(math.pi - angle)
        sentences.append(
            f"The inclination of {given:g} deg is above 90 deg: it was reflected to {seen:g} deg "
            "and every colatitude with it, which changes nothing that can be seen."
        )
    if values.is_given("hot_spots"):
        for key in ("temperature", "pulse_shape"):
            if values.is_given(key):
                sentences.append(f"The key {key} is not used: hot spots are given.")
        if _overlaps(values.list("hot_spots")):
            sentences.append("Hot spots overlap: where they do, the flux of both is counted.")
    return tuple(sentences)


def _overlaps(spots: tuple[Values, ...]) -> bool:
    """Say whether any two circular spots overlap."""
    circles = [
        tuple(_number(spot, key) for key in ("colatitude", "longitude", "angular_radius"))
        for spot in spots
    ]
    for index, (theta, phi, size) in enumerate(circles):
        for other_theta, other_phi, other_size in circles[:index]:
            cosine = math.cos(theta) * math.cos(other_theta) + math.sin(theta) * math.sin(
                other_theta
            ) * math.cos(phi - other_phi)
            if math.acos(min(max(cosine, -1.0), 1.0)) < size + other_size - 1e-12:
                return True
    return False


def _number(values: Values, key: str) -> float:
    """Return the value of a measured quantity that is there."""
    return values.groups[key][0].numbers["value"]


def _has_uncertainty(values: Values, key: str) -> bool:
    """Say whether a measured quantity was given with an uncertainty."""
    group = values.group(key)
    return group is not None and group.is_given("uncertainty")
