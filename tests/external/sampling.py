"""Posteriors of whole targets by an ensemble sampler, on the likelihood of the forecast.

The data are the expected counts, so that the posterior shows by its own shape what a Fisher bound
leaves out. Background levels are integrated over in closed form (Laplace): they appear in one
channel each, where their likelihood is nearly Gaussian. Hard limits hold as in nature: angles in
range, column not negative.

Straight coordinates: for one spot cos(i - theta) = cos i cos theta + sin i sin theta and
cos(i + theta) = cos i cos theta - sin i sin theta decide the pulse, but for weak Doppler terms.
The sampler moves in i + theta and i - theta, in which the exchange of the two angles is a change
of sign, and knows that exchange as a move of its own. Half of the moves are independent draws
about the track that the profile likelihood took, by a density that is known, so that the thin and
curved ridge is met as a whole. The measure of the priors is that of the forecast: flat in cos i.
"""

from __future__ import annotations

import math
import os
import time
from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import partial

import emcee
import numpy as np
from emcee.moves import DEMove, DESnookerMove, MHMove, Move

from exptime.arrays import Floats
from exptime.information.model import Bounds, Model, Penalty
from exptime.instrument.reader import read_instrument
from exptime.instrument.records import BackgroundKnowledge, Instrument
from exptime.parallel import workers
from exptime.star.resolution import Resolution
from exptime.study.case import Question, answer
from exptime.study.geometries import known_geometry
from exptime.study.profile import Profile, Setting, profile_of, ridge_direction
from exptime.study.setting import hard_limits, setting_of
from exptime.target.reader import read_target_text
from tests.makers.scenes import toy_edges, toy_response

KNOWN = BackgroundKnowledge(kind="known")
WALKERS = 32
ENSEMBLES = 4
_FLOOR = 1e-12


@dataclass(frozen=True, slots=True, kw_only=True)
class Case:
    """A target to be sampled.

    Parameters
    ----------
    text : str
        Its file, with hot spots.
    counts : float
        Expected counts of the source.
    background_share : float
        Background counts for each of the source's.
    knowledge : BackgroundKnowledge
        What is known of the background.
    area_uncertainty : float
        Of the grey area; zero holds it.
    """

    text: str
    counts: float
    background_share: float = 0.1
    knowledge: BackgroundKnowledge = KNOWN
    area_uncertainty: float = 0.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Posterior:
    """What a sampler found for the radius, beside profile and bound.

    Parameters
    ----------
    bound, profile, bounded_profile : float
        Standard deviation by the information matrix; half-widths of the 68 per cent intervals of
        the profile likelihood without and with hard limits, km.
    sigma, half_width, shift : float
        Standard deviation, half of the distance between the 16 and 84 per cent points, and mean
        minus truth of the sampled radius, km.
    half_width_95, profile_95 : float
        The same at 95 per cent, and of the profile.
    ensemble_scatter : float
        Standard deviation of the sigmas of the single ensembles over their mean.
    lopsided, profile_lopsided : float
        Upper over lower half of the 68 per cent interval, about the median of the posterior and
        about the truth for the profile.
    correlation_steps, steps : float
        Integrated autocorrelation time of the radius, and kept steps of each walker.
    r_hat : float
        Split R-hat of the ensembles, the largest over all coordinates.
    exchanged : float
        Share of samples in the branch where inclination and colatitude have changed places.
    sampler_s, forecast_s : float
        CPU seconds of all ensembles, and of the bound.
    error : float
        Monte-Carlo error of sigma, relative.
    evaluations : int
        Of the likelihood.
    """

    bound: float
    profile: float
    bounded_profile: float
    sigma: float
    half_width: float
    shift: float
    half_width_95: float
    profile_95: float
    ensemble_scatter: float
    lopsided: float
    profile_lopsided: float
    correlation_steps: float
    steps: int
    r_hat: float
    exchanged: float
    sampler_s: float
    forecast_s: float
    error: float
    evaluations: int


def coarse_instrument(case: Case, source_share: Floats | None = None) -> Instrument:
    """Return an invented instrument of nine channels and sixteen phase bins."""
    edges = toy_edges(0.3)
    count = len(edges) - 1
    share = np.full(count, 1.0 / count) if source_share is None else source_share
    return replace(
        read_instrument("soft-concentrator"),
        channel_edges_kev=edges,
        background_per_s=case.background_share * share,
        background_knowledge=case.knowledge,
        area_uncertainty=case.area_uncertainty,
        phase_bins=16,
    )


