"""Sentences that every report carries: what was assumed, and what to doubt."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from exptime.arrays import Floats
from exptime.geometry.resampling import effective_number
from exptime.instrument.records import Instrument
from exptime.study.case import Case
from exptime.study.geometries import Draws, GeometrySet
from exptime.target.defaults import FIXED_MASS_MSUN, FIXED_RADIUS_KM
from exptime.target.records import Target

_FEWEST_EFFECTIVE = 50.0
_MANY_FLOORED = 0.25
_FEW_COUNTS = 1e4

_ABUNDANCES = {
    "interstellar": "interstellar abundances of Wilms, Allen & McCray (2000), atoms only",
    "solar-1982": "solar abundances of Anders & Ebihara (1982)",
}


def assumptions_of(
    target: Target, instrument: Instrument, draws: Draws, is_known: bool
) -> tuple[str, ...]:
    """Return what was assumed beyond the input files' own sentences.

    Parameters
    ----------
    target, instrument
        As read; their own sentences come first.
    draws : Draws
        How geometries were drawn.
    is_known : bool
        Whether the target file gave hot spots.
    """
    emission = target.emission
    law = (
        "a blackbody"
        if emission.model == "blackbody"
        else f"a blackbody spectrum with intensity in proportion to 1 + {emission.coefficient:g} mu"
    )
    sentences = [
        f"The hot spots radiate as {law}; the rest of the surface is dark.",
        f"Interstellar absorption: {_ABUNDANCES[target.abundances]}.",
        "Light bends as around a star that does not drag space along; the surface is "
        + ("a sphere." if target.figure == "sphere" else "oblate (AlGendy & Morsink 2014)."),
    ]
    if not is_known and draws.is_star_fixed and (target.mass is None or target.radius is None):
        sentences.append(
            f"What was not given of the star is held at {FIXED_MASS_MSUN:g} Msun and "
            f"{FIXED_RADIUS_KM:g} km in the draws."
        )
    if not is_known and target.radius is not None and target.mass is not None:
        sentences.append("Geometries are drawn for the star at the mass and radius given.")
    return (*target.assumptions, *instrument.assumptions, *sentences)


def warnings_of(
    target: Target,
    instrument: Instrument,
    geometries: GeometrySet,
    weights: Floats,
    cases: Sequence[Case],
    draws: Draws,
) -> tuple[str, ...]:
    """Return what to doubt beyond the input files' own warnings."""
    sentences = [*target.warnings, *instrument.warnings, *geometries.warnings]
    effective = effective_number(weights)
    if not geometries.is_known:
        if len(cases) < draws.count:
            sentences.append(
                f"Only {len(cases)} of the {draws.count} geometries asked for were found among "
                f"{geometries.tried} candidates."
            )
        if effective < _FEWEST_EFFECTIVE:
            sentences.append(
                f"The quantiles rest on {effective:.0f} effective geometries, fewer than "
                f"{_FEWEST_EFFECTIVE:.0f}: ask for more --draws."
            )
    unconstrained = float(
        weights[[not np.isfinite(case.data_sigma[-1, 1]) for case in cases]].sum()
    )
    if unconstrained > 0.0:
        sentences.append(
            f"For {unconstrained:.0%} of the geometries the data leave the radius unconstrained; "
            "they count as infinite.".replace("%", " per cent")
        )
    floored = max(case.floored_share for case in cases)
    if floored > _MANY_FLOORED:
        sentences.append(
            f"In up to {100.0 * floored:.0f} per cent of the cells the source is eclipsed; they "
            "carry no information."
        )
    return tuple(sentences)
