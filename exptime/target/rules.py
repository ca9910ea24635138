"""Rules of a target file that reach over several keys."""

from __future__ import annotations

import math
from typing import Final, Literal

from exptime import limits
from exptime.documents.faults import Faults
from exptime.documents.values import Values
from exptime.errors import OutOfRangeError
from exptime.star.records import Star
from exptime.target.defaults import (
    DRAWN_MASS_MSUN,
    DRAWN_RADIUS_KM,
    FIXED_MASS_MSUN,
    FIXED_RADIUS_KM,
)

_LARGEST_FRACTION: Final = {
    "peak-to-trough": (1.0, "(max-min)/(max+min) of a flux is at most 1."),
    "above-minimum": (1.0, "1-min/mean of a flux is at most 1."),
    "first-harmonic": (2.0, "No harmonic of a flux exceeds twice its mean."),
    "rms": (3.0, "Even a spot seen for an eighth of the turn stays below."),
    "full-swing": (10.0, "Even a spot seen for an eighth of the turn stays below."),
}


def check_rules(values: Values, faults: Faults) -> None:
    """Note every breach of the rules that reach over several keys.

    Parameters
    ----------
    values : Values
        What was read under the table of fields.
    faults : Faults
        Where breaches are noted.
    """
    _check_presence(values, faults)
    for fraction in values.list("pulsed_fraction"):
        _check_fraction(fraction, faults)
    for shape in values.list("pulse_shape"):
        _check_shape(shape, faults)
    _check_emission(values, faults)
    _check_star(values, faults)


def spin_hz(values: Values) -> float | None:
    """Return the spin frequency from whichever key gives it, Hz; None if neither does."""
    frequency, period = values.number("spin_frequency"), values.number("spin_period")
    if frequency is None and period is not None:
        return 1.0 / period
    return frequency


def _check_presence(values: Values, faults: Faults) -> None:
    """Note keys that are missing because of others, or forbidden by them."""
    has_frequency, has_period = values.is_given("spin_frequency"), values.is_given("spin_period")
    if has_frequency and has_period:
        what = "both spin_frequency and spin_period are given."
        faults.add(what, values.place_of("spin_period"), "Remove one of the two.")
    if not has_frequency and not has_period:
        remedy = "Write for example spin_frequency: 250 Hz, or spin_period: 4.0 ms"
        faults.add("the spin is missing.", values.place_of("spin_frequency"), remedy)
    if not values.is_given("hot_spots"):
        for key, example in (
            ("flux", "{value: 3e-13 erg s-1 cm-2, band: 0.5-2.0 keV, absorbed: true}"),
            ("pulsed_fraction", "{value: 0.45, definition: peak-to-trough, band: 0.5-2.0 keV}"),
            ("temperature", "{value: 0.12 keV, frame: surface}"),
        ):
            if not values.is_given(key):
                remedy = f"Write for example {key}: {example}, or give hot_spots."
                faults.add("this key is missing.", values.place_of(key), remedy)
        return
    if not values.is_given("inclination"):
        what = "this key is missing; hot spots need it."
        faults.add(what, values.place_of("inclination"), "Write for example inclination: 60 deg")
    if len(values.list("hot_spots")) > limits.MAX_SPOTS:
        what = f"there are more than {limits.MAX_SPOTS} hot spots."
        faults.add(what, values.place_of("hot_spots"), "Leave out the faintest.", OutOfRangeError)


def _check_fraction(fraction: Values, faults: Faults) -> None:
    """Note a pulsed fraction that no pulse can have, and counts without bins."""
    value, definition = fraction.number("value"), fraction.text("definition")
    if value is not None and definition is not None:
        largest, reason = _LARGEST_FRACTION[definition]
        if value > largest:
            what = f"a pulsed fraction of {value:g} is out of range for {definition}."
            remedy = f"Allowed: above 0, up to {largest:g}. {reason}"
            faults.add(what, fraction.place_of("value"), remedy, OutOfRangeError)
    for key, other in (("counts", "bins"), ("bins", "counts")):
        if fraction.is_given(key) and not fraction.is_given(other):
            what = f"{key} are given without {other}."
            remedy = f"Add {other} of the folded profile, or remove {key}."
            faults.add(what, fraction.place_of(key), remedy)


