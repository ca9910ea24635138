"""The keys of an instrument description: the one table behind its reader and its key list."""

from __future__ import annotations

from typing import Final

from exptime import limits
from exptime.documents.fields import Field

REDISTRIBUTION: Final = Field(
    key="redistribution",
    kind="mapping",
    meaning="Gaussian spread of the measured energy about the photon's",
    example="{fwhm: 85 eV, at: 1 keV, law: sqrt}",
    scalar_key="file",
    default="perfect",
    assumption="Energies are measured perfectly: no redistribution was given.",
    fields=(
        Field(
            key="file",
            kind="text",
            meaning="The word perfect; a redistribution matrix file is not supported yet",
            example="response.rmf",
        ),
        Field(
            key="fwhm",
            kind="quantity",
            unit="keV",
            meaning="Full width at half maximum",
            example="85 eV",
            minimum=0.0,
            maximum=20.0,
        ),
        Field(
            key="at",
            kind="quantity",
            unit="keV",
            meaning="Photon energy at which that width holds",
            example="1 keV",
            minimum=0.0,
            excludes_minimum=True,
            maximum=limits.MAX_ENERGY_KEV,
        ),
        Field(
            key="law",
            kind="choice",
            meaning="How the width grows with energy: as its root, not at all, in proportion",
            example="sqrt",
            choices=("sqrt", "constant", "linear"),
        ),
    ),
)

CHANNELS: Final = Field(
    key="channels",
    kind="mapping",
    meaning="Energy channels; a last one narrower than half the width joins its neighbour",
    example="{band: 0.3-3.0 keV, width: 50 eV}",
    is_required=True,
    fields=(
        Field(
            key="band",
            kind="range",
            unit="keV",
            meaning="Lowest and highest measured energy",
            example="0.3-3.0 keV",
            minimum=limits.MIN_ENERGY_KEV,
            maximum=limits.MAX_ENERGY_KEV,
            is_required=True,
        ),
        Field(
            key="width",
            kind="quantity",
            unit="keV",
            meaning="Width of a channel",
            example="50 eV",
            minimum=0.001,
            maximum=limits.MAX_ENERGY_KEV,
            is_required=True,
        ),
    ),
)

BACKGROUND: Final = Field(
    key="background",
    kind="mapping",
    meaning="Background counts, not multiplied by the area: a table of ct s-1 keV-1 against energy,"
    " or a rate with an index",
    example="{rate: 0.3 s-1, photon_index: 0.7}",
    scalar_key="file",
    default="none",
    assumption="There is no background: none was given.",
    fields=(
        Field(
            key="file",
            kind="text",
            meaning="A table with columns energy (keV) and rate (ct s-1 keV-1), or the word none",
            example="background.ecsv",
        ),
        Field(
            key="rate",
            kind="quantity",
            unit="ct s-1",
            meaning="Counts per second over the channels' band",
            example="0.3 s-1",
            minimum=0.0,
            maximum=1e6,
        ),
        Field(
            key="photon_index",
            kind="quantity",
            meaning="g of a spectrum falling as energy to the power -g",
            example="0.7",
            minimum=-10.0,
            maximum=10.0,
        ),
    ),
)

KNOWLEDGE: Final = Field(
    key="background_knowledge",
    kind="mapping",
    meaning="What is known of the background beforehand: known, unknown (one free level per "
    "channel), a fraction such as 10 % (one level per 0.2 keV), or {scale: 10 %} (one common "
    "factor)",
    example="unknown",
    scalar_key="level",
    default="unknown",
    fields=(
        Field(
            key="level",
            kind="text",
            meaning="known, unknown or a fraction; a bare scalar stands for it",
            example="10 %",
        ),
        Field(
            key="scale",
            kind="quantity",
            meaning="One standard deviation of a common factor",
            example="10 %",
            minimum=0.0,
            maximum=10.0,
        ),
    ),
)


def _time(key: str, meaning: str, assumption: str = "") -> Field:
    return Field(
        key=key,
        kind="quantity",
        unit="s",
        meaning=meaning,
        example="100 ns",
        minimum=0.0,
        maximum=1e3,
        default="0 s",
        assumption=assumption,
    )


INSTRUMENT_FIELDS: Final = (
    Field(
        key="name",
        kind="text",
        meaning="Name for the reports",
        example="Soft concentrator (invented)",
        is_required=True,
    ),
    Field(
        key="effective_area",
        kind="text",
        meaning="Table of energy (keV) and area (cm2): ECSV, CSV, plain columns or an ARF FITS "
        "file; energy_low, energy_high and area stand for bins",
        example="area.ecsv",
        is_required=True,
    ),
    REDISTRIBUTION,
    CHANNELS,
    BACKGROUND,
    KNOWLEDGE,
    _time(
        "time_resolution",
        "Full width of the time bin",
        "Arrival times are not binned: no time_resolution was given.",
    ),
    _time("time_uncertainty", "One-sigma clock error"),
    Field(
        key="area_uncertainty",
        kind="quantity",
        meaning="One standard deviation of a common factor on the area; 0 holds it",
        example="3 %",
        minimum=0.0,
        maximum=1.0,
        default="0, the area is exact",
        assumption="The effective area is exact: no area_uncertainty was given.",
    ),
    Field(
        key="observing_efficiency",
        kind="quantity",
        meaning="Exposure over wall-clock time",
        example="45 %",
        minimum=0.0,
        excludes_minimum=True,
        maximum=1.0,
        default="not stated",
    ),
    Field(
        key="phase_bins",
        kind="integer",
        meaning="Phase bins of the folded data",
        example="32",
        minimum=4,
        maximum=256,
        default="32",
    ),
)
