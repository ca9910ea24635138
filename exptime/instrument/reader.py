"""Read an instrument description into an `Instrument`, or tell everything wrong with it."""

from __future__ import annotations

import os
from typing import Final, cast

import numpy as np

from exptime._resources import shipped_folder
from exptime.arrays import Floats
from exptime.documents.faults import Faults
from exptime.documents.field_reader import read_fields
from exptime.documents.files import beside
from exptime.documents.values import Values
from exptime.documents.yaml_reader import read_yaml
from exptime.errors import Fault, ProfileError
from exptime.instrument.background import background_knowledge, background_rates, has_background
from exptime.instrument.curves import area_warnings, read_area
from exptime.instrument.fields import INSTRUMENT_FIELDS
from exptime.instrument.records import (
    BackgroundKnowledge,
    EffectiveArea,
    Instrument,
    Redistribution,
)

PROFILE: Final = "profile.yaml"
MOST_CHANNELS: Final = 4096


def shipped_instruments() -> tuple[str, ...]:
    """Return the ids of the instruments that ship, in alphabetical order."""
    folder = shipped_folder("instrument_profiles")
    return tuple(
        sorted(entry.name for entry in folder.iterdir() if entry.joinpath(PROFILE).is_file())
    )


def read_instrument(name: str) -> Instrument:
    """Read an instrument description.

    Parameters
    ----------
    name : str
        Id of a shipped instrument, or else the path of a folder with profile.yaml or of a YAML
        file.

    Raises
    ------
    ProfileError
        Everything wrong with it and with the files it names, in one go.
    """
    faults = Faults(ProfileError)
    path = _profile_path(name)
    root = read_yaml(path, faults)
    if root is None:
        faults.raise_if_any()
        raise AssertionError("an unreadable document has a fault")
    values = read_fields(root, INSTRUMENT_FIELDS, faults)
    edges = _channel_edges(values, faults)
    area = _area(values, path, faults)
    redistribution = _redistribution(values.group("redistribution"), faults)
    background = background_rates(values, path, edges, faults)
    knowledge = background_knowledge(values, faults)
    if edges is not None and area is not None and redistribution is not None:
        _refuse_no_overlap(values, edges, area[0], faults)
    faults.raise_if_any()
    # Without faults nothing is missing.
    channel_edges = cast("Floats", edges)
    effective_area, area_doubts = cast("tuple[EffectiveArea, list[str]]", area)
    rates, background_doubts = cast("tuple[Floats, list[str]]", background)
    return Instrument(
        id=name,
        name=values.texts["name"],
        area=effective_area,
        redistribution=cast("Redistribution", redistribution),
        channel_edges_kev=channel_edges,
        background_per_s=rates,
        background_knowledge=cast("BackgroundKnowledge", knowledge),
        time_resolution_s=values.number("time_resolution") or 0.0,
        time_uncertainty_s=values.number("time_uncertainty") or 0.0,
        area_uncertainty=values.number("area_uncertainty") or 0.0,
        observing_efficiency=values.number("observing_efficiency"),
        phase_bins=int(values.number("phase_bins") or 32),
        assumptions=_assumptions(values),
        warnings=(
            *_uneven_channels(channel_edges),
            *area_doubts,
            *area_warnings(effective_area, channel_edges),
            *background_doubts,
        ),
    )


def _profile_path(name: str) -> str:
    if name in shipped_instruments():
        return str(shipped_folder("instrument_profiles").joinpath(name, PROFILE))
    if os.path.isdir(name):
        return os.path.join(name, PROFILE)
    if not os.path.exists(name):
        shipped = ", ".join(shipped_instruments())
        raise ProfileError(
            Fault(
                f"there is no instrument description {name}.",
                remedy=f"Give a path, or the id of one that ships: {shipped}.",
            )
        )
    return name


def _channel_edges(values: Values, faults: Faults) -> Floats | None:
    group = values.group("channels")
    band, width = (group.range("band"), group.number("width")) if group else (None, None)
    if group is None or band is None or width is None:
        return None
    low, high = band
    if not low < high:
        faults.add("the band is empty.", group.place_of("band"), "Give the lower energy first.")
        return None
    if width > (high - low) * (1.0 + 1e-9):
        faults.add(
            f"the width of {width:g} keV exceeds the band.",
            group.place_of("width"),
            "Give narrower channels.",
        )
        return None
    whole = int((high - low) / width + 0.5 + 1e-9)
    if whole > MOST_CHANNELS:
        faults.add(
            f"{whole} channels are more than {MOST_CHANNELS}.",
            group.place_of("width"),
            "Give wider channels.",
        )
        return None
    edges = low + width * np.arange(whole + 1)
    edges[-1] = high
    return np.asarray(edges)


def _uneven_channels(edges: Floats) -> list[str]:
    widths = np.diff(edges)
    if abs(widths[-1] - widths[0]) <= 1e-6 * widths[0]:
        return []
    return [
        f"The width of the channels does not divide their band: the last one is "
        f"{widths[-1]:.4g} keV wide, the others {widths[0]:.4g} keV."
    ]


def _area(values: Values, document: str, faults: Faults) -> tuple[EffectiveArea, list[str]] | None:
    name = values.text("effective_area")
    if name is None:
        return None
    return read_area(beside(document, name), values.place_of("effective_area"), faults)


def _redistribution(group: Values | None, faults: Faults) -> Redistribution | None:
    if group is None or group.text("file") == "perfect":
        return Redistribution()
    if group.is_given("file"):
        faults.add(
            "redistribution matrix files are not supported yet.",
            group.place_of("file"),
            "Describe the width: {fwhm: 85 eV, at: 1 keV, law: sqrt}.",
        )
        return None
    missing = [key for key in ("fwhm", "at", "law") if not group.is_given(key)]
    for key in missing:
        faults.add(
            f"the key {key} is missing.",
            group.place,
            "Write for example {fwhm: 85 eV, at: 1 keV, law: sqrt}.",
        )
    width, at, law = group.number("fwhm"), group.number("at"), group.text("law")
    if width is None or at is None or law is None:
        return None
    if width == 0.0:
        return Redistribution()
    return Redistribution(
        fwhm_kev=width,
        at_kev=at,
        law="sqrt" if law == "sqrt" else "linear" if law == "linear" else "constant",
    )


def _refuse_no_overlap(values: Values, edges: Floats, area: EffectiveArea, faults: Faults) -> None:
    low, high = float(area.energies_kev[0]), float(area.energies_kev[-1])
    if low >= edges[-1] or high <= edges[0]:
        faults.add(
            f"the channels ({edges[0]:g}-{edges[-1]:g} keV) lie outside the table of the area "
            f"({low:g}-{high:g} keV).",
            values.place_of("channels"),
            "Check the units of both.",
        )
    elif not np.any(area.area_cm2 > 0.0):
        faults.add("the area is zero everywhere.", values.place_of("effective_area"))


def _assumptions(values: Values) -> tuple[str, ...]:
    sentences = [
        field.assumption
        for field in INSTRUMENT_FIELDS
        if field.assumption and not values.is_given(field.key)
    ]
    if has_background(values) and not values.is_given("background_knowledge"):
        sentences.append(
            "The background level is free in every channel: nothing was said of how well it is "
            "known."
        )
    return tuple(sentences)
