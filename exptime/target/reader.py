"""Read a target file into a `Target`, or tell everything that is wrong with it."""

from __future__ import annotations

import math
from typing import cast

from exptime.documents.faults import Faults
from exptime.documents.field_reader import read_fields
from exptime.documents.nodes import Mapping, scalars
from exptime.documents.values import Values
from exptime.documents.yaml_reader import parse_yaml, read_yaml
from exptime.star.records import Emission, Figure
from exptime.target.defaults import DISTANCE_UNCERTAINTY, FRACTION_UNCERTAINTY
from exptime.target.fields import TARGET_FIELDS
from exptime.target.folded import read_folded
from exptime.target.records import (
    Entry,
    Flux,
    FractionDefinition,
    HarmonicFraction,
    HarmonicShape,
    KnownSpot,
    Measured,
    PulsedFraction,
    PulseShape,
    Target,
    Temperature,
)
from exptime.target.rules import check_rules, spin_hz
from exptime.target.statements import assumptions, warnings


def read_target(path: str) -> Target:
    """Return what a target file says.

    Parameters
    ----------
    path : str
        Path of the file; ``"-"`` for standard input. Files that it names are relative to it.

    Returns
    -------
    Target
        With assumptions for everything that was not given.

    Raises
    ------
    InputError
        Everything wrong with the file, in one go; OutOfRangeError or UnitsError when all of it
        is of that kind.
    """
    faults = Faults()
    return _target(read_yaml(path, faults), path, faults)


def read_target_text(text: str, name: str = "target") -> Target:
    """Return what the text of a target file says; see `read_target`.

    Parameters
    ----------
    text : str
        YAML.
    name : str
        Stands for the file in messages; files that it names are relative to it.
    """
    faults = Faults()
    return _target(parse_yaml(text, name, faults), name, faults)


def _target(root: Mapping | None, file: str, faults: Faults) -> Target:
    """Return the target that a document holds."""
    if root is None:
        faults.raise_if_any()
        raise AssertionError("an unreadable document has a fault")
    values = read_fields(root, TARGET_FIELDS, faults)
    check_rules(values, faults)
    shapes = [_shape(entry, file, faults) for entry in values.list("pulse_shape")]
    faults.raise_if_any()
    is_reflected = (_value(values, "inclination") or 0.0) > 0.5 * math.pi
    spots = tuple(_spot(spot, is_reflected) for spot in values.list("hot_spots"))
    return Target(
        name=values.texts["name"],
        file=file,
        spin_hz=cast(float, spin_hz(values)),
        column_density=_known(values, "column_density"),
        distance=_distance(values),
        flux=_flux(values.group("flux")),
        pulsed_fractions=tuple(_fraction(each) for each in values.list("pulsed_fraction")),
        pulse_shapes=tuple(shape for shape in shapes if shape is not None),
        temperature=_temperature(values.group("temperature")),
        mass=_measured(values, "mass"),
        radius=_measured(values, "radius"),
        inclination=_reflected(_measured(values, "inclination"), is_reflected),
        figure=cast(Figure, values.text("figure") or "oblate"),
        emission=_emission(values.group("emission")),
        hot_spots=spots if values.is_given("hot_spots") else None,
        abundances="solar-1982" if values.text("abundances") == "solar-1982" else "interstellar",
        entries=tuple(
            Entry(key=scalar.place.key, text=scalar.text.strip(), line=scalar.place.line)
            for scalar in scalars(root)
        ),
        assumptions=assumptions(values),
        warnings=warnings(values),
    )


def _value(values: Values, key: str) -> float | None:
    """Return the value of a measured quantity, or None."""
    group = values.group(key)
    return None if group is None else group.number("value")


def _measured(values: Values, key: str) -> Measured | None:
    """Return value and uncertainty of a key, or None where it was not given."""
    group = values.group(key)
    if group is None:
        return None
    return Measured(value=group.numbers["value"], uncertainty=group.number("uncertainty"))


def _known(values: Values, key: str) -> Measured:
    """Return value and uncertainty of a key that was given."""
    group = values.groups[key][0]
    return Measured(value=group.numbers["value"], uncertainty=group.number("uncertainty"))


def _distance(values: Values) -> Measured:
    """Return the distance, uncertain by a fifth where no uncertainty was given."""
    distance = _known(values, "distance")
    if distance.uncertainty is not None:
        return distance
    return Measured(value=distance.value, uncertainty=DISTANCE_UNCERTAINTY * distance.value)


def _reflected(angle: Measured | None, is_reflected: bool) -> Measured | None:
    """Return an angle from the other pole where the star is reflected at its equator."""
    if angle is None or not is_reflected:
        return angle
    return Measured(value=math.pi - angle.value, uncertainty=angle.uncertainty)


def _flux(group: Values | None) -> Flux | None:
    """Return the flux, or None."""
    if group is None:
        return None
    return Flux(
        value=group.numbers["value"],
        uncertainty=group.number("uncertainty"),
        band_kev=group.ranges["band"],
        absorbed=group.flags["absorbed"],
    )


def _fraction(group: Values) -> PulsedFraction:
    """Return one pulsed fraction, uncertain by a tenth where no uncertainty was given."""
    value, uncertainty = group.numbers["value"], group.number("uncertainty")
    bins = group.number("bins")
    return PulsedFraction(
        value=value,
        uncertainty=FRACTION_UNCERTAINTY * value if uncertainty is None else uncertainty,
        uncertainty_given=uncertainty is not None,
        definition=cast(FractionDefinition, group.texts["definition"]),
        band_kev=group.ranges["band"],
        instrument=group.text("instrument"),
        counts=group.number("counts"),
        bins=None if bins is None else int(bins),
    )


def _shape(group: Values, file: str, faults: Faults) -> PulseShape | None:
    """Return one entry of the pulse shape; None when something is wrong with it."""
    if group.is_given("file"):
        return read_folded(group, file, faults)
    band = group.range("band")
    harmonics = []
    for each in group.list("harmonics"):
        number, fraction = each.number("number"), each.number("fraction")
        uncertainty = each.number("uncertainty")
        if number is not None and fraction is not None and uncertainty is not None:
            harmonics.append(
                HarmonicFraction(number=int(number), fraction=fraction, uncertainty=uncertainty)
            )
    if band is None or not harmonics:
        return None
    return HarmonicShape(
        band_kev=band, harmonics=tuple(harmonics), instrument=group.text("instrument")
    )


def _temperature(group: Values | None) -> Temperature | None:
    """Return the temperature, or None."""
    if group is None:
        return None
    return Temperature(
        value_kev=group.numbers["value"],
        uncertainty_kev=group.number("uncertainty"),
        frame="observed" if group.texts["frame"] == "observed" else "surface",
    )


def _emission(group: Values | None) -> Emission:
    """Return the law of emission; a blackbody where none was given."""
    if group is None or group.texts["model"] == "blackbody":
        return Emission()
    return Emission(model="limb-darkened", coefficient=group.numbers["coefficient"])


def _spot(group: Values, is_reflected: bool) -> KnownSpot:
    """Return one hot spot."""
    colatitude = _known(group, "colatitude")
    longitude = _known(group, "longitude")
    turn = Measured(value=longitude.value % (2.0 * math.pi), uncertainty=longitude.uncertainty)
    return KnownSpot(
        colatitude=_reflected(colatitude, is_reflected) or colatitude,
        longitude=turn,
        angular_radius=_known(group, "angular_radius"),
        temperature_kev=_known(group, "temperature"),
    )
