"""Absorption by the column between star and observer."""

from __future__ import annotations

import itertools

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad

from exptime.interstellar.absorption import Absorption, Abundances, load_absorption
from exptime.quadrature import piecewise_nodes
from exptime.tables.absorption import gas_cm2

SETS: tuple[Abundances, ...] = ("interstellar", "solar-1982")


def by_loop(absorption: Absorption, energy: float) -> float:
    """Cross-section at one energy, the slow way."""
    knots = absorption.energies_kev
    k = 1
    while k < len(knots) - 1 and knots[k] < energy:
        k += 1
    x0, x1 = np.log(knots[k - 1]), np.log(knots[k])
    y0, y1 = np.log(absorption.scaled[k - 1]), np.log(absorption.scaled[k])
    share = (np.log(energy) - x0) / (x1 - x0)
    return float(np.exp(y0 + share * (y1 - y0)) / energy**3)


@pytest.mark.parametrize("abundances", SETS)
def test_cross_section_equals_the_sum_over_atoms(abundances: Abundances) -> None:
    """The table's straight lines are good to 2e-4."""
    energies = np.random.default_rng(3).uniform(0.03, 30.0, 3000)
    truth = gas_cm2(abundances.replace("-", "_"), energies)
    section = load_absorption(abundances).cross_section_cm2(energies)
    np.testing.assert_allclose(section, truth, rtol=2.1e-4)


@given(st.floats(0.01, 80.0))
def test_cross_section_equals_its_loop_written_twin(energy: float) -> None:
    """To rounding, beyond the ends of the table too."""
    absorption = load_absorption()
    section = absorption.cross_section_cm2(np.array([energy]))
    assert section[0] == pytest.approx(by_loop(absorption, energy), rel=1e-11)


def test_cross_section_at_the_knots_is_the_table() -> None:
    """Every knot, both sides of the edges."""
    absorption = load_absorption()
    section = absorption.cross_section_cm2(absorption.energies_kev)
    np.testing.assert_allclose(section * absorption.energies_kev**3, absorption.scaled, rtol=1e-11)


def test_last_lines_go_on_beyond_the_table() -> None:
    """Up to 80 keV the cross-section falls about as the cube of the energy, small as it is."""
    section = load_absorption().cross_section_cm2(np.array([30.0, 60.0, 80.0]))
    slope = np.diff(np.log(section)) / np.diff(np.log([30.0, 60.0, 80.0]))
    assert slope[0] == pytest.approx(slope[1], abs=1e-9)
    assert -3.4 < slope[0] < -2.6
    assert section[0] < 4e-26


def test_shape_of_the_energies_is_kept() -> None:
    """Any array goes in."""
    energies = np.linspace(0.1, 3.0, 6).reshape(2, 3)
    absorption = load_absorption()
    assert absorption.cross_section_cm2(energies).shape == (2, 3)
    assert absorption.transmission(energies, 1e21).shape == (2, 3)


@given(st.floats(0.03, 30.0), st.floats(0.0, 1e24), st.floats(0.0, 1e24))
def test_columns_multiply(energy: float, first: float, second: float) -> None:
    """What comes through two columns comes through their sum; nothing stops nothing."""
    absorption, energies = load_absorption(), np.array([energy])
    one, two = (absorption.transmission(energies, column)[0] for column in (first, second))
    both = absorption.transmission(energies, first + second)[0]
    assert 0.0 <= both <= 1.0
    assert both == pytest.approx(one * two, rel=1e-9, abs=1e-300)
    assert absorption.transmission(energies, 0.0)[0] == 1.0


def test_sets_of_abundances_differ_as_their_metals_do() -> None:
    """The solar set has a third more metals: above the oxygen edge it absorbs more."""
    energies = np.array([0.7, 1.0, 2.0, 5.0])
    inter, solar = (load_absorption(name).cross_section_cm2(energies) for name in SETS)
    assert (solar > 1.2 * inter).all()
    assert (solar < 1.6 * inter).all()


def test_edges_are_inside_the_table_and_rise() -> None:
    """They cut integrals."""
    edges = load_absorption().edges_kev
    assert (np.diff(edges) > 0.0).all()
    assert edges[0] > 0.03
    assert edges[-1] < 30.0


@pytest.mark.parametrize(
    ("temperature", "column"), [(0.1, 1e20), (0.05, 1e21), (0.3, 5e21), (0.1, 1e22)]
)
def test_absorbed_flux_equals_an_adaptive_integral(temperature: float, column: float) -> None:
    """Pieces cut at the edges against quadrature by scipy that knows every knot.

    1e-5 covers the kinks of the table between the edges, which the pieces do not cut.
    """
    absorption = load_absorption()

    def spectrum(energies):
        black_body = energies**3 / np.expm1(energies / temperature)
        return black_body * absorption.transmission(np.asarray(energies), column)

    low, high = 0.3, 3.0
    edges = absorption.edges_kev
    inside = edges[(edges > low) & (edges < high)]
    nodes, weights = piecewise_nodes(np.array([low, high, *inside]), 0.05, 6)
    knots = absorption.energies_kev
    bounds = [low, *knots[(knots > low) & (knots < high)], high]
    slow = sum(
        quad(spectrum, a, b, epsrel=1e-10, epsabs=0.0)[0]
        for a, b in itertools.pairwise(bounds)
        if b - a > 1e-6
    )
    assert np.sum(weights * spectrum(nodes)) == pytest.approx(slow, rel=1e-5)
