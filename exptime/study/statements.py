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
from exptime.target.fields import TARGET_FIELDS
from exptime.target.records import Target

_FEWEST_EFFECTIVE = 50.0
_MANY_FLOORED = 0.25

_ABUNDANCES = {
    "interstellar": "the interstellar abundances of Wilms, Allen & McCray (2000), atoms only",
    "solar-1982": "the solar abundances of Anders & Ebihara (1982)",
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
    sentences = [
        "The surface outside the hot spots is dark.",
        "Light bends as around a star that does not drag space along.",
        *_laws(target),
    ]
    if not is_known and draws.is_star_fixed:
        held = [
            f"the {name} at {value:g} {unit}"
            for name, given, value, unit in (
                ("mass", target.mass, FIXED_MASS_MSUN, "Msun"),
                ("radius", target.radius, FIXED_RADIUS_KM, "km"),
            )
            if given is None
        ]
        if held:
            sentences.append(f"Geometries are drawn with {' and '.join(held)}, as asked.")
    if not is_known and target.radius is not None and target.mass is not None:
        sentences.append("Geometries are drawn for the star at the mass and radius given.")
    return (*target.assumptions, *instrument.assumptions, *sentences)


def _laws(target: Target) -> list[str]:
    """Return what was chosen where the target's own sentences do not say it."""
    emission = target.emission
    law = "a blackbody"
    if emission.model == "limb-darkened":
        law = (
            f"a blackbody spectrum, its intensity in proportion to 1 + {emission.coefficient:g} mu"
        )
    shape = "a sphere" if target.figure == "sphere" else "oblate (AlGendy & Morsink 2014)"
    sentences = {
        "emission": f"The hot spots radiate as {law}.",
        "abundances": f"The column has {_ABUNDANCES[target.abundances]}.",
        "figure": f"The surface is {shape}.",
    }
    said = {each.key for each in TARGET_FIELDS if each.assumption in target.assumptions}
    return [sentence for key, sentence in sentences.items() if key not in said]


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