def setting_for(case: Case) -> tuple[Setting, float, Floats, float]:
    """Return the likelihood at a modest resolution, the bound, the ridge, and its CPU seconds."""
    target = read_target_text(case.text, "invented.yaml")
    response = toy_response(toy_edges(0.3), nodes=4)
    question = Question(
        target=target,
        instrument=coarse_instrument(case),
        response=response,
        exposures_s=np.array([1.0]),
        goals=(),
    )
    geometry = known_geometry(target)
    trial, _, _ = setting_of(question, geometry, 1.0)
    source = trial.model.source(trial.truth)
    assert source is not None
    rate = float(source.mean(axis=0).sum())
    # Background with the spectrum of the source.
    spectrum = source.mean(axis=0)
    question = replace(question, instrument=coarse_instrument(case, spectrum))
    exposure = case.counts / rate
    question = replace(question, exposures_s=np.array([exposure]))
    setting, experiment, covariance = setting_of(question, geometry, exposure)
    direction = ridge_direction(experiment, covariance, "radius")
    rough = (Resolution(harmonics=48, rings=6, redshift_terms=10),) * len(geometry[1])
    began = time.process_time()
    bound = float(answer(question, geometry, rough).data_sigma[0, 1])
    spent = time.process_time() - began
    model = replace(setting.model, resolutions=rough)
    return replace(setting, model=model), bound, direction, spent


class Density:
    """Logarithm of the posterior in straight coordinates; sent to every process.

    Parameters
    ----------
    setting : Setting
        Likelihood and priors.
    """

    def __init__(self, setting: Setting) -> None:
        model = setting.model
        self.model: Model = model
        self.truth = setting.truth
        self.penalty: Penalty = setting.penalty
        self.limits: Bounds = hard_limits(model.names)
        self.free = np.flatnonzero(setting.is_free)
        self.counts = setting.expected_counts
        self.inclination = model.names.index("cos_inclination")
        self.colatitudes = [
            index for index, name in enumerate(model.names) if name.endswith("colatitude")
        ]
        self.is_single = len(self.colatitudes) == 1
        self.radius_column = self._column(model.names.index("radius"))
        self.gap_column = self._column(self.colatitudes[0])
        self.best = 0.0
        self.best = self(self.straight(self.truth))

    def _column(self, index: int) -> int:
        return int(np.flatnonzero(self.free == index)[0])

    def straight(self, vector: Floats) -> Floats:
        """Return the coordinates of a vector, shape (n_free,)."""
        moved = vector.copy()
        moved[self.inclination] = math.acos(vector[self.inclination])
        if self.is_single:
            one, two = moved[self.inclination], moved[self.colatitudes[0]]
            moved[self.inclination], moved[self.colatitudes[0]] = one + two, one - two
        return np.asarray(moved[self.free])

    def vector(self, point: Floats) -> tuple[Floats, float]:
        """Return the vector of coordinates and the inclination."""
        moved = self.truth.copy()
        moved[self.inclination] = math.acos(self.truth[self.inclination])
        if self.is_single:
            one, two = moved[self.inclination], moved[self.colatitudes[0]]
            moved[self.inclination], moved[self.colatitudes[0]] = one + two, one - two
        moved[self.free] = point
        if self.is_single:
            total, gap = moved[self.inclination], moved[self.colatitudes[0]]
            moved[self.inclination], moved[self.colatitudes[0]] = (
                0.5 * (total + gap),
                0.5 * (total - gap),
            )
        inclination = float(moved[self.inclination])
        moved[self.inclination] = math.cos(inclination)
        return moved, inclination

    def jacobian(self, vector: Floats) -> Floats:
        """Return the derivatives of a vector by its coordinates, (n, n)."""
        matrix = np.eye(len(vector))
        sine = math.sqrt(1.0 - vector[self.inclination] ** 2)
        if not self.is_single:
            matrix[self.inclination, self.inclination] = -sine
            return matrix
        one, two = self.inclination, self.colatitudes[0]
        matrix[one, [one, two]] = -0.5 * sine
        matrix[two, [one, two]] = 0.5, -0.5
        return matrix

    def __call__(self, point: Floats) -> float:
        """Return the logarithm of the posterior density over that at the truth."""
        vector, inclination = self.vector(point)
        inside = np.all((vector >= self.limits.lower) & (vector <= self.limits.upper))
        if not inside or not 0.0 < inclination <= 0.5 * math.pi:
            return -math.inf
        source = self.model.source(vector)
        if source is None:
            return -math.inf
        value = self._likelihood(source) - 0.5 * self.penalty.value(vector)
        return value + math.log(math.sin(inclination)) - self.best

    def _likelihood(self, source: Floats) -> float:
        """Logarithm of the Poisson likelihood with the levels integrated over."""
        model, counts = self.model, self.counts
        share = model.exposure_s / model.phase_bins
        shapes, prior = share * model.levels.shape_per_s, model.levels.prior_information
        levels = np.zeros(len(prior))
        fixed = share * (source + model.background_per_s)
        curvature = np.ones(len(prior))
        for _ in range(4 if len(prior) else 0):
            expected = np.maximum(fixed + levels @ shapes, _FLOOR)
            gradient = shapes @ np.sum(counts / expected - 1.0, axis=0) - prior * levels
            curvature = shapes**2 @ np.sum(counts / expected**2, axis=0) + prior
            levels = levels + gradient / curvature
        expected = np.maximum(fixed + levels @ shapes, _FLOOR)
        value = float(np.sum(counts * np.log(expected) - expected))
        return value - 0.5 * float(prior @ levels**2) - 0.5 * float(np.sum(np.log(curvature)))

    def exchanged(self, point: Floats) -> Floats:
        """Return coordinates with inclination and colatitude in each other's place."""
        moved = point.copy()
        moved[..., self.gap_column] *= -1.0
        return moved


