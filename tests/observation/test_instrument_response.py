"""The response of shipped instruments behind a column, against a dense fold."""

from __future__ import annotations

import numpy as np
import pytest

from exptime.instrument.reader import read_instrument, shipped_instruments
from exptime.instrument.response import response_matrix, sigma_kev
from exptime.interstellar.absorption import load_absorption
from exptime.observation.instrument_response import instrument_response
from exptime.quadrature import piecewise_nodes

THERMAL = [(0.1, 1e20, 3e-6), (0.05, 1e21, 3e-6), (1.0, 1e21, 3e-6), (0.1, 1e22, 4e-5)]


def spectrum(energies: np.ndarray, section: np.ndarray, kt: float, column: float) -> np.ndarray:
    """Return an absorbed black body, photons."""
    return energies**2 * np.exp(-energies / kt - column * section) / -np.expm1(-energies / kt)


@pytest.mark.parametrize("name", shipped_instruments())
def test_fold_equals_a_dense_one_that_knows_every_knot(name: str) -> None:
    """Pieces cut at every knot of area and absorption; errors over the highest channel.

    The kinks of the absorption table, which the program does not cut, set the tolerance; it
    grows with the column.
    """
    instrument, absorption = read_instrument(name), load_absorption()
    response = instrument_response(instrument, absorption)
    table = instrument.area.energies_kev
    knots = np.concatenate([table, absorption.energies_kev])
    knots = knots[(knots >= table[0]) & (knots <= table[-1])]
    narrow = sigma_kev(instrument.redistribution, table[:1])[0]
    nodes, weights = piecewise_nodes(knots, max(narrow, 0.004), 6)
    dense = response_matrix(instrument, nodes, weights)
    section = absorption.cross_section_cm2(nodes)
    for kt, column, tolerance in THERMAL:
        slow = spectrum(nodes, section, kt, column) @ dense
        through = spectrum(response.nodes_kev, response.cross_section_cm2, kt, column)
        assert np.max(np.abs(through @ response.matrix - slow)) < tolerance * slow.max()


def test_nodes_that_reach_no_channel_are_dropped() -> None:
    """Every node counts; section and timing come along."""
    instrument, absorption = read_instrument("coarse-imager"), load_absorption("solar-1982")
    response = instrument_response(instrument, absorption)
    assert response.matrix.any(axis=1).all()
    assert response.matrix.shape == (
        len(response.nodes_kev),
        len(instrument.channel_edges_kev) - 1,
    )
    np.testing.assert_array_equal(
        response.cross_section_cm2, absorption.cross_section_cm2(response.nodes_kev)
    )
    assert response.time_bin_s == instrument.time_resolution_s
    assert response.clock_error_s == instrument.time_uncertainty_s
