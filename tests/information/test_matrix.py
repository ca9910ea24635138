"""Information and the elimination of background levels, against a twin written as loops."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from exptime.arrays import Floats
from exptime.information.matrix import (
    BackgroundLevels,
    background_levels,
    information_per_second,
)
from exptime.instrument.records import BackgroundKnowledge

EDGES = np.array([0.3, 0.35, 0.45, 0.55, 0.6, 0.72, 0.9])
BINS, CHANNELS, COUNT = 5, 6, 3
KINDS = [
    BackgroundKnowledge(kind="known"),
    BackgroundKnowledge(kind="unknown"),
    BackgroundKnowledge(kind="fraction", fraction=0.1),
    BackgroundKnowledge(kind="scale", fraction=0.03),
]
seeds = st.integers(0, 10_000)


def example(seed: int, channels: int = CHANNELS) -> tuple[Floats, Floats, Floats]:
    """Return positive rates, derivatives and background that are well conditioned."""
    rng = np.random.default_rng(seed)
    source = rng.uniform(0.1, 2.0, (BINS, channels))
    derivatives = rng.normal(size=(COUNT, BINS, channels))
    return source, derivatives, rng.uniform(0.05, 1.0, channels)


def _groups(knowledge: BackgroundKnowledge, edges: Floats) -> list[list[int]]:
    """Channels of each free level."""
    groups: dict[int, list[int]] = {}
    for channel in range(len(edges) - 1):
        middle = 0.5 * (edges[channel] + edges[channel + 1])
        key = {"unknown": channel, "scale": 0, "fraction": int((middle - edges[0]) / 0.2)}
        if knowledge.kind != "known":
            groups.setdefault(key[knowledge.kind], []).append(channel)
    return list(groups.values())


def dense(
    source: Floats,
    derivatives: Floats,
    background: Floats,
    knowledge: BackgroundKnowledge,
    edges: Floats,
    exposure: float,
) -> Floats:
    """Carry every level as one more parameter with its prior, invert, and invert the block back."""
    bins, channels = source.shape
    groups = _groups(knowledge, edges)
    size = len(derivatives) + len(groups)
    full = np.zeros((size, size))
    for k in range(bins):
        for channel in range(channels):
            mean = exposure / bins * (source[k, channel] + background[channel])
            slope = np.zeros(size)
            for i in range(len(derivatives)):
                slope[i] = exposure / bins * derivatives[i, k, channel]
            for level, members in enumerate(groups):
                if channel in members:
                    unit = 1.0 if knowledge.kind == "unknown" else background[channel]
                    slope[len(derivatives) + level] = exposure / bins * unit
            full += np.outer(slope, slope) / mean
    for level in range(len(groups)):
        if knowledge.kind != "unknown":
            full[len(derivatives) + level, len(derivatives) + level] += knowledge.fraction**-2
    covariance = np.linalg.inv(full)[: len(derivatives), : len(derivatives)]
    return np.asarray(np.linalg.inv(covariance))


def eliminated(
    source: Floats,
    derivatives: Floats,
    background: Floats,
    knowledge: BackgroundKnowledge,
    edges: Floats,
    exposure: float = 1.0,
) -> Floats:
    levels = background_levels(knowledge, background, edges)
    information = information_per_second(source, derivatives, background, levels)
    return np.asarray(information.at(np.array([exposure]))[0])


def close(one: Floats, other: Floats, tolerance: float = 1e-12) -> None:
    assert np.abs(one - other).max() <= tolerance * np.abs(other).max()


@pytest.mark.parametrize("knowledge", KINDS, ids=lambda k: k.kind)
@pytest.mark.parametrize("exposure", [0.7, 1e3])
@pytest.mark.parametrize("seed", range(4))
def test_elimination_is_explicit_marginalisation(
    knowledge: BackgroundKnowledge, exposure: float, seed: int
) -> None:
    """Levels as parameters with priors, inverted numerically: 1e-12 of the largest element."""
    source, derivatives, background = example(seed)
    got = eliminated(source, derivatives, background, knowledge, EDGES, exposure)
    close(got, dense(source, derivatives, background, knowledge, EDGES, exposure), 2e-12)


@given(seeds)
def test_more_knowledge_is_more_information(seed: int) -> None:
    """Known, scaled, by fractions, unknown: each leaves no more than the one before."""
    source, derivatives, background = example(seed)
    ordered = [
        KINDS[0],
        BackgroundKnowledge(kind="scale", fraction=0.1),
        BackgroundKnowledge(kind="fraction", fraction=0.1),
        KINDS[1],
    ]
    matrices = [eliminated(source, derivatives, background, k, EDGES, 50.0) for k in ordered]
    for index in (0, 2):
        step = matrices[index] - matrices[index + 1]
        assert np.linalg.eigvalsh(step)[0] > -1e-10 * np.abs(matrices[0]).max()
    assert np.linalg.eigvalsh(matrices[0] - matrices[2])[0] > -1e-10 * np.abs(matrices[0]).max()


def test_vanishing_and_endless_uncertainty_are_the_known_and_the_unknown() -> None:
    """A fraction goes from one limit to the other; exactly zero means known."""
    source, derivatives, background = example(1)
    # One channel per 0.2 keV, so that `unknown` has the same levels.
    edges = np.linspace(0.3, 0.3 + 0.2 * CHANNELS, CHANNELS + 1)

    def at(fraction: float) -> Floats:
        knowledge = BackgroundKnowledge(kind="fraction", fraction=fraction)
        return eliminated(source, derivatives, background, knowledge, edges, 10.0)

    known, unknown = (
        eliminated(source, derivatives, background, kind, edges, 10.0) for kind in KINDS[:2]
    )
    close(at(0.0), known, 0.0)
    close(at(1e-7), known)
    close(at(1e7), unknown)


@pytest.mark.parametrize("knowledge", KINDS, ids=lambda k: k.kind)
def test_without_any_background_only_unknown_levels_cost(knowledge: BackgroundKnowledge) -> None:
    """A background of zero, known or in proportion, stays zero; a free one is eliminated."""
    source, derivatives, _ = example(7)
    none = np.zeros(CHANNELS)
    got = eliminated(source, derivatives, none, knowledge, EDGES)
    plain = np.einsum("ikc,jkc,kc->ij", derivatives, derivatives, 1.0 / source) / BINS
    if knowledge.kind == "unknown":
        close(got, dense(source, derivatives, none, knowledge, EDGES, 1.0), 2e-12)
        assert np.linalg.eigvalsh(plain - got)[-1] > 1e-3
    else:
        close(got, plain)


@given(seeds, st.sampled_from(KINDS))
def test_an_empty_channel_changes_nothing(seed: int, knowledge: BackgroundKnowledge) -> None:
    """Neither source nor background: no information and no division by zero."""
    source, derivatives, background = example(seed)
    before = eliminated(source, derivatives, background, knowledge, EDGES, 3.0)
    wider = (
        np.concatenate([source, np.zeros((BINS, 1))], axis=1),
        np.concatenate([derivatives, np.zeros((COUNT, BINS, 1))], axis=2),
        np.append(background, 0.0),
    )
    close(eliminated(*wider, knowledge, np.append(EDGES, 1.0), 3.0), before)


@given(seeds, st.sampled_from(KINDS), st.integers(2, 4))
def test_splitting_phase_bins_where_the_rate_is_flat_changes_nothing(
    seed: int, knowledge: BackgroundKnowledge, parts: int
) -> None:
    """Each bin in several equal ones with the same rate."""
    source, derivatives, background = example(seed)
    before = eliminated(source, derivatives, background, knowledge, EDGES, 3.0)
    split = np.repeat(source, parts, axis=0), np.repeat(derivatives, parts, axis=1), background
    close(eliminated(*split, knowledge, EDGES, 3.0), before)


@pytest.mark.parametrize("knowledge", [KINDS[0], *KINDS[2:]], ids=lambda k: k.kind)
@pytest.mark.parametrize("parts", [2, 7])
def test_finer_channels_of_the_same_spectrum_change_nothing(
    knowledge: BackgroundKnowledge, parts: int
) -> None:
    """A fraction is tied within 0.2 keV, however many channels lie there."""
    source, derivatives, background = example(5)
    edges = np.linspace(0.3, 0.3 + 0.2 * CHANNELS, CHANNELS + 1)
    before = eliminated(source, derivatives, background, knowledge, edges, 20.0)
    finer = (
        np.repeat(source, parts, axis=1) / parts,
        np.repeat(derivatives, parts, axis=2) / parts,
        np.repeat(background, parts) / parts,
    )
    fine_edges = np.linspace(edges[0], edges[-1], parts * CHANNELS + 1)
    close(eliminated(*finer, knowledge, fine_edges, 20.0), before)


def test_bands_of_a_fraction_survive_rounded_edges() -> None:
    """Channels of 50 eV from 0.3 keV: four to each level."""
    edges = np.linspace(0.3, 3.1, 57)
    levels = background_levels(KINDS[2], np.ones(56), edges)
    assert levels.shape_per_s.shape == (14, 56)
    assert np.all(levels.shape_per_s.sum(axis=1) == 4.0)
    np.testing.assert_allclose(levels.prior_information, 100.0)


@given(seeds, st.sampled_from(KINDS))
def test_merging_channels_never_raises_the_information(
    seed: int, knowledge: BackgroundKnowledge
) -> None:
    """Fine minus merged has no negative eigenvalue; merged within the bands of a fraction."""
    source, derivatives, background = example(seed)
    edges = np.linspace(0.3, 0.3 + 0.1 * CHANNELS, CHANNELS + 1)
    fine = eliminated(source, derivatives, background, knowledge, edges, 5.0)
    merged = eliminated(
        source[:, ::2] + source[:, 1::2],
        derivatives[:, :, ::2] + derivatives[:, :, 1::2],
        background[::2] + background[1::2],
        knowledge,
        edges[::2],
        5.0,
    )
    assert np.linalg.eigvalsh(fine - merged)[0] > -1e-11 * np.abs(fine).max()


@given(seeds, st.permutations(range(COUNT)), st.sampled_from(KINDS))
def test_permuting_parameters_permutes_the_matrix(
    seed: int, order: list[int], knowledge: BackgroundKnowledge
) -> None:
    """The order of the parameters is a matter of names."""
    source, derivatives, background = example(seed)
    before = eliminated(source, derivatives, background, knowledge, EDGES, 4.0)
    after = eliminated(source, derivatives[order], background, knowledge, EDGES, 4.0)
    close(after, before[np.ix_(order, order)])


@given(seeds, st.sampled_from(KINDS))
def test_other_parameters_transform_the_matrix(seed: int, knowledge: BackgroundKnowledge) -> None:
    """With theta = J eta the matrix becomes J^T F J."""
    source, derivatives, background = example(seed)
    jacobian = np.random.default_rng(seed + 1).normal(size=(COUNT, COUNT))
    before = eliminated(source, derivatives, background, knowledge, EDGES, 4.0)
    changed = np.einsum("ai,akc->ikc", jacobian, derivatives)
    after = eliminated(source, changed, background, knowledge, EDGES, 4.0)
    close(after, jacobian.T @ before @ jacobian, 1e-11)


@given(seeds, st.integers(0, BINS), st.sampled_from(KINDS))
def test_moving_the_phase_by_whole_bins_changes_nothing(
    seed: int, shift: int, knowledge: BackgroundKnowledge
) -> None:
    """Where the first bin begins is of no consequence."""
    source, derivatives, background = example(seed)
    before = eliminated(source, derivatives, background, knowledge, EDGES, 4.0)
    rolled = np.roll(source, shift, axis=0), np.roll(derivatives, shift, axis=1), background
    close(eliminated(*rolled, knowledge, EDGES, 4.0), before)


def test_several_exposures_at_once() -> None:
    """A stack of matrices, one an exposure; proportional to it where no prior acts."""
    source, derivatives, background = example(3)
    levels: BackgroundLevels = background_levels(KINDS[1], background, EDGES)
    information = information_per_second(source, derivatives, background, levels)
    both = information.at(np.array([2.0, 8.0]))
    assert both.shape == (2, COUNT, COUNT)
    close(both[1], 4.0 * both[0])