class Exchange(MHMove):
    """Inclination and colatitude change places, everything else shaken a little.

    Parameters
    ----------
    density : Density
        Knows the coordinates.
    scale : ndarray, shape (n,)
        Standard deviations of the shake.
    """

    def __init__(self, density: Density, scale: Floats) -> None:
        def proposed(coordinates: Floats, random: np.random.RandomState) -> tuple[Floats, Floats]:
            shake = scale * random.standard_normal(coordinates.shape)
            return density.exchanged(coordinates) + shake, np.zeros(len(coordinates))

        super().__init__(proposed)


@dataclass(frozen=True, slots=True, kw_only=True)
class Ridge:
    """Where the profile likelihood went, and how wide the posterior is across it.

    Parameters
    ----------
    radius_km : ndarray, shape (k,)
        Ascending.
    points : ndarray, shape (k, n - 1)
        Straight coordinates without the radius.
    roots : ndarray, shape (k, n - 1, n - 1)
        Lower triangular roots of the covariance at fixed radius.
    height : ndarray, shape (k,)
        Density of the radius by Laplace's method, softened.
    """

    radius_km: Floats
    points: Floats
    roots: Floats
    height: Floats


def ridge_of(density: Density, profile: Profile) -> Ridge:
    """Follow a profile of the radius."""
    column = density.radius_column
    radii, points, roots, logarithms = [], [], [], []
    for stop in profile.points:
        matrix = information_at(density, stop.vector)
        rest = np.delete(np.delete(matrix, column, axis=0), column, axis=1)
        scale = 1.0 / np.sqrt(np.diagonal(rest))
        inverse = np.linalg.inv(rest * np.outer(scale, scale)) * np.outer(scale, scale)
        point = density.straight(stop.vector)
        root = np.linalg.cholesky(inverse)
        radii.append(stop.value)
        points.append(np.delete(point, column))
        roots.append(root)
        logarithms.append(density(point) + float(np.sum(np.log(np.diagonal(root)))))
    height = np.exp(0.7 * (np.array(logarithms) - max(logarithms))) + 0.03
    return Ridge(
        radius_km=np.array(radii),
        points=np.array(points),
        roots=np.array(roots),
        height=height,
    )


