r"""Harmonics of a spot's pulse, with geometry and spectrum kept apart.

A ring at colatitude theta has a kernel K(phi) common to all its points. Its harmonics are taken
straight from Gauss-Legendre nodes on the visible arc,

.. math:: K_m = \frac{1}{2\pi}\int K e^{-i m \varphi(\phi)} (d\varphi/d\phi)\, d\phi,

with varphi = phi + 2 pi f_spin dt the azimuth at which the ray counts at the observer; the
azimuthal extent of the spot on the ring enters as an exact factor. The dependence on the redshift
factor e = 1/(delta sqrt(1-u)) is expanded in Chebyshev polynomials, so that

    photon flux harmonic (m, E) = E² 2/(h³c²)/D² * sum_j moments[m, j] * basis_j(E)

where basis_j are the Chebyshev coefficients in e of the spectrum (`exptime.star.spectrum`).

References
----------
Poutanen & Gierlinski 2003, MNRAS 343, 1301; Poutanen & Beloborodov 2006, MNRAS 373, 836;
Morsink et al. 2007, ApJ 663, 1244; Bogdanov et al. 2019, ApJL 887, L26 (gamma in the area).
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache

import numpy as np

from exptime.arrays import Complexes, Floats
from exptime.constants import SPEED_OF_LIGHT_KM_S
from exptime.star.circle import RingStack, stack
from exptime.star.emission import angular_factor
from exptime.star.ray_table import Bent
from exptime.star.records import Emission, HotSpot, Star
from exptime.star.resolution import Resolution
from exptime.star.surface import Rings, horizon_azimuth, rings_at
from exptime.star.view import View

Interval = tuple[float, float]

_LARGEST = 100_000
"""Waves kept at once: beyond the processor's cache more at a time is slower."""


@dataclass(frozen=True, slots=True)
class Moments:
    """Geometry of a spot's pulse.

    Parameters
    ----------
    values : ndarray, shape (harmonics + 1, redshift_terms)
        km².
    redshift_range : tuple of float
        Interval of e on which the Chebyshev polynomials stand.
    is_hidden : bool
        True when no part of the spot ever shows.
    """

    values: Complexes
    redshift_range: Interval
    is_hidden: bool


@dataclass(frozen=True, slots=True)
class RingKernels:
    """Kernels of rings on their visible arcs, arrays of shape (n_ring, n_node).

    Parameters
    ----------
    photons : ndarray
        Kernel per rad of colatitude and longitude, times node weight and dvarphi/dphi/(2 pi),
        km².
    azimuth : ndarray
        Observed azimuth varphi, rad.
    redshift : ndarray
        e = 1/(delta sqrt(1-u)).
    """

    photons: Floats
    azimuth: Floats
    redshift: Floats


@cache
def _legendre(count: int) -> tuple[Floats, Floats]:
    return np.polynomial.legendre.leggauss(count)


def ring_kernels(
    view: View, emission: Emission, colatitude: Floats, resolution: Resolution
) -> RingKernels | None:
    """Evaluate the kernels of rings.

    Parameters
    ----------
    view : View
        The star as seen.
    emission : Emission
        How its surface radiates.
    colatitude : ndarray, shape (n_ring,)
        rad.
    resolution : Resolution
        Counts to compute with; decides the nodes on the visible arcs.

    Returns
    -------
    RingKernels or None
        None when no ring is ever visible.
    """
    star = view.star
    rings = rings_at(star, view.table, colatitude)
    reach = horizon_azimuth(rings)
    if not np.any(reach > 0.0):
        return None
    # Rays depend on |phi| alone: trace them on the positive half and mirror.
    nodes = resolution.nodes(float(reach.max()))
    x, weight = _legendre(nodes)
    half = nodes // 2
    phi = reach[:, None] * x[half:]
    bent = rings.rays.bend(rings.along[:, None] + rings.across[:, None] * np.cos(phi))
    sine, cosine = np.sin(phi), np.cos(phi)
    lag, lag_slope = _lag(star, rings, bent, sine)
    area = _static_area(rings, bent)
    sigma = _cos_sigma(rings, bent, cosine)
    beta = _speed(star, rings)
    gamma = 1.0 / np.sqrt(1.0 - beta**2)
    swing = beta[:, None] * bent.sine_ratio * math.sqrt(1.0 - star.cos_inclination**2) * sine

    def side(sign: float) -> tuple[Floats, Floats, Floats]:
        boost = 1.0 / (gamma[:, None] * (1.0 + sign * swing))
        mu = np.maximum(boost * sigma, 0.0)
        photons = (gamma[:, None] * area * mu) * angular_factor(emission, mu)
        photons *= (1.0 + sign * lag_slope) * (reach[:, None] * weight[half:] / (2.0 * np.pi))
        return photons, sign * phi + lag, 1.0 / (boost * np.sqrt(1.0 - rings.u)[:, None])

    sides = [side(-1.0), side(1.0)]
    return RingKernels(*(np.concatenate(parts, axis=1) for parts in zip(*sides, strict=True)))


