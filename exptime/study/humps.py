"""Other maxima of the likelihood of the expected data, searched from other geometries."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from exptime.arrays import Floats
from exptime.information.model import Bounds
from exptime.information.refit import fit
from exptime.star.records import HotSpot
from exptime.study.geometries import GeometrySet
from exptime.study.profile import Setting, free_constraint, value_of
from exptime.study.verify_records import Hump

_MOST_STARTS = 12
_HUMP_RISE = 3.841


def hump_starts(setting: Setting, geometries: GeometrySet, index: int) -> list[Floats]:
    """Return vectors from which other humps are searched.

    Those of the heaviest other geometries, and of the own one with inclination and a colatitude
    exchanged or a spot mirrored about the equator.
    """
    scene, model = setting.model.scene, setting.model
    inclination = math.acos(scene.star.cos_inclination)
    starts = []
    for number, spot in enumerate(scene.spots):

        def moved(spot: HotSpot, number: int = number) -> tuple[HotSpot, ...]:
            return tuple(spot if k == number else old for k, old in enumerate(scene.spots))

        tilted = min(spot.colatitude, math.pi - spot.colatitude)
        star = replace(scene.star, cos_inclination=math.cos(tilted))
        exchanged = replace(spot, colatitude=inclination)
        mirrored = replace(spot, colatitude=math.pi - spot.colatitude)
        starts.append(model.vector_of(replace(scene, star=star, spots=moved(exchanged))))
        starts.append(model.vector_of(replace(scene, spots=moved(mirrored))))
    order = np.argsort(geometries.weights)[::-1]
    for other in order[: _MOST_STARTS + 1]:
        if other != index and len(starts) < _MOST_STARTS:
            star, spots = geometries.geometries[other]
            starts.append(model.vector_of(replace(scene, star=star, spots=spots)))
    return [np.where(setting.is_free, start, setting.truth) for start in starts]


def climb(setting: Setting, limits: Bounds, start: Floats) -> tuple[float, Floats]:
    """Return the deviance and the vector where a fit to the expected data ends."""
    found = fit(
        setting.model,
        setting.expected_counts,
        setting.penalty,
        start,
        free_constraint(setting),
        limits,
    )
    return found.deviance, found.vector


def distinct_humps(setting: Setting, ends: Sequence[tuple[float, Floats]]) -> list[Hump]:
    """Return the ends that are likely and away from the truth, each once."""
    names = setting.model.names
    humps: list[Hump] = []
    for rise, vector in sorted(ends, key=lambda end: end[0]):
        scene = setting.model.scene_at(vector)
        if not rise < _HUMP_RISE or scene is None or not _is_away(setting, vector):
            continue
        hump = Hump(
            rise=float(rise),
            mass_msun=value_of(setting, "mass", vector),
            radius_km=value_of(setting, "radius", vector),
            inclination=math.acos(abs(float(vector[names.index("cos_inclination")]))),
            colatitudes=tuple(spot.colatitude for spot in scene.spots),
        )
        if all(abs(hump.radius_km - old.radius_km) > 0.02 * old.radius_km for old in humps):
            humps.append(hump)
    return humps


def _is_away(setting: Setting, vector: Floats) -> bool:
    """Whether a vector is no point of the ridge at the truth: an angle moved by 10 degrees."""
    names = setting.model.names
    for index, name in enumerate(names):
        if name == "cos_inclination" or name.endswith("colatitude"):
            if abs(vector[index] - setting.truth[index]) > math.radians(10.0):
                return True
    return False