def _check_shape(shape: Values, faults: Faults) -> None:
    """Note an entry that is neither or both of harmonics and file, and harmonics given twice."""
    has_harmonics, has_file = shape.is_given("harmonics"), shape.is_given("file")
    if has_harmonics == has_file:
        what = f"{'both' if has_file else 'neither'} harmonics and file are given."
        if not has_file:
            what = "neither harmonics nor file is given."
        remedy = "Give one: harmonics: [{number: 2, fraction: 0.10, uncertainty: 0.03}] or a file."
        faults.add(what, shape.place, remedy)
    if shape.is_given("background") and not has_file:
        what = "a background belongs to a file, not to harmonics."
        faults.add(what, shape.place_of("background"), "Remove it.")
    seen: set[float] = set()
    for harmonic in shape.list("harmonics"):
        number = harmonic.number("number")
        if number is not None and number in seen:
            what = f"harmonic {number:g} stands twice."
            faults.add(what, harmonic.place_of("number"), "Remove one of the two.")
        if number is not None:
            seen.add(number)


def _check_emission(values: Values, faults: Faults) -> None:
    """Note a limb-darkened surface without its coefficient, and a blackbody with one."""
    emission = values.group("emission")
    if emission is None:
        return
    model, has_coefficient = emission.text("model"), emission.is_given("coefficient")
    where = emission.place_of("coefficient")
    if model == "limb-darkened" and not has_coefficient:
        remedy = "Write for example emission: {model: limb-darkened, coefficient: 0.5}"
        faults.add("limb-darkened emission needs a coefficient.", where, remedy)
    if model == "blackbody" and has_coefficient:
        remedy = "Remove it, or write model: limb-darkened."
        faults.add("a blackbody has no coefficient.", where, remedy)


def _check_star(values: Values, faults: Faults) -> None:
    """Note a spin, mass and radius that together lie outside the validity of the model.

    What is not given may be anything in the range that is drawn, or the fixed star where hot
    spots are given: one valid star is enough.
    """
    mass, radius = (_value(values, key) for key in ("mass", "radius"))
    spin = spin_hz(values)
    is_faulty = any(
        values.is_given(key) and value is None
        for key, value in (("mass", mass), ("radius", radius))
    )
    if spin is None or is_faulty:
        return
    has_spots = values.is_given("hot_spots")
    masses = _candidates(mass, FIXED_MASS_MSUN if has_spots else None, DRAWN_MASS_MSUN)
    radii = _candidates(radius, FIXED_RADIUS_KM if has_spots else None, DRAWN_RADIUS_KM)
    is_sphere = values.text("figure") == "sphere"
    figure: Literal["oblate", "sphere"] = "sphere" if is_sphere else "oblate"
    reasons = []
    for one_mass in masses:
        for one_radius in radii:
            reason = star_reason(one_mass, one_radius, spin, figure)
            if not reason:
                return
            reasons.append(reason)
    key = "radius" if radius is not None else "mass" if mass is not None else "spin_frequency"
    if mass is None or radius is None:
        assumed = (
            "mass and radius"
            if mass is None and radius is None
            else ("mass" if mass is None else "radius")
        )
        remedy = f"The {assumed} was not given; give it, or change the other values."
    else:
        remedy = "Change mass, radius or spin."
    what = f"{reasons[len(reasons) // 2]}."
    faults.add(what, values.place_of(key), remedy, OutOfRangeError)


def star_reason(
    mass_msun: float, radius_km: float, spin: float, figure: Literal["oblate", "sphere"]
) -> str:
    """Return why a star cannot be modelled, or an empty text.

    Parameters
    ----------
    mass_msun, radius_km, spin : float
        Solar masses; km; Hz.
    figure : {"oblate", "sphere"}
        Shape of the surface.
    """
    reasons = limits.star_faults(mass_msun, radius_km, spin, figure)
    if reasons:
        return "; ".join(reasons)
    from exptime.star.view import star_fault

    star = Star(
        mass_msun=mass_msun,
        radius_km=radius_km,
        spin_hz=spin,
        cos_inclination=math.sqrt(0.5),
        figure=figure,
    )
    fault = star_fault(star)
    return "" if fault is None else fault.what.rstrip(".")


def _candidates(
    given: float | None, fixed: float | None, drawn: tuple[float, float]
) -> tuple[float, ...]:
    """Return the values that a quantity may have: given, fixed, or spread over a range."""
    if given is not None:
        return (given,)
    if fixed is not None:
        return (fixed,)
    steps = 6
    return tuple(drawn[0] + (drawn[1] - drawn[0]) * k / steps for k in range(steps + 1))


def _value(values: Values, key: str) -> float | None:
    """Return the value of a measured quantity, or None."""
    group = values.group(key)
    return None if group is None else group.number("value")