def spot_moments(
    view: View,
    emission: Emission,
    spot: HotSpot,
    resolution: Resolution,
    redshift_range: Interval | None = None,
) -> Moments:
    """Compute the moments of a spot, as if it were centred on longitude zero.

    Parameters
    ----------
    view : View
        The star as seen.
    emission : Emission
        How its surface radiates.
    spot : HotSpot
        The spot; its longitude and temperature play no part.
    resolution : Resolution
        Counts to compute with.
    redshift_range : tuple of float, optional
        Interval of e to expand on; that of the spot itself when not given.
    """
    return joint_moments(view, emission, (spot,), resolution, redshift_range)[0]


def joint_moments(
    view: View,
    emission: Emission,
    spots: Sequence[HotSpot],
    resolution: Resolution,
    redshift_range: Interval | None = None,
) -> list[Moments]:
    """Compute the moments of several spots at one resolution, on one redshift interval.

    Parameters
    ----------
    view, emission, resolution, redshift_range
        As for `spot_moments`; the interval is that of all spots when not given.
    spots : sequence of HotSpot
        The spots, each taken as if it were centred on longitude zero.
    """
    stacks = [
        stack(spot.colatitude, spot.angular_radius, view.transitions, resolution.rings)
        for spot in spots
    ]
    colatitude = np.concatenate([rings.colatitude for rings in stacks])
    kernels = ring_kernels(view, emission, colatitude, resolution)
    harmonics, terms = resolution.harmonics, resolution.redshift_terms
    if kernels is None:
        empty = np.zeros((harmonics + 1, terms), complex)
        return [Moments(empty, redshift_range or (0.5, 2.0), True) for _ in spots]
    low, high = redshift_range or widened(
        (float(kernels.redshift.min()), float(kernels.redshift.max())), 1e-3
    )
    variable = (2.0 * kernels.redshift - (high + low)) / (high - low)
    basis = _chebyshev(variable, terms) * kernels.photons[..., None]
    values = _sum_of_rings(kernels.azimuth, basis, stacks, harmonics)
    return [Moments(value, (low, high), not np.any(value)) for value in values]


