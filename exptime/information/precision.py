"""Precision of mass, radius and compactness against exposure, and exposure for a precision."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Final, Literal

import numpy as np

from exptime.arrays import Booleans, Floats
from exptime.constants import SOLAR_MASS_KM
from exptime.information.covariance import invert
from exptime.information.matrix import Information
from exptime.information.parameters import Parameter, prior_matrix

Quantity = Literal["mass", "radius", "compactness"]
QUANTITIES: Final[tuple[Quantity, ...]] = ("mass", "radius", "compactness")

LONGEST_EXPOSURE_S: Final = 1e8
_SHORTEST_EXPOSURE_S = 1.0
_OWN_PRIORS: Final = {
    "mass": ("mass",),
    "radius": ("radius",),
    "compactness": ("mass", "radius"),
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Experiment:
    """Information of an observation, with what was known before.

    Parameters
    ----------
    information : Information
        Per second, for all of `parameters`.
    parameters : tuple of Parameter
        In the order of the information, fixed ones included.
    mass_msun, radius_km : float
        Where the forecast is made.
    """

    information: Information
    parameters: tuple[Parameter, ...]
    mass_msun: float
    radius_km: float

    @property
    def compactness(self) -> float:
        """GM/(Rc²)."""
        return SOLAR_MASS_KM * self.mass_msun / self.radius_km

    @property
    def is_free(self) -> Booleans:
        """Mask of the parameters that are not held fixed, shape (n_parameter,)."""
        return np.array([not parameter.is_fixed for parameter in self.parameters])

    @property
    def free(self) -> tuple[Parameter, ...]:
        """The parameters that are not held fixed."""
        return tuple(parameter for parameter in self.parameters if not parameter.is_fixed)

    def value(self, quantity: Quantity) -> float:
        """Return the value of a quantity at which the forecast is made."""
        return {
            "mass": self.mass_msun,
            "radius": self.radius_km,
            "compactness": self.compactness,
        }[quantity]

    def directions(self) -> Floats:
        """Return mass, radius and compactness as combinations of the free parameters, (3, n)."""
        names = [parameter.name for parameter in self.parameters]
        full = np.zeros((3, len(names)))
        full[0, names.index("mass")] = 1.0
        full[1, names.index("radius")] = 1.0
        relative = full[0] / self.mass_msun - full[1] / self.radius_km
        full[2] = self.compactness * relative
        return np.asarray(full[:, self.is_free])

    def information_at(self, exposure_s: float) -> Floats:
        """Return the information on the free parameters without priors."""
        keep = self.is_free
        return np.asarray(self.information.at(np.array([exposure_s]))[0][np.ix_(keep, keep)])

    def prior_sigmas(self) -> Floats:
        """Return standard deviations of the priors of mass, radius and compactness, (3,)."""
        sigma = {parameter.name: parameter.prior_sigma for parameter in self.parameters}
        relative = math.hypot(sigma["mass"] / self.mass_msun, sigma["radius"] / self.radius_km)
        return np.array([sigma["mass"], sigma["radius"], self.compactness * relative])


@dataclass(frozen=True, slots=True, kw_only=True)
class Precision:
    """Standard deviations of mass (Msun), radius (km) and compactness at one exposure.

    Parameters
    ----------
    sigma : ndarray, shape (3,)
        With every prior.
    data_sigma : ndarray, shape (3,)
        Without the flat priors on mass and radius; infinite where unconstrained.
    sigma_without_own_prior : ndarray, shape (3,)
        Without the quantity's own prior, flat or Gaussian (both, for compactness).
    covariance : ndarray, shape (2, 2)
        Of mass and radius, with every prior.
    condition : float
        Condition number of the scaled information matrix with every prior.
    """

    sigma: Floats
    data_sigma: Floats
    sigma_without_own_prior: Floats
    covariance: Floats
    condition: float


def precision_at(experiment: Experiment, exposure_s: float) -> Precision:
    """Compute the precision of one exposure.

    Parameters
    ----------
    experiment : Experiment
        Information and priors.
    exposure_s : float
        s.
    """
    data, free = experiment.information_at(exposure_s), experiment.free
    directions = experiment.directions()
    everything = invert(data + prior_matrix(free))
    covariance = everything.covariance(directions)
    measured = invert(data + prior_matrix(free, ("mass", "radius"), flat_only=True))
    alone = [
        _sigma(data + prior_matrix(free, _OWN_PRIORS[name]), directions[row : row + 1])[0]
        for row, name in enumerate(QUANTITIES)
    ]
    return Precision(
        sigma=_root(np.diagonal(covariance)),
        data_sigma=_root(np.diagonal(measured.covariance(directions))),
        sigma_without_own_prior=np.array(alone),
        covariance=covariance[:2, :2],
        condition=everything.condition,
    )


def data_sigma(experiment: Experiment, quantity: Quantity, exposure_s: float) -> float:
    """Return the standard deviation of one quantity without flat priors on mass and radius."""
    row = QUANTITIES.index(quantity)
    prior = prior_matrix(experiment.free, ("mass", "radius"), flat_only=True)
    matrix = experiment.information_at(exposure_s) + prior
    return float(_sigma(matrix, experiment.directions()[row : row + 1])[0])


def required_exposure(experiment: Experiment, quantity: Quantity, precision: float) -> float:
    """Exposure at which `data_sigma` over the value falls to a wanted precision.

    Parameters
    ----------
    experiment : Experiment
        Information and priors.
    quantity : {"mass", "radius", "compactness"}
        Which quantity.
    precision : float
        One standard deviation over the value.

    Returns
    -------
    float
        s: zero where 1 s is enough, as the priors alone then meet it; infinite when 1e8 s do not
        suffice.
    """
    wanted = precision * experiment.value(quantity)
    return earliest(
        lambda exposure: data_sigma(experiment, quantity, exposure) <= wanted,
        _SHORTEST_EXPOSURE_S,
        LONGEST_EXPOSURE_S,
    )


def earliest(is_reached: Callable[[float], bool], shortest: float, longest: float) -> float:
    """Return the first of log-spaced values from which a monotone condition holds.

    Parameters
    ----------
    is_reached : callable
        False below some value and true above it.
    shortest, longest : float
        Ends of the search.

    Returns
    -------
    float
        Good to one part in a million; zero when the condition holds at `shortest` already,
        infinite when it fails at `longest`.
    """
    if not is_reached(longest):
        return math.inf
    if is_reached(shortest):
        return 0.0
    low, high = math.log(shortest), math.log(longest)
    while high - low > 1e-6:
        middle = 0.5 * (low + high)
        low, high = (low, middle) if is_reached(math.exp(middle)) else (middle, high)
    return math.exp(high)


def _sigma(matrix: Floats, directions: Floats) -> Floats:
    return _root(np.diagonal(invert(matrix).covariance(directions)))


def _root(variances: Floats | Sequence[float]) -> Floats:
    return np.asarray(np.sqrt(np.maximum(np.asarray(variances), 0.0)))
