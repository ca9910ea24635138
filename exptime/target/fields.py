"""The keys of a target file: the one table behind its reader, its starter and its key list."""

from __future__ import annotations

import math
from typing import Final

from exptime import limits
from exptime.documents.fields import Field, measured, uncertainty
from exptime.target.measurement_fields import (
    ECHOED_UNCERTAINTY,
    FLUX,
    PULSE_SHAPE,
    PULSED_FRACTION,
)

_PRIOR_UNCERTAINTY: Final = uncertainty(
    meaning="One standard deviation, a Gaussian prior; 0 holds the parameter fixed",
    default="the value only says where the forecast is made",
)

COLUMN_DENSITY: Final = measured(
    "column_density",
    "cm-2",
    "Column of hydrogen atoms on the way",
    example="1.0e20 cm-2",
    minimum=0.0,
    maximum=limits.MAX_COLUMN_CM2,
    reason="Check the exponent.",
    is_required=True,
    with_uncertainty=uncertainty(
        meaning="One standard deviation, a Gaussian prior; 0 holds it fixed",
        default="the column is free",
    ),
)

TEMPERATURE: Final = measured(
    "temperature",
    "keV",
    "Temperature kT of the hot spots",
    example="0.12 keV",
    minimum=limits.MIN_TEMPERATURE_KEV,
    maximum=limits.MAX_TEMPERATURE_KEV,
    reason="Give kT, or a temperature in K.",
    default="an error, unless hot_spots are given",
    is_temperature=True,
    with_uncertainty=ECHOED_UNCERTAINTY,
    more=(
        Field(
            key="frame",
            kind="choice",
            meaning="surface: at the star; observed: as a fit to the spectrum gives it, lower "
            "by 1 + z",
            example="surface",
            choices=("surface", "observed"),
            is_required=True,
        ),
    ),
)

INCLINATION: Final = measured(
    "inclination",
    "rad",
    "Angle between spin axis and line of sight; above 90 deg it is reflected",
    example="60 deg",
    minimum=0.0,
    maximum=math.pi,
    default="free, cos(inclination) uniform; an error with hot_spots",
    with_uncertainty=_PRIOR_UNCERTAINTY,
)

HOT_SPOTS: Final = Field(
    key="hot_spots",
    kind="mapping",
    meaning="Circular hot spots: the forecast is made at this one geometry",
    example="{colatitude: 60 deg, longitude: 0 deg, angular_radius: 8 deg, temperature: 0.12 keV}",
    many="list",
    default="geometries are drawn",
    fields=(
        measured(
            "colatitude",
            "rad",
            "Angle of the centre from the spin pole",
            example="60 deg",
            minimum=0.0,
            maximum=math.pi,
            is_required=True,
            with_uncertainty=_PRIOR_UNCERTAINTY,
        ),
        measured(
            "longitude",
            "rad",
            "Longitude of the centre in the sense of rotation",
            example="0 deg",
            minimum=-2.0 * math.pi,
            maximum=2.0 * math.pi,
            is_required=True,
            with_uncertainty=_PRIOR_UNCERTAINTY,
        ),
        measured(
            "angular_radius",
            "rad",
            "Angle from the centre to the edge, seen from the middle of the star",
            example="8 deg",
            minimum=0.0,
            maximum=math.pi,
            excludes_minimum=True,
            is_required=True,
            with_uncertainty=_PRIOR_UNCERTAINTY,
        ),
        measured(
            "temperature",
            "keV",
            "Temperature kT at the surface",
            example="0.12 keV",
            minimum=limits.MIN_TEMPERATURE_KEV,
            maximum=limits.MAX_TEMPERATURE_KEV,
            reason="Give kT, or a temperature in K.",
            is_required=True,
            is_temperature=True,
            with_uncertainty=_PRIOR_UNCERTAINTY,
        ),
    ),
)

EMISSION: Final = Field(
    key="emission",
    kind="mapping",
    meaning="How the hot surface radiates; the coefficient h makes I(mu) ~ 1 + h mu",
    example="{model: limb-darkened, coefficient: 0.5}",
    default="blackbody",
    scalar_key="model",
    assumption="The hot spots radiate as isotropic blackbodies (emission was not given).",
    fields=(
        Field(
            key="model",
            kind="choice",
            meaning="Law of emission",
            example="blackbody",
            choices=("blackbody", "limb-darkened"),
            is_required=True,
        ),
        Field(
            key="coefficient",
            kind="quantity",
            meaning="Limb-darkening coefficient, for limb-darkened only",
            example="0.5",
            minimum=limits.MIN_LIMB_COEFFICIENT,
            maximum=limits.MAX_LIMB_COEFFICIENT,
            reason="The intensity must stay positive.",
            default="an error with limb-darkened",
        ),
    ),
)

TARGET_FIELDS: Final[tuple[Field, ...]] = (
    Field(
        key="name",
        kind="text",
        meaning="Name of the target, for reports",
        example="Candidate A",
        is_required=True,
    ),
    Field(
        key="spin_frequency",
        kind="quantity",
        meaning="Spin frequency",
        example="250 Hz",
        unit="Hz",
        minimum=limits.MIN_SPIN_HZ,
        maximum=limits.MAX_SPIN_HZ,
        reason="The pulse was checked up to there.",
        default="an error, unless spin_period is given",
    ),
    Field(
        key="spin_period",
        kind="quantity",
        meaning="Spin period, in place of the frequency",
        example="4.0 ms",
        unit="s",
        minimum=1.0 / limits.MAX_SPIN_HZ,
        maximum=1.0 / limits.MIN_SPIN_HZ,
        reason="The pulse was checked down to there.",
        default="an error, unless spin_frequency is given",
    ),
    FLUX,
    PULSED_FRACTION,
    PULSE_SHAPE,
    COLUMN_DENSITY,
    Field(
        key="abundances",
        kind="choice",
        meaning="Abundances of the absorbing gas: Wilms et al. 2000, or Anders & Ebihara 1982",
        example="interstellar",
        choices=("interstellar", "solar-1982"),
        default="interstellar",
        assumption="The column has the interstellar abundances of Wilms, Allen & McCray (2000), "
        "atoms only (abundances were not given).",
    ),
    TEMPERATURE,
    measured(
        "distance",
        "pc",
        "Distance",
        example="350 pc",
        minimum=limits.MIN_DISTANCE_PC,
        maximum=limits.MAX_DISTANCE_PC,
        is_required=True,
        with_uncertainty=uncertainty(
            meaning="One standard deviation, a Gaussian prior; 0 holds it fixed",
            default="20 % of the distance",
        ),
    ),
    measured(
        "mass",
        "Msun",
        "Gravitational mass, for example from radio timing",
        example="1.5 Msun",
        minimum=limits.MIN_MASS_MSUN,
        maximum=limits.MAX_MASS_MSUN,
        default="free; flat prior 1.1-2.6 Msun",
        with_uncertainty=_PRIOR_UNCERTAINTY,
    ),
    measured(
        "radius",
        "km",
        "Equatorial circumferential radius",
        example="12 km",
        minimum=limits.MIN_RADIUS_KM,
        maximum=limits.MAX_RADIUS_KM,
        default="free; flat prior 9-16 km",
        with_uncertainty=_PRIOR_UNCERTAINTY,
    ),
    INCLINATION,
    Field(
        key="figure",
        kind="choice",
        meaning="Shape of the surface",
        example="oblate",
        choices=("oblate", "sphere"),
        default="oblate",
        assumption="The surface is oblate (AlGendy & Morsink 2014; figure was not given).",
    ),
    EMISSION,
    HOT_SPOTS,
)