def _sum_of_rings(
    azimuth: Floats, basis: Floats, stacks: Sequence[RingStack], harmonics: int
) -> Complexes:
    """Return moments of spots whose rings follow each other, (n_spot, harmonics + 1, terms)."""
    factor = np.concatenate([_extent(rings, harmonics) for rings in stacks])
    ends = np.cumsum([len(rings.colatitude) for rings in stacks])
    values = np.zeros((len(stacks), harmonics + 1, basis.shape[2]), complex)
    chunk = max(1, _LARGEST // ((harmonics + 1) * azimuth.shape[1]))
    for first in range(0, len(azimuth), chunk):
        rows = slice(first, first + chunk)
        cosine, sine = _waves(azimuth[rows], harmonics)
        real, imaginary = cosine @ basis[rows], sine @ basis[rows]
        for value, end, rings in zip(values, ends, stacks, strict=True):
            start, stop = max(end - len(rings.colatitude), first), min(end, first + chunk)
            if start < stop:
                weight, own = factor[start:stop], slice(start - first, stop - first)
                value += np.einsum("rm,rmj->mj", weight, real[own])
                value -= 1j * np.einsum("rm,rmj->mj", weight, imaginary[own])
    return values


def _extent(rings: RingStack, harmonics: int) -> Floats:
    """Extent of each ring within the spot, 2 d sinc(m d), times its weight in colatitude."""
    width = rings.half_width[:, None]
    order = np.arange(harmonics + 1)
    return np.asarray(2.0 * width * np.sinc(order * width / np.pi) * rings.weight[:, None])


def widened(interval: Interval, share: float) -> Interval:
    """Return an interval wider than the one given by a share of its ends, never empty."""
    return interval[0] * (1.0 - share), interval[1] * (1.0 + share)


def _lag(star: Star, rings: Rings, bent: Bent, sine: Floats) -> tuple[Floats, Floats]:
    """Return 2 pi f dt, rad, and its derivative with respect to phi for phi > 0."""
    turn = 2.0 * np.pi * star.spin_hz / SPEED_OF_LIGHT_KM_S
    radius, horizon = rings.radius_km, star.schwarzschild_radius_km
    sunk = star.radius_km - radius
    radial = sunk + horizon * np.log1p(sunk / (radius - horizon))
    lag = turn * (radius[:, None] * bent.delay + radial[:, None])
    # c dt = b dpsi along a fixed radius, with b = R sin(alpha)/sqrt(1-u), and
    # sin(psi) dpsi = sin i sin theta sin(phi) dphi.
    impact = radius / np.sqrt(1.0 - rings.u)
    slope = turn * (impact * rings.across)[:, None] * bent.sine_ratio * sine
    return lag, slope


def _static_area(rings: Rings, bent: Bent) -> Floats:
    """Return lensing * r² sin(theta) sqrt(1 + f²)/(1 - u), km²."""
    ring = rings.radius_km**2 * np.sin(rings.colatitude) * np.hypot(1.0, rings.tangent)
    return np.asarray((ring / (1.0 - rings.u))[:, None] * bent.lensing)


def _cos_sigma(rings: Rings, bent: Bent, cosine: Floats) -> Floats:
    lean = rings.lean[:, None] - rings.sway[:, None] * cosine
    tangent = rings.tangent[:, None]
    return np.asarray((bent.cos_alpha + bent.sine_ratio * lean * tangent) / np.hypot(1.0, tangent))


def _speed(star: Star, rings: Rings) -> Floats:
    """Return the speed of the surface over that of light, for a static observer there."""
    turn = 2.0 * np.pi * star.spin_hz / SPEED_OF_LIGHT_KM_S
    return np.asarray(turn * rings.radius_km * np.sin(rings.colatitude) / np.sqrt(1.0 - rings.u))


def _chebyshev(t: Floats, terms: int) -> Floats:
    """Return T_0..T_(terms-1) of t on a new last axis."""
    basis = np.empty((*t.shape, terms))
    basis[..., 0] = 1.0
    if terms > 1:
        basis[..., 1] = t
    for k in range(2, terms):
        basis[..., k] = 2.0 * t * basis[..., k - 1] - basis[..., k - 2]
    return basis


def _waves(angle: Floats, highest: int) -> tuple[Floats, Floats]:
    """Return cos(m angle) and sin(m angle), m = 0..highest on a new axis before the last.

    By doubling: the sums of angles fill as many orders again as there are.
    """
    shape = (angle.shape[0], highest + 1, angle.shape[1])
    cosine, sine = np.empty(shape), np.empty(shape)
    cosine[:, 0], sine[:, 0] = 1.0, 0.0
    have = 1
    while have <= highest:
        take = min(have, highest + 1 - have)
        step_cosine, step_sine = np.cos(have * angle)[:, None], np.sin(have * angle)[:, None]
        old_cosine, old_sine = cosine[:, :take], sine[:, :take]
        new = slice(have, have + take)
        np.multiply(old_cosine, step_cosine, out=cosine[:, new])
        cosine[:, new] -= old_sine * step_sine
        np.multiply(old_sine, step_cosine, out=sine[:, new])
        sine[:, new] += old_cosine * step_sine
        have *= 2
    return cosine, sine
