"""A vector of parameters made into expected counts, with what is known of it beforehand."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from exptime.arrays import Floats
from exptime.information.matrix import BackgroundLevels
from exptime.observation.linearise import linearise
from exptime.observation.rates import source_rates
from exptime.observation.response import Response
from exptime.observation.scene import Scene
from exptime.star.resolution import Resolution
from exptime.star.view import star_fault


@dataclass(frozen=True, slots=True, kw_only=True)
class Constraint:
    """Vectors x = origin + directions @ z that a fit may reach.

    Parameters
    ----------
    origin : ndarray, shape (n,)
        One of them.
    directions : ndarray, shape (n, m)
        Columns span the others.
    """

    origin: Floats
    directions: Floats


@dataclass(frozen=True, slots=True, kw_only=True)
class Bounds:
    """Hard limits of the parameters.

    Parameters
    ----------
    lower, upper : ndarray, shape (n,)
        Infinite where there is none.
    """

    lower: Floats
    upper: Floats

    def clip(self, vector: Floats) -> Floats:
        """Return the nearest vector inside."""
        return np.clip(vector, self.lower, self.upper)


@dataclass(frozen=True, slots=True, kw_only=True)
class Model:
    """What turns a vector of parameters into expected counts.

    Parameters
    ----------
    scene : Scene
        Supplies what the vector does not: spin, figure, emission.
    names : tuple of str
        Parameters of the vector: those of `linearise`, then ``area_factor``.
    response : Response
        The channels.
    phase_bins : int
        Number of phase bins.
    resolutions : tuple of Resolution
        Counts to compute each spot with.
    exposure_s : float
        s.
    background_per_s : ndarray, shape (n_channel,)
        Expected background, counts/s.
    levels : BackgroundLevels
        What of it is free.
    """

    scene: Scene
    names: tuple[str, ...]
    response: Response
    phase_bins: int
    resolutions: tuple[Resolution, ...]
    exposure_s: float
    background_per_s: Floats
    levels: BackgroundLevels

    def scene_at(self, vector: Floats) -> Scene | None:
        """Return the scene of a vector; None where it is outside the model."""
        at = dict(zip(self.names, vector.tolist(), strict=True))
        star = replace(
            self.scene.star,
            mass_msun=at["mass"],
            radius_km=at["radius"],
            cos_inclination=at["cos_inclination"],
        )
        sizes = [at[f"spot{k + 1}.angular_radius"] for k in range(len(self.scene.spots))]
        is_sound = (
            star.mass_msun > 0.0
            and star.radius_km > 0.0
            and -1.0 < star.cos_inclination < 1.0
            and at["distance"] > 0.0
            and min(sizes) > 0.0
            and max(sizes) < np.pi
        )
        if not is_sound or star_fault(star) is not None:
            return None
        spots = []
        for k, spot in enumerate(self.scene.spots):
            colatitude = at[f"spot{k + 1}.colatitude"] % (2.0 * np.pi)
            longitude = at[f"spot{k + 1}.longitude"]
            # A centre carried over a pole comes down on the other side.
            if colatitude > np.pi:
                colatitude, longitude = 2.0 * np.pi - colatitude, longitude + np.pi
            spots.append(
                replace(
                    spot,
                    colatitude=colatitude,
                    longitude=longitude,
                    angular_radius=sizes[k],
                    temperature_kev=float(np.exp(at[f"spot{k + 1}.log_temperature"])),
                )
            )
        return replace(
            self.scene,
            star=star,
            spots=tuple(spots),
            distance_pc=at["distance"],
            column_cm2=at["column_density"],
        )

    def vector_of(self, scene: Scene) -> Floats:
        """Return the vector of a scene, with an area factor of one."""
        star = scene.star
        at = {
            "mass": star.mass_msun,
            "radius": star.radius_km,
            "distance": scene.distance_pc,
            "cos_inclination": star.cos_inclination,
            "column_density": scene.column_cm2,
            "area_factor": 1.0,
        }
        for k, spot in enumerate(scene.spots):
            at[f"spot{k + 1}.colatitude"] = spot.colatitude
            at[f"spot{k + 1}.longitude"] = spot.longitude
            at[f"spot{k + 1}.angular_radius"] = spot.angular_radius
            at[f"spot{k + 1}.log_temperature"] = float(np.log(spot.temperature_kev))
        return np.array([at[name] for name in self.names])

    def source(self, vector: Floats) -> Floats | None:
        """Return area factor times source rate, (n_phase, n_channel), counts/s; None outside."""
        scene = self.scene_at(vector)
        if scene is None:
            return None
        rates = source_rates(scene, self.response, self.phase_bins, self.resolutions)
        return np.asarray(np.maximum(rates, 0.0) * vector[self.names.index("area_factor")])

    def linearised(self, vector: Floats) -> tuple[Floats, Floats] | None:
        """Return the source rate and its derivatives, (n, n_phase, n_channel); None outside."""
        scene = self.scene_at(vector)
        if scene is None:
            return None
        local = linearise(scene, self.response, self.phase_bins, self.resolutions)
        factor = vector[self.names.index("area_factor")]
        derivatives = np.concatenate([factor * local.derivatives, local.source_per_s[None]])
        for row, name in enumerate(self.names):
            if name.endswith("colatitude") and vector[row] % (2.0 * np.pi) > np.pi:
                derivatives[row] *= -1.0
        return factor * local.source_per_s, derivatives


@dataclass(frozen=True, slots=True, kw_only=True)
class Penalty:
    """Gaussian-counted priors.

    Parameters
    ----------
    center : ndarray, shape (n,)
        Their centres.
    information : ndarray, shape (n,)
        1/variance of each; zero where there is none.
    level_center : ndarray, shape (n_level,)
        Centres of the priors of the background levels.
    """

    center: Floats
    information: Floats
    level_center: Floats

    def value(self, vector: Floats) -> float:
        """Return the sum of squared deviations over variances."""
        return float(np.sum(self.information * (vector - self.center) ** 2))
