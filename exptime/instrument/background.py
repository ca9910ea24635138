"""The background of an instrument description: rates in channels, and what is known of them."""

from __future__ import annotations

from typing import Final

import numpy as np

from exptime.arrays import Floats
from exptime.documents.faults import Faults
from exptime.documents.files import beside
from exptime.documents.values import Values
from exptime.errors import InputError
from exptime.instrument.curves import read_background
from exptime.instrument.records import BackgroundKnowledge
from exptime.quantities import read_quantity

_LEVEL_EXAMPLE: Final = "Write known, unknown, a fraction such as 10 %, or {scale: 10 %}."


def background_rates(
    values: Values, document: str, edges: Floats | None, faults: Faults
) -> tuple[Floats, list[str]] | None:
    """Return the background of a description in its channels.

    Parameters
    ----------
    values : Values
        The description.
    document : str
        Its path.
    edges : ndarray, shape (n_channel + 1,), or None
        Channel edges, keV; None where they are faulty.
    faults : Faults
        Where faults are noted.

    Returns
    -------
    tuple or None
        Counts per second in each channel, and warnings; None when something is wrong.
    """
    group = values.group("background")
    if group is None or not has_background(values):
        return None if edges is None else (np.zeros(len(edges) - 1), [])
    has_rate = group.is_given("rate") or group.is_given("photon_index")
    name, rate, index = group.text("file"), group.number("rate"), group.number("photon_index")
    if group.is_given("file") == has_rate:
        faults.add(
            "give either a file, or a rate and a photon_index.",
            group.place,
            "Write for example {rate: 0.3 s-1, photon_index: 0.7}.",
        )
        return None
    if name is not None and edges is not None:
        path, place = beside(document, name), group.place_of("file")
        return read_background(path, place, edges, faults)
    for key in ("rate", "photon_index"):
        if has_rate and not group.is_given(key):
            faults.add(
                f"the key {key} is missing.",
                group.place,
                "Write for example {rate: 0.3 s-1, photon_index: 0.7}.",
            )
    if rate is None or index is None or edges is None:
        return None
    return power_law_rates(rate, index, edges), []


def power_law_rates(rate_per_s: float, photon_index: float, edges_kev: Floats) -> Floats:
    """Return counts per second in channels of a spectrum E^-g that sums to a rate.

    Parameters
    ----------
    rate_per_s : float
        Over all channels.
    photon_index : float
        g.
    edges_kev : ndarray, shape (n + 1,)
        keV, positive.
    """
    power, ratio = 1.0 - photon_index, np.log(edges_kev[1:] / edges_kev[:-1])
    # Smooth through g = 1, where each share is the logarithm of the ratio.
    growth = ratio if power == 0.0 else np.expm1(power * ratio) / power
    share = (edges_kev[:-1] / edges_kev[0]) ** power * growth
    return np.asarray(rate_per_s * share / share.sum())


def background_knowledge(values: Values, faults: Faults) -> BackgroundKnowledge | None:
    """Return what a description says is known of the background; None when it is faulty."""
    group = values.group("background_knowledge")
    stated = BackgroundKnowledge(kind="unknown") if group is None else _stated(group, faults)
    return stated if has_background(values) else BackgroundKnowledge(kind="known")


def has_background(values: Values) -> bool:
    """Say whether a description names a background at all."""
    group = values.group("background")
    return values.is_given("background") and (group is None or group.text("file") != "none")


def _stated(group: Values, faults: Faults) -> BackgroundKnowledge | None:
    level, scale = group.text("level"), group.number("scale")
    if group.is_given("level") == group.is_given("scale"):
        faults.add("give one kind of knowledge.", group.place, _LEVEL_EXAMPLE)
        return None
    if scale is not None:
        return BackgroundKnowledge(kind="scale" if scale > 0.0 else "known", fraction=scale)
    if level is None:
        return None
    if level == "known":
        return BackgroundKnowledge(kind="known")
    if level == "unknown":
        return BackgroundKnowledge(kind="unknown")
    try:
        fraction = read_quantity(level, "", example="10 %")
    except InputError:
        fraction = -1.0
    if not 0.0 <= fraction <= 10.0:
        faults.add(f"{level!r} is no knowledge.", group.place_of("level"), _LEVEL_EXAMPLE)
        return None
    return BackgroundKnowledge(kind="fraction" if fraction > 0.0 else "known", fraction=fraction)
