"""The keys of a target file that hold what was measured of the pulse and its flux."""

from __future__ import annotations

from typing import Final

from exptime import limits
from exptime.documents.fields import Field, measured, uncertainty

_BAND: Final = Field(
    key="band",
    kind="range",
    meaning="Photon energies over which it was measured",
    example="0.5-2.0 keV",
    unit="keV",
    minimum=limits.MIN_ENERGY_KEV,
    maximum=limits.MAX_ENERGY_KEV,
    reason="The absorption table covers no more.",
    is_required=True,
)
_INSTRUMENT: Final = Field(
    key="instrument",
    kind="text",
    meaning="Id or path of the instrument whose counts it was measured in",
    example="my_instrument/profile.yaml",
    default="of the absorbed photon flux",
)
ECHOED_UNCERTAINTY: Final = uncertainty(
    meaning="One standard deviation; echoed, and used for the spread from input errors",
    default="not used",
)

FLUX: Final = measured(
    "flux",
    "erg s-1 cm-2",
    "Energy flux of the source in a band, background subtracted",
    example="3e-13 erg s-1 cm-2",
    minimum=limits.MIN_FLUX,
    maximum=limits.MAX_FLUX,
    reason="Check the exponent and the unit.",
    default="an error, unless hot_spots are given",
    with_uncertainty=ECHOED_UNCERTAINTY,
    more=(
        _BAND,
        Field(
            key="absorbed",
            kind="boolean",
            meaning="true: behind the column, as observed; false: with the column taken off",
            example="true",
            is_required=True,
        ),
    ),
)

PULSED_FRACTION: Final = measured(
    "pulsed_fraction",
    "",
    "Pulsed fraction in a band, or a list of them",
    example="0.45",
    minimum=0.0,
    maximum=2.0,
    excludes_minimum=True,
    default="an error, unless hot_spots are given",
    many="one or list",
    with_uncertainty=uncertainty(
        may_be_zero=False,
        meaning="One standard deviation, a plain number or in per cent of the value",
        default="10 % of the value",
    ),
    more=(
        Field(
            key="definition",
            kind="choice",
            meaning="(max-min)/(max+min), (max-min)/mean, 1-min/mean, rms over mean, or "
            "amplitude of the first harmonic over mean",
            example="peak-to-trough",
            choices=("peak-to-trough", "full-swing", "above-minimum", "rms", "first-harmonic"),
            is_required=True,
        ),
        _BAND,
        _INSTRUMENT,
        Field(
            key="counts",
            kind="quantity",
            meaning="Source counts in the folded profile whose raw extremes were taken; "
            "together with bins",
            example="12000",
            minimum=1.0,
            maximum=1e12,
            default="the fraction is taken to be free of noise bias",
        ),
        Field(
            key="bins",
            kind="integer",
            meaning="Phase bins of that profile",
            example="16",
            minimum=2,
            maximum=4096,
            default="as counts",
        ),
    ),
)

_HARMONIC: Final = Field(
    key="harmonics",
    kind="mapping",
    meaning="Amplitudes of harmonics over the mean",
    example="{number: 2, fraction: 0.10, uncertainty: 0.03}",
    many="one or list",
    fields=(
        Field(
            key="number",
            kind="integer",
            meaning="1 for the spin frequency",
            example="2",
            minimum=1,
            maximum=limits.MAX_HARMONIC,
            is_required=True,
        ),
        Field(
            key="fraction",
            kind="quantity",
            meaning="Amplitude over mean",
            example="0.10",
            minimum=0.0,
            maximum=2.0,
            is_required=True,
        ),
        Field(
            key="uncertainty",
            kind="quantity",
            meaning="One standard deviation of the fraction",
            example="0.03",
            minimum=0.0,
            excludes_minimum=True,
            maximum=2.0,
            is_required=True,
        ),
    ),
)

PULSE_SHAPE: Final = Field(
    key="pulse_shape",
    kind="mapping",
    meaning="What archival profiles tell of the shape of the pulse",
    example="{band: 0.3-1.5 keV, file: folded.ecsv}",
    many="one or list",
    default="geometries are weighted by the pulsed fractions alone",
    fields=(
        _BAND,
        _HARMONIC,
        Field(
            key="file",
            kind="text",
            meaning="Folded profile with columns phase, counts and perhaps error, in place of "
            "harmonics; relative to the target file",
            example="folded.ecsv",
        ),
        Field(
            key="background",
            kind="quantity",
            meaning="Background counts in each bin of the file",
            example="35",
            minimum=0.0,
            maximum=1e12,
            default="the header of the file, else an error",
        ),
        _INSTRUMENT,
    ),
)
