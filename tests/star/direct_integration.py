"""A slow, plain twin of the pulse model: light of the hot surface gathered in real phase.

Nothing here comes from `exptime.star` but the records that describe a star. Two ways to sum:

- `direct_photon_flux`, by rows of one colatitude. What leaves a row at one azimuth comes from
  every longitude of the spot in turn, and falls into the phase bins according to longitude. The
  phase is split wherever a spot's edge meets the edge of a bin or the row its horizon, so that
  Gauss nodes see only smooth functions; colatitude is a tanh-sinh sum between the colatitudes
  where rows become wholly visible or hidden, a pole is passed, or the spot ends.
- `element_photon_flux`, by surface elements in polar coordinates about the spot's centre, each
  followed through the phase bins. It knows nothing of rows, and converges more slowly where the
  horizon cuts a large spot.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from scipy.special import expit

from exptime.arrays import Floats
from exptime.star.records import Emission, HotSpot, Star
from tests.star.direct_surface import PARSEC_CM, Belt, Mistake

_TURN = 2.0 * math.pi


@dataclass(frozen=True, slots=True, kw_only=True)
class Mesh:
    """How finely a piece in colatitude and a piece in phase are divided."""

    rows: int = 80
    nodes: int = 6

    def doubled(self) -> Mesh:
        """Return the mesh with twice as many nodes in both directions."""
        return Mesh(rows=2 * self.rows, nodes=2 * self.nodes)


def direct_photon_flux(
    star: Star,
    spots: Sequence[HotSpot],
    emission: Emission,
    distance_pc: float,
    energies_kev: Floats | Sequence[float],
    phase_bins: int = 32,
    *,
    mesh: Mesh | None = None,
    mistake: Mistake = "none",
) -> Floats:
    """Return photons cm^-2 s^-1 keV^-1 averaged over each phase bin, shape (bin, energy)."""
    energies, mesh = np.asarray(energies_kev, dtype=float), mesh or Mesh()
    total = np.zeros((phase_bins, len(energies)))
    for spot in spots:
        theta, weight = _colatitudes(star, spot, mesh.rows, mistake)
        for some in np.array_split(np.arange(len(theta)), max(1, len(theta) // 32)):
            belt = Belt(star, theta[some], mistake)
            flux = _rows_flux(belt, spot, emission, energies, phase_bins, mesh.nodes)
            total += np.einsum("r,rke->ke", weight[some] * np.sin(theta[some]), flux)
    return total / (distance_pc * PARSEC_CM) ** 2


def _rows_flux(
    belt: Belt,
    spot: HotSpot,
    emission: Emission,
    energies: Floats,
    phase_bins: int,
    nodes: int,
) -> Floats:
    """Return bin averages per radian of colatitude over sin(theta), shape (row, bin, energy)."""
    half = _half_width(belt.theta, spot)
    first, last = ((spot.longitude + sign * half) / _TURN for sign in (-1.0, 1.0))
    begin, end = belt.arc
    bins = np.arange(phase_bins) / phase_bins
    # In turns of arrival for longitude zero: where light of a spot's edge falls on a bin's edge.
    meets = np.concatenate([bins + first[:, None], bins + last[:, None]], axis=1)
    meets = begin[:, None] + np.mod(meets - begin[:, None], 1.0)
    ends = np.concatenate([begin[:, None], np.minimum(meets, end[:, None]), end[:, None]], axis=1)
    ends = np.sort(ends, axis=1)
    x, weight = np.polynomial.legendre.leggauss(nodes)
    step = np.diff(ends, axis=1)[..., None]
    arrival = (ends[:, :-1, None] + 0.5 * (x + 1.0) * step).reshape(len(begin), -1)
    step = (0.5 * weight * step).reshape(arrival.shape)
    row = np.repeat(np.arange(len(begin)), arrival.shape[1])
    azimuth = belt.emission_azimuth(arrival.ravel(), row)
    flux = belt.photons(azimuth, row, spot.temperature_kev, emission, energies)
    flux = flux.reshape(*arrival.shape, len(energies)) * step[..., None]

    def length_below(turn: Floats) -> Floats:
        """Return how much of each bin lies between phase zero and this one, over many turns."""
        whole = np.floor(turn)
        return np.asarray(whole / phase_bins + np.clip(turn - whole - bins, 0.0, 1.0 / phase_bins))

    share = length_below((arrival - first[:, None])[..., None])
    share -= length_below((arrival - last[:, None])[..., None])
    return np.asarray(_TURN * phase_bins * np.einsum("rxe,rxk->rke", flux, share))


def _half_width(theta: Floats, spot: HotSpot) -> Floats:
    """Return half the extent in longitude of a circle about a centre, from its three sides."""
    # sin²(d/2) by the half-angle formula of the spherical triangle pole, centre, edge.
    rho, center = spot.angular_radius, spot.colatitude
    top = np.sin(0.5 * (rho - center + theta)) * np.sin(0.5 * (rho + center - theta))
    bottom = math.sin(center) * np.sin(theta)
    ratio = np.divide(top, bottom, out=np.ones_like(top), where=bottom > np.abs(top))
    return np.asarray(2.0 * np.arcsin(np.sqrt(np.clip(ratio, 0.0, 1.0))))


def _colatitudes(star: Star, spot: HotSpot, rows: int, mistake: Mistake) -> tuple[Floats, Floats]:
    """Return nodes and weights over the colatitudes of a spot, piece by piece."""
    rho, center = spot.angular_radius, spot.colatitude
    low, high = max(0.0, center - rho), min(math.pi, center + rho)
    cuts = {low, high}
    cuts |= {c for c in (rho - center, _TURN - rho - center) if low < c < high}
    for azimuth in (0.0, math.pi):

        def seen(theta: Floats, azimuth: float = azimuth) -> Floats:
            belt = Belt(star, theta, mistake)
            return belt.shows(np.full(len(theta), azimuth), np.arange(len(theta)))

        cuts |= set(_sign_changes(seen, low, high))
    # Tanh-sinh nodes gather at the ends, where rows change with the square root of colatitude.
    step = 7.0 / rows
    s = step * (np.arange(rows) - 0.5 * (rows - 1))
    t, outer = expit(math.pi * np.sinh(s)), expit(-math.pi * np.sinh(s))
    weight = step * math.pi * np.cosh(s) * t * outer
    edges = sorted(cuts)
    nodes, weights = [], []
    for a, b in itertools.pairwise(edges):
        if b - a > 1e-12:
            nodes.append(np.where(t < 0.5, a + (b - a) * t, b - (b - a) * outer))
            weights.append((b - a) * weight)
    theta, weight = np.concatenate(nodes), np.concatenate(weights)
    keep = (weight > 1e-18 * (high - low)) & (theta > low) & (theta < high)
    return theta[keep], weight[keep]


def _sign_changes(function: Callable[[Floats], Floats], low: float, high: float) -> list[float]:
    """Return the roots of a function that a fine grid separates."""
    grid = np.linspace(low, high, 257)
    positive = function(grid) > 0.0
    at = np.flatnonzero(positive[1:] != positive[:-1])
    left, right, rising = grid[at], grid[at + 1], positive[at + 1]
    for _ in range(50 if len(at) else 0):
        middle = 0.5 * (left + right)
        beyond = (function(middle) > 0.0) == rising
        left, right = np.where(beyond, left, middle), np.where(beyond, middle, right)
    return [float(root) for root in 0.5 * (left + right)]


def element_photon_flux(
    star: Star,
    spots: Sequence[HotSpot],
    emission: Emission,
    distance_pc: float,
    energies_kev: Floats | Sequence[float],
    phase_bins: int = 32,
    *,
    radial: int = 24,
    azimuthal: int = 64,
    nodes: int = 5,
    mistake: Mistake = "none",
) -> Floats:
    """Return what `direct_photon_flux` does, circle by circle about the centre of each spot."""
    energies = np.asarray(energies_kev, dtype=float)
    x, weight = np.polynomial.legendre.leggauss(radial)
    # Elements at +chi and -chi share their colatitude, and with it their rays.
    chi = math.pi * (np.arange(azimuthal // 2) + 0.5) / (azimuthal // 2)
    total = np.zeros((phase_bins, len(energies)))
    for spot in spots:
        rho = 0.5 * spot.angular_radius * (x + 1.0)
        solid = 0.5 * spot.angular_radius * weight * np.sin(rho) * _TURN / azimuthal
        sine, cosine = math.sin(spot.colatitude), math.cos(spot.colatitude)
        for radius, element in zip(rho, solid, strict=True):
            along, across = math.sin(radius) * np.cos(chi), math.sin(radius) * np.sin(chi)
            equatorial = cosine * along + sine * math.cos(radius)
            polar = cosine * math.cos(radius) - sine * along
            beside = np.arctan2(across, equatorial)
            belt = Belt(star, np.arctan2(np.hypot(equatorial, across), polar), mistake)
            for longitude in (spot.longitude + beside, spot.longitude - beside):
                total += element * _elements_flux(
                    belt, longitude, spot.temperature_kev, emission, energies, phase_bins, nodes
                )
    return total / (distance_pc * PARSEC_CM) ** 2


def _elements_flux(
    belt: Belt,
    longitude: Floats,
    temperature_kev: float,
    emission: Emission,
    energies: Floats,
    phase_bins: int,
    nodes: int,
) -> Floats:
    """Average over phase bins the flux, per unit solid angle, of one element in every row."""
    row, which = (part.ravel() for part in np.indices((len(longitude), phase_bins)))
    first, last = belt.arc[0][row], belt.arc[1][row]
    # In turns; an element at longitude L has azimuth L + 2 pi (emission phase).
    begin = which / phase_bins + longitude[row] / _TURN
    begin = begin - np.floor(begin - first)
    end = begin + 1.0 / phase_bins
    # What of the bin lies in the visible arc, and in the visible arc of the next turn.
    start = np.concatenate([begin, first])
    stop = np.concatenate([np.minimum(end, last), np.minimum(end - 1.0, last)])
    row, which = np.tile(row, 2), np.tile(which, 2)
    shows = stop > start
    start, stop, row, which = start[shows], stop[shows], row[shows], which[shows]
    x, weight = np.polynomial.legendre.leggauss(nodes)
    total = np.zeros((phase_bins, len(energies)))
    for node, share in zip(0.5 * (x + 1.0), 0.5 * weight, strict=True):
        azimuth = belt.emission_azimuth(start + node * (stop - start), row)
        flux = belt.photons(azimuth, row, temperature_kev, emission, energies)
        np.add.at(total, which, flux * (share * (stop - start) * phase_bins)[:, None])
    return total
