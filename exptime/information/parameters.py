"""Parameters of a forecast: where they stand and what is known of them beforehand."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np

from exptime.arrays import Floats
from exptime.target.defaults import FLAT_MASS_MSUN, FLAT_RADIUS_KM
from exptime.target.records import KnownSpot, Measured, Target

FLAT_WIDTHS: Final = {
    "mass": FLAT_MASS_MSUN[1] - FLAT_MASS_MSUN[0],
    "radius": FLAT_RADIUS_KM[1] - FLAT_RADIUS_KM[0],
    "cos_inclination": 1.0,
    "colatitude": math.pi,
    "longitude": 2.0 * math.pi,
    "angular_radius": 0.5 * math.pi,
    "log_temperature": math.log(10.0),
}
"""Widths of the flat priors, in the unit of each parameter; there is none on the column."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Parameter:
    """One parameter of the forecast.

    Parameters
    ----------
    name : str
        As in `exptime.observation.linearise.parameter_names`, or ``area_factor``.
    prior_sigma : float
        Standard deviation of its prior: of the Gaussian one, or W/sqrt(12) of a flat one of
        width W; infinite where there is none, zero where it is held fixed.
    is_flat : bool
        True where `prior_sigma` stands for a flat prior.
    """

    name: str
    prior_sigma: float
    is_flat: bool = False

    @property
    def is_fixed(self) -> bool:
        """Whether the parameter is held at its value."""
        return self.prior_sigma == 0.0

    @property
    def prior_information(self) -> float:
        """1/sigma² of the prior; zero where there is none."""
        return 0.0 if math.isinf(self.prior_sigma) else self.prior_sigma**-2


def parameters_of(
    target: Target, area_uncertainty: float, spot_count: int, cos_inclination: float
) -> tuple[Parameter, ...]:
    """Collect the parameters of a target and an instrument with their priors.

    Parameters
    ----------
    target : Target
        What is known.
    area_uncertainty : float
        One standard deviation of the grey area factor.
    spot_count : int
        Number of hot spots.
    cos_inclination : float
        Where the forecast is made.

    Returns
    -------
    tuple of Parameter
        Star parameters, spot parameters, then ``area_factor``.
    """
    known: Sequence[KnownSpot | None] = target.hot_spots or (None,) * spot_count
    spots = [
        parameter for index, spot in enumerate(known) for parameter in _of_spot(index + 1, spot)
    ]
    return (
        _measured("mass", "mass", target.mass),
        _measured("radius", "radius", target.radius),
        _measured("distance", "distance", target.distance),
        _inclination(target.inclination, cos_inclination),
        _measured("column_density", "column_density", target.column_density),
        *spots,
        Parameter(name="area_factor", prior_sigma=area_uncertainty),
    )


def _of_spot(number: int, spot: KnownSpot | None) -> list[Parameter]:
    known: dict[str, Measured | None] = dict.fromkeys(
        ("colatitude", "longitude", "angular_radius", "log_temperature")
    )
    if spot is not None:
        known["colatitude"] = spot.colatitude
        known["longitude"] = spot.longitude
        known["angular_radius"] = spot.angular_radius
        known["log_temperature"] = _logarithm(spot.temperature_kev)
    return [_measured(f"spot{number}.{key}", key, value) for key, value in known.items()]


def _logarithm(measured: Measured) -> Measured:
    if measured.uncertainty is None:
        return Measured(value=math.log(measured.value))
    return Measured(
        value=math.log(measured.value), uncertainty=measured.uncertainty / measured.value
    )


def _measured(name: str, key: str, measured: Measured | None) -> Parameter:
    if measured is not None and measured.uncertainty is not None:
        return Parameter(name=name, prior_sigma=measured.uncertainty)
    if key not in FLAT_WIDTHS:
        return Parameter(name=name, prior_sigma=math.inf)
    return Parameter(name=name, prior_sigma=FLAT_WIDTHS[key] / math.sqrt(12.0), is_flat=True)


def _inclination(measured: Measured | None, cosine: float) -> Parameter:
    if measured is None or measured.uncertainty is None:
        return _measured("cos_inclination", "cos_inclination", None)
    sine, sigma = math.sqrt(max(0.0, 1.0 - cosine**2)), measured.uncertainty
    return Parameter(name="cos_inclination", prior_sigma=max(sigma * sine, 0.5 * sigma**2))


def prior_matrix(
    parameters: Sequence[Parameter], without: Sequence[str] = (), flat_only: bool = False
) -> Floats:
    """Return the prior information of parameters as a diagonal matrix.

    Parameters
    ----------
    parameters : sequence of Parameter
        Free parameters.
    without : sequence of str
        Names whose prior is left out.
    flat_only : bool
        Leave it out only where it is flat.
    """
    diagonal = [
        0.0
        if parameter.name in without and (parameter.is_flat or not flat_only)
        else parameter.prior_information
        for parameter in parameters
    ]
    return np.diag(diagonal)
