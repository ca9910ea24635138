"""Search for geometries that reproduce flux and pulse, by draws that learn where to look.

Points are drawn in rounds from the unit cube: first where a rough pulse in closed form fits, then
about the best points so far, always with a share of uniform ones. Each candidate weighs as its
likelihood over the mixture of all rounds' densities, so that the weighted set stands for the
prior times the likelihood whatever the proposals were.

References
----------
Cappé et al. 2004, J. Comput. Graph. Stat. 13, 907 (population Monte Carlo); Veach & Guibas 1995
(mixture of densities in the denominator); Neal 2001, Stat. Comput. 11, 125 (tempering).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import partial

import numpy as np

from exptime.arrays import Floats
from exptime.errors import Fault, UnreachableError
from exptime.geometry.candidates import Candidate, Search, evaluate
from exptime.geometry.proposal import Kernels, around
from exptime.geometry.resampling import effective_number, thin
from exptime.geometry.surrogate import Surrogate, surrogate_of
from exptime.parallel import Workers
from exptime.progress import Progress, silent

_FIRST_ROUND = 384
_ROUND = 256
_MOST_ROUNDS = 24
_PATIENCE = 5
"""Rounds after which a measurement far beyond all candidates is given up."""

_ENOUGH = 1.0
_KERNELS_WANTED = 40.0
_UNIFORM_SHARE = 0.2
_SOFTEST = 1e-6
_FAR_SIGMA = 4.0


Proposal = Kernels | Surrogate


@dataclass(frozen=True, slots=True, kw_only=True)
class Geometries:
    """Geometries chosen for the forecast.

    Parameters
    ----------
    candidates : tuple of Candidate
        In draw order.
    weights : ndarray, shape (n,)
        Summing to one.
    tried : int
        Points drawn in all.
    accepted : int
        Those that reproduced the flux.
    """

    candidates: tuple[Candidate, ...]
    weights: Floats
    tried: int
    accepted: int


def find_geometries(
    search: Search,
    count: int,
    random: np.random.Generator,
    team: Workers,
    progress: Progress = silent,
) -> Geometries:
    """Find weighted geometries.

    Parameters
    ----------
    search : Search
        What is sought.
    count : int
        Number of geometries wanted.
    random : numpy.random.Generator
        Source of every random number.
    team : Workers
        Processes that evaluate the candidates.
    progress : Progress
        Told how far the effective number has come.

    Raises
    ------
    UnreachableError
        When no geometry gives the flux, or none comes within four standard deviations of a
        pulsed fraction.
    """
    drawn_from = _Mixture(np.empty((0, len(search.axes))))
    found: list[Candidate | None] = []
    wanted = _ENOUGH * count
    weights = np.empty(0)
    while len(drawn_from.proposals) < _MOST_ROUNDS:
        proposal = _next_proposal(search, found, drawn_from, random)
        drawn = proposal.draw(_ROUND if found else _FIRST_ROUND, random)
        found += team.map(partial(evaluate, search), list(drawn), chunk=16)
        drawn_from.add(proposal, drawn)
        weights = _weights(found, drawn_from.density, temper=1.0)
        reached = effective_number(weights)
        progress(min(int(reached), int(wanted)), int(wanted))
        if reached >= wanted:
            break
        if len(drawn_from.proposals) == _PATIENCE:
            _refuse_unreachable(search, found)
    _refuse_unreachable(search, found)
    indices, share = thin(weights, count, random)
    chosen = [found[index] for index in indices]
    return Geometries(
        candidates=tuple(candidate for candidate in chosen if candidate is not None),
        weights=share,
        tried=len(found),
        accepted=sum(candidate is not None for candidate in found),
    )


class _Mixture:
    """Points drawn so far with the mixture of all proposals, each by its number of points."""

    def __init__(self, no_points: Floats) -> None:
        self.points = no_points
        self.proposals: list[tuple[int, Proposal]] = []
        self._mass = np.empty(0)

    def add(self, proposal: Proposal, drawn: Floats) -> None:
        """Add a round; densities known before are not computed again."""
        self.proposals.append((len(drawn), proposal))
        if isinstance(proposal, Kernels):
            density = proposal.density_at_sources(self.points)
        else:
            density = proposal.density(self.points)
        older = self._mass + len(drawn) * density
        newer = sum(size * each.density(drawn) for size, each in self.proposals)
        self._mass = np.concatenate([older, newer])
        self.points = np.concatenate([self.points, drawn])

    @property
    def density(self) -> Floats:
        """Density of the mixture at each point, shape (n,)."""
        return self._mass / max(len(self.points), 1)


def _next_proposal(
    search: Search,
    found: Sequence[Candidate | None],
    drawn_from: _Mixture,
    random: np.random.Generator,
) -> Proposal:
    """Place kernels by the likelihood, softened until enough points carry weight."""
    if not any(candidate is not None for candidate in found):
        return surrogate_of(search, random, _UNIFORM_SHARE)
    temper, density = 1.0, drawn_from.density
    while (
        temper > _SOFTEST
        and effective_number(weights := _weights(found, density, temper)) < _KERNELS_WANTED
    ):
        temper *= 0.7
    return around(drawn_from.points, weights, search.is_periodic, _UNIFORM_SHARE)


def _weights(found: Sequence[Candidate | None], density: Floats, temper: float) -> Floats:
    """Return likelihood**temper over the density that the points were drawn from."""
    likelihood = np.array(
        [-np.inf if candidate is None else candidate.log_likelihood for candidate in found]
    )
    best = likelihood.max(initial=-np.inf)
    if not np.isfinite(best):
        return np.zeros(len(found))
    with np.errstate(invalid="ignore"):
        relative = np.where(np.isfinite(likelihood), temper * (likelihood - best), -np.inf)
    return np.asarray(np.exp(relative) / density)


def _refuse_unreachable(search: Search, found: Sequence[Candidate | None]) -> None:
    reached = [candidate.fractions for candidate in found if candidate is not None]
    if not reached:
        raise UnreachableError(
            Fault(
                f"No geometry of two spots among {len(found)} gives the flux of "
                f"{search.target.name}.",
                where=search.target.file,
                remedy="A higher temperature, a smaller distance or a smaller flux would do.",
            )
        )
    table = np.array(reached)
    faults = []
    for column, measured in enumerate(search.target.pulsed_fractions):
        low, high = float(table[:, column].min()), float(table[:, column].max())
        slack = _FAR_SIGMA * measured.uncertainty
        if not low - slack <= measured.value <= high + slack:
            band = f"{measured.band_kev[0]:g}-{measured.band_kev[1]:g} keV"
            faults.append(
                Fault(
                    f"A pulsed fraction of {measured.value:g} ({measured.definition}, {band}) "
                    f"cannot be reached: {len(reached)} geometries that give the flux span "
                    f"{low:.3f} to {high:.3f}.",
                    where=search.target.file,
                    remedy="Check the definition and whether background was subtracted, or "
                    "change inclination, temperature or distance.",
                )
            )
    if faults:
        raise UnreachableError(faults)