class AlongRidge(MHMove):
    """Independent draws about the ridge, in both branches of a single spot.

    The radius is drawn from a density given at the ridge's stops, the rest from Student's t about
    the ridge at that radius. The proposal's density is known, so that the chain is exact; other
    moves reach what lies far from the ridge.

    Parameters
    ----------
    density : Density
        Knows the coordinates.
    ridge : Ridge
        Where to draw.
    """

    freedom = 6.0

    def __init__(self, density: Density, ridge: Ridge) -> None:
        self.density, self.ridge = density, ridge
        step = float(np.diff(ridge.radius_km).max())
        self.grid = np.linspace(ridge.radius_km[0] - step, ridge.radius_km[-1] + step, 401)
        middle = 0.5 * (self.grid[1:] + self.grid[:-1])
        self.share = np.interp(middle, ridge.radius_km, ridge.height)
        self.share /= self.share.sum()
        super().__init__(self.proposed)

    def proposed(self, coordinates: Floats, random: np.random.RandomState) -> tuple[Floats, Floats]:
        """Return new points, and the logarithm of old over new density of the proposal."""
        drawn = self.draw(len(coordinates), random)
        return drawn, self.logarithm(coordinates) - self.logarithm(drawn)

    def draw(self, count: int, random: np.random.RandomState) -> Floats:
        """Draw points, shape (count, n)."""
        cell = random.choice(len(self.share), size=count, p=self.share)
        radius = self.grid[cell] + (self.grid[1] - self.grid[0]) * random.random_sample(count)
        size = self.ridge.points.shape[1]
        stretch = np.sqrt(self.freedom / random.chisquare(self.freedom, count))
        middle, root = self._at(radius)
        normal = 1.1 * stretch[:, None] * random.standard_normal((count, size))
        rest = middle + np.einsum("pij,pj->pi", root, normal)
        points = np.insert(rest, self.density.radius_column, radius, axis=1)
        if self.density.is_single:
            turned = random.random_sample(count) < 0.5
            points[turned] = self.density.exchanged(points[turned])
        return np.asarray(points)

    def logarithm(self, points: Floats) -> Floats:
        """Return the logarithm of the density of the draws, up to a constant."""
        if not self.density.is_single:
            return self._branch(points)
        return np.logaddexp(self._branch(points), self._branch(self.density.exchanged(points)))

    def _branch(self, points: Floats) -> Floats:
        radius = points[:, self.density.radius_column]
        rest = np.delete(points, self.density.radius_column, axis=1)
        middle, root = self._at(radius)
        offset = np.linalg.solve(root, (rest - middle)[:, :, None])[:, :, 0] / 1.1
        size = rest.shape[1]
        value = -0.5 * (self.freedom + size) * np.log1p(np.sum(offset**2, axis=1) / self.freedom)
        value -= np.log(np.diagonal(root, axis1=1, axis2=2)).sum(axis=1)
        cell = np.floor((radius - self.grid[0]) / (self.grid[1] - self.grid[0])).astype(int)
        inside = (cell >= 0) & (cell < len(self.share))
        share = self.share[np.clip(cell, 0, len(self.share) - 1)]
        return np.where(inside, value + np.log(share), -np.inf)

    def _at(self, radius: Floats) -> tuple[Floats, Floats]:
        """Middle and root at radii, between the stops on straight lines."""
        stops = self.ridge.radius_km
        index = np.clip(np.searchsorted(stops, radius) - 1, 0, len(stops) - 2)
        share = np.clip((radius - stops[index]) / (stops[index + 1] - stops[index]), 0.0, 1.0)
        points, roots = self.ridge.points, self.ridge.roots
        middle = points[index] + share[:, None] * (points[index + 1] - points[index])
        root = roots[index] + share[:, None, None] * (roots[index + 1] - roots[index])
        return middle, root


def run_ensemble(
    density: Density, ridge: Ridge, burn: int, steps: int, seed: int
) -> tuple[Floats, float]:
    """Run one ensemble; return its kept chain, (steps, walkers, n), and CPU seconds."""
    began = time.process_time()
    along = AlongRidge(density, ridge)
    random = np.random.RandomState(seed)
    start = _starts(density, along, random)
    moves: list[tuple[Move, float]] = [
        (along, 0.5),
        (DEMove(), 0.3),
        (DESnookerMove(), 0.1),
    ]
    if density.is_single:
        shake = 0.2 * np.std(start, axis=0) / math.sqrt(start.shape[1])
        shake[density.gap_column] = 0.0
        moves.append((Exchange(density, shake), 0.1))
    sampler = emcee.EnsembleSampler(WALKERS, start.shape[1], density, moves=moves)
    sampler.random_state = random.get_state()
    state = sampler.run_mcmc(start, burn)
    sampler.reset()
    sampler.run_mcmc(state, steps)
    return np.asarray(sampler.get_chain()), time.process_time() - began


def _starts(density: Density, along: AlongRidge, random: np.random.RandomState) -> Floats:
    """Points about the ridge where the density is not zero."""
    points: list[Floats] = []
    while len(points) < WALKERS:
        drawn = along.draw(WALKERS, random)
        points += [point for point in drawn if math.isfinite(density(point))]
    return np.array(points[:WALKERS])


