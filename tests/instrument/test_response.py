"""From photons to channels, against twins written as loops."""

from __future__ import annotations

import itertools
import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from exptime.errors import ProfileError
from exptime.instrument.records import (
    BackgroundKnowledge,
    EffectiveArea,
    Instrument,
    Redistribution,
)
from exptime.instrument.response import (
    area_cm2,
    channel_probabilities,
    photon_breakpoints,
    photon_nodes,
    photon_range,
    response_matrix,
    sigma_kev,
)

LAWS = ("sqrt", "constant", "linear")
NO_CUTS = np.zeros(0)


def bench(
    redistribution: Redistribution | None = None,
    edges: np.ndarray | None = None,
    knots: tuple[float, ...] = (0.2, 0.9, 2.5, 8.0),
    area: tuple[float, ...] = (100.0, 900.0, 400.0, 20.0),
) -> Instrument:
    """Return an instrument without background."""
    edges = np.linspace(0.3, 2.3, 21) if edges is None else edges
    return Instrument(
        id="bench",
        name="Bench",
        area=EffectiveArea(energies_kev=np.array(knots), area_cm2=np.array(area), source="test"),
        redistribution=redistribution or Redistribution(fwhm_kev=0.08, at_kev=1.0, law="sqrt"),
        channel_edges_kev=edges,
        background_per_s=np.zeros(len(edges) - 1),
        background_knowledge=BackgroundKnowledge(),
    )


def width(redistribution: Redistribution, energy: float) -> float:
    """Return sigma by the words of the law."""
    sigma = redistribution.fwhm_kev / 2.354820045030949
    if redistribution.law == "sqrt":
        return sigma * math.sqrt(energy / redistribution.at_kev)
    if redistribution.law == "linear":
        return sigma * energy / redistribution.at_kev
    return sigma


def share(redistribution: Redistribution, low: float, high: float, energy: float) -> float:
    """Return the probability of one channel by the error function."""
    if redistribution.law == "perfect":
        return float(low <= energy < high)
    scale = math.sqrt(2.0) * width(redistribution, energy)
    return 0.5 * (math.erf((high - energy) / scale) - math.erf((low - energy) / scale))


def area_by_loop(area: EffectiveArea, energy: float) -> float:
    """Return the area by looking for the interval."""
    pairs = zip(area.energies_kev, area.area_cm2, strict=True)
    for (a, u), (b, v) in itertools.pairwise(pairs):
        if a <= energy <= b and b > a:
            return float(u + (v - u) * (energy - a) / (b - a))
    return 0.0


@given(
    st.sampled_from(("perfect", *LAWS)),
    st.floats(0.005, 0.4),
    st.floats(0.3, 6.0),
    st.integers(0, 10_000),
)
def test_folding_equals_its_loop_written_twin(law, fwhm, at, seed) -> None:
    """Node by node and channel by channel, to 1e-12 of the largest."""
    generator = np.random.default_rng(seed)
    redistribution = Redistribution(fwhm_kev=0.0 if law == "perfect" else fwhm, at_kev=at, law=law)
    edges = np.cumsum(generator.uniform(0.02, 0.5, 8)) + 0.1
    instrument = bench(redistribution, edges)
    nodes = generator.uniform(0.05, 9.0, 25)
    weights = generator.uniform(0.0, 0.1, 25)
    slow = np.array(
        [
            [
                w * area_by_loop(instrument.area, e) * share(redistribution, low, high, e)
                for low, high in itertools.pairwise(edges)
            ]
            for e, w in zip(nodes, weights, strict=True)
        ]
    )
    fast = response_matrix(instrument, nodes, weights)
    np.testing.assert_allclose(fast, slow, rtol=0.0, atol=1e-12 * max(slow.max(), 1e-300))


@given(st.sampled_from(LAWS), st.floats(0.001, 2.0), st.floats(0.05, 12.0))
def test_lost_tails_stay_lost(law, fwhm, energy) -> None:
    """Rows sum to the probability of all channels, never scaled up to one."""
    redistribution = Redistribution(fwhm_kev=fwhm, at_kev=1.0, law=law)
    edges = np.linspace(0.3, 2.3, 21)
    row = channel_probabilities(redistribution, edges, np.array([energy]))[0]
    assert (row >= 0.0).all()
    assert row.sum() <= 1.0 + 1e-14
    assert row.sum() == pytest.approx(share(redistribution, 0.3, 2.3, energy), abs=1e-13)


