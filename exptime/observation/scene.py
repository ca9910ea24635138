"""What is observed: a star with its spots, at a distance, behind a column."""

from __future__ import annotations

from dataclasses import dataclass

from exptime.star.records import Emission, HotSpot, Star


@dataclass(frozen=True, slots=True, kw_only=True)
class Scene:
    """A star and the way to it.

    Parameters
    ----------
    star : Star
        The star as it is seen.
    spots : tuple of HotSpot
        Its hot spots, at least one.
    emission : Emission
        How they radiate.
    distance_pc : float
        Distance, pc.
    column_cm2 : float
        Hydrogen column density, cm^-2.
    """

    star: Star
    spots: tuple[HotSpot, ...]
    emission: Emission
    distance_pc: float
    column_cm2: float