def sample(case: Case, burn: int, steps: int, jobs: int = 2, seed: int = 1) -> Posterior:
    """Return posterior, profile and bound of a case's radius."""
    setting, bound, direction, forecast_s = setting_for(case)
    profile = profile_of(setting, "radius", bound, direction)
    limited = replace(setting, bounds=hard_limits(setting.model.names))
    bounded = profile_of(limited, "radius", bound, direction)
    density = Density(setting)
    run = partial(run_ensemble, density, ridge_of(density, profile), burn, steps)
    with workers(jobs) as team:
        runs = team.map(run, [seed + number for number in range(ENSEMBLES)], fewest=2)
    chains = np.array([chain for chain, _ in runs])
    radius = chains[..., density.radius_column]
    correlation = max(correlation_steps(chain) for chain in radius)
    low, median, high = np.quantile(radius, (0.16, 0.5, 0.84))
    lowest, highest = np.quantile(radius, (0.025, 0.975))
    single = radius.std(axis=(1, 2))
    interval, truth_km = profile.intervals[0], profile.truth
    effective = radius.size / correlation
    exchanged = 0.0
    if density.is_single:
        truth = density.straight(density.truth)[density.gap_column]
        exchanged = float(np.mean(chains[..., density.gap_column] * truth < 0.0))
    return Posterior(
        half_width_95=0.5 * float(highest - lowest),
        profile_95=profile.intervals[1].half_width,
        ensemble_scatter=float(single.std(ddof=1) / single.mean()),
        lopsided=float((high - median) / (median - low)),
        profile_lopsided=(interval.upper - truth_km) / (truth_km - interval.lower),
        bound=bound,
        profile=profile.intervals[0].half_width,
        bounded_profile=bounded.intervals[0].half_width,
        sigma=float(radius.std()),
        half_width=0.5 * float(high - low),
        shift=float(radius.mean()) - truth_km,
        correlation_steps=correlation,
        steps=steps,
        r_hat=max(split_r_hat(chains[..., index]) for index in range(chains.shape[-1])),
        exchanged=exchanged,
        sampler_s=sum(spent for _, spent in runs),
        forecast_s=forecast_s,
        error=1.0 / math.sqrt(2.0 * effective),
        evaluations=ENSEMBLES * WALKERS * (burn + steps),
    )


def correlation_steps(values: Floats) -> float:
    """Return the integrated autocorrelation time, in steps, of values of shape (steps, walkers).

    Walkers share their mean and variance, so that one that stands still counts. The sum ends at
    five times itself (Sokal 1997).
    """
    offset = values - values.mean()
    steps = len(offset)
    power = np.abs(np.fft.rfft(offset, 2 * steps, axis=0)) ** 2
    correlation = np.fft.irfft(power, axis=0)[:steps].mean(axis=1)
    times = 2.0 * np.cumsum(correlation / correlation[0]) - 1.0
    ended = np.arange(steps) >= 5.0 * times
    return float(times[int(np.argmax(ended))] if ended.any() else times[-1])


def split_r_hat(values: Floats) -> float:
    """Return split R-hat of independent ensembles, values of shape (ensemble, steps, walkers).

    Each half of an ensemble counts as a chain (Gelman et al. 2013, Bayesian Data Analysis,
    section 11.4).
    """
    half = values.shape[1] // 2
    chains = np.concatenate([values[:, :half], values[:, half : 2 * half]]).reshape(
        2 * len(values), -1
    )
    within = float(chains.var(axis=1, ddof=1).mean())
    between = float(chains.mean(axis=1).var(ddof=1))
    return math.sqrt((within + between) / within)


def information_at(density: Density, vector: Floats) -> Floats:
    """Return the expected information of data and priors in straight coordinates, (n, n)."""
    local = density.model.linearised(vector)
    assert local is not None
    source, derivatives = local
    share = density.model.exposure_s / density.model.phase_bins
    expected = np.maximum(share * (source + density.model.background_per_s), _FLOOR)
    flat = (share * derivatives / np.sqrt(expected)).reshape(len(derivatives), -1)
    shapes = share * density.model.levels.shape_per_s
    mixed = np.einsum("ikc,kc->ic", share * derivatives, 1.0 / expected) @ shapes.T
    level = shapes**2 @ (1.0 / expected).sum(axis=0) + density.model.levels.prior_information
    matrix = flat @ flat.T - (mixed / level) @ mixed.T + np.diag(density.penalty.information)
    jacobian = density.jacobian(vector)
    straight = jacobian.T @ matrix @ jacobian
    return np.asarray(straight[np.ix_(density.free, density.free)])


def length(default: int, runner: Callable[[str], str | None] = os.environ.get) -> int:
    """Return a number of steps, times EXPTIME_SAMPLER_LENGTH."""
    return int(default * float(runner("EXPTIME_SAMPLER_LENGTH") or 1.0))