def test_half_of_a_line_at_the_edge_is_lost() -> None:
    """A photon at the upper end of the band: a closed form."""
    redistribution = Redistribution(fwhm_kev=0.1, at_kev=1.0, law="constant")
    edges = np.linspace(0.3, 2.3, 21)
    rows = channel_probabilities(redistribution, edges, np.array([1.3, 2.3, 2.8]))
    np.testing.assert_allclose(rows.sum(axis=1), [1.0, 0.5, 0.0], atol=1e-14)


def test_widths_follow_their_laws() -> None:
    """At four times the energy: twice, once, four times the width; full width to sigma."""
    for law, growth in zip(LAWS, (2.0, 1.0, 4.0), strict=True):
        redistribution = Redistribution(fwhm_kev=0.0942, at_kev=1.5, law=law)
        found = sigma_kev(redistribution, np.array([1.5, 6.0]))
        assert found[0] == pytest.approx(0.0942 / 2.3548200450309493, rel=1e-13)
        assert found[1] / found[0] == pytest.approx(growth, rel=1e-13)


@given(st.sampled_from(("perfect", *LAWS)), st.floats(0.002, 1.5), st.floats(0.2, 6.0))
def test_photons_outside_the_range_are_never_counted(law, fwhm, at) -> None:
    """Beyond 8 sigma a share of 1e-14 at most; inside the table every other photon counts."""
    redistribution = Redistribution(fwhm_kev=0.0 if law == "perfect" else fwhm, at_kev=at, law=law)
    instrument = bench(redistribution)
    low, high = photon_range(instrument)
    assert 0.2 <= low < high <= 8.0
    grid = np.linspace(0.2, 8.0, 200)
    outside = grid[(grid < low) | (grid > high)]
    rows = channel_probabilities(redistribution, instrument.channel_edges_kev, outside)
    assert rows.sum(axis=1).max(initial=0.0) < 1e-14
    if low > 0.2:
        assert low + 8.0 * sigma_kev(redistribution, np.array([low]))[0] == pytest.approx(0.3)
    if high < 8.0:
        assert high - 8.0 * sigma_kev(redistribution, np.array([high]))[0] == pytest.approx(2.3)


def test_perfect_channels_are_cut_at_their_edges() -> None:
    """The whole first and last channel is inside, and each counts its own photons."""
    instrument = bench(Redistribution())
    edges = instrument.channel_edges_kev
    points = photon_breakpoints(instrument)
    assert (points[0], points[-1]) == (edges[0], edges[-1])
    assert set(edges) <= set(points)
    assert 0.9 in points
    nodes, weights = photon_nodes(instrument, NO_CUTS)
    flat = replace(
        instrument,
        area=EffectiveArea(
            energies_kev=np.array([0.2, 8.0]), area_cm2=np.array([5.0, 5.0]), source=""
        ),
    )
    np.testing.assert_allclose(
        response_matrix(flat, nodes, weights).sum(axis=0), 5.0 * np.diff(edges), rtol=1e-12
    )


def test_single_channel_of_a_band_counts_the_whole_band() -> None:
    """As used for a pulsed fraction measured in a band of an instrument."""
    instrument = bench(Redistribution(), np.array([0.5, 1.7]))
    nodes, weights = photon_nodes(instrument, NO_CUTS)
    total = response_matrix(instrument, nodes, weights).sum()
    slope = 800.0 / 0.7
    first = 0.4 * (900.0 - 0.2 * slope)
    second = 0.8 * (900.0 - 0.4 * 500.0 / 1.6)
    assert total == pytest.approx(first + second, rel=1e-12)


@pytest.mark.parametrize("law", ["perfect", *LAWS])
def test_quadrature_equals_a_dense_one(law) -> None:
    """A thermal spectrum folded with ten times as many nodes: 1e-6 of the highest channel."""
    redistribution = Redistribution(fwhm_kev=0.0 if law == "perfect" else 0.08, at_kev=1.0, law=law)
    instrument = bench(redistribution)
    cuts = np.array([0.5431])

    def spectrum(energies):
        absorbed = np.exp(-1.5 * (0.3 / energies) ** 3 * np.where(energies > 0.5431, 1.7, 1.0))
        return energies**2 / np.expm1(energies / 0.12) * absorbed

    nodes, weights = photon_nodes(instrument, cuts)
    fast = spectrum(nodes) @ response_matrix(instrument, nodes, weights)
    dense = np.unique(np.concatenate([photon_breakpoints(instrument), cuts]))
    dense = np.concatenate([np.linspace(a, b, 400) for a, b in itertools.pairwise(dense)])
    dense = np.unique(dense)
    x, w = np.polynomial.legendre.leggauss(3)
    half, middle = 0.5 * np.diff(dense), 0.5 * (dense[1:] + dense[:-1])
    points = (middle[:, None] + half[:, None] * x).ravel()
    slow = spectrum(points) @ response_matrix(instrument, points, (half[:, None] * w).ravel())
    assert np.max(np.abs(fast - slow)) < 1e-6 * slow.max()
    assert len(nodes) < 0.1 * len(points)


@pytest.mark.parametrize("rows", [30, 400, 4000])
def test_fine_tables_of_steps_keep_the_nodes_few(rows: int) -> None:
    """Two nodes a row where rows are narrow; the fold stays that of the exact steps."""
    edges = np.linspace(0.1, 8.0, rows + 1)
    steps = 1000.0 / (1.0 + (0.5 * (edges[1:] + edges[:-1])) ** 2)
    instrument = bench(knots=tuple(np.repeat(edges, 2)[1:-1]), area=tuple(np.repeat(steps, 2)))
    nodes, weights = photon_nodes(instrument, NO_CUTS)
    spectrum = np.exp(-nodes)
    inside = np.sum((edges > nodes[0]) & (edges < nodes[-1]))
    assert len(nodes) <= 2 * inside + 400
    # Every step times a fold by five nodes in each of five parts of a row.
    x, w = np.polynomial.legendre.leggauss(5)
    fine = np.linspace(0.1, 8.0, 5 * rows + 1)
    half, middle = 0.5 * np.diff(fine), 0.5 * (fine[1:] + fine[:-1])
    points = (middle[:, None] + half[:, None] * x).ravel()
    weight = (half[:, None] * w).ravel() * np.repeat(steps, 25) * np.exp(-points)
    slow = weight @ channel_probabilities(
        instrument.redistribution, instrument.channel_edges_kev, points
    )
    fast = spectrum @ response_matrix(instrument, nodes, weights)
    np.testing.assert_allclose(fast, slow, rtol=2e-6)


def test_area_without_a_common_photon_is_refused() -> None:
    """A band above the table, asked for by a measurement, is the user's to mend."""
    instrument = bench(Redistribution(), np.array([9.0, 10.0]))
    with pytest.raises(ProfileError, match=r"0\.2-8 keV"):
        photon_range(instrument)


def test_area_at_a_step_takes_either_side() -> None:
    """Nodes never stand on a knot; beside it each side has its own value."""
    area = EffectiveArea(
        energies_kev=np.array([1.0, 2.0, 2.0, 3.0]),
        area_cm2=np.array([5.0, 5.0, 9.0, 9.0]),
        source="",
    )
    np.testing.assert_array_equal(area_cm2(area, np.array([1.9999, 2.0001])), [5.0, 9.0])


def test_long_rows_and_low_energies_keep_the_nodes_few() -> None:
    """A table of two rows over six decades under a wide law that reaches far down."""
    redistribution = Redistribution(fwhm_kev=1.0, at_kev=1.0, law="sqrt")
    instrument = bench(redistribution, np.array([0.03, 1.0, 20.0]), (1e-5, 70.0), (50.0, 50.0))
    nodes, weights = photon_nodes(instrument, NO_CUTS)
    assert nodes[0] < 1e-3
    assert len(nodes) < 1000
    assert weights.sum() == pytest.approx(np.subtract(*photon_range(instrument)[::-1]), rel=1e-12)


def test_fold_too_large_for_memory_is_refused() -> None:
    """A width of a millionth of an electronvolt, before anything of that size is made."""
    redistribution = Redistribution(fwhm_kev=1e-9, at_kev=1.0, law="constant")
    instrument = bench(redistribution, np.linspace(0.3, 6.3, 4001))
    with pytest.raises(ProfileError, match="too many to fold"):
        photon_nodes(instrument, NO_CUTS)
