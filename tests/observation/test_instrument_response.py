"""Responses of instruments: twice the quadrature, long tables of area, timing."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from exptime.arrays import Floats
from exptime.instrument.reader import read_instrument, shipped_instruments
from exptime.instrument.records import EffectiveArea, Instrument
from exptime.instrument.response import photon_breakpoints, response_matrix
from exptime.interstellar.absorption import load_absorption
from exptime.observation.instrument_response import instrument_response
from exptime.observation.response import Response
from exptime.quadrature import piecewise_nodes

COLUMN = 3e20


def rates(response: Response, kt: float = 0.15) -> Floats:
    """Fold a blackbody behind a column."""
    energy = response.nodes_kev
    through = np.exp(-response.cross_section_cm2 * COLUMN)
    return np.asarray((energy**2 / np.expm1(energy / kt) * through) @ response.matrix)


def dense(instrument: Instrument) -> Response:
    """Return the response on a quadrature far finer than the one chosen by need."""
    absorption = load_absorption("interstellar")
    points = photon_breakpoints(instrument)
    inside = absorption.edges_kev
    inside = inside[(inside > points[0]) & (inside < points[-1])]
    bounds = np.unique(np.concatenate([points, inside]))
    nodes, weights = piecewise_nodes(bounds, 0.02, 8, 0.02)
    return Response(
        nodes_kev=nodes,
        matrix=response_matrix(instrument, nodes, weights),
        cross_section_cm2=absorption.cross_section_cm2(nodes),
    )


@pytest.mark.parametrize("name", shipped_instruments())
def test_a_finer_quadrature_changes_no_rate(name: str) -> None:
    """Every shipped instrument, by its brightest channel: to the 3e-6 that its nodes promise."""
    instrument = read_instrument(name)
    here = rates(instrument_response(instrument, load_absorption("interstellar")))
    there = rates(dense(instrument))
    np.testing.assert_allclose(here / there.max(), there / there.max(), rtol=0.0, atol=3e-6)


def test_an_area_of_thousands_of_knots() -> None:
    """A wavy table of 5000 rows: few nodes, and the rates of a quadrature row by row."""
    instrument = read_instrument("soft-concentrator")
    energies = np.linspace(0.2, 6.0, 5000)
    table = EffectiveArea(
        energies_kev=energies,
        area_cm2=1000.0 * np.exp(-energies) * (1.0 + 0.3 * np.sin(40.0 * energies)),
        source="invented",
    )
    wavy = replace(instrument, area=table)
    response = instrument_response(wavy, load_absorption("interstellar"))
    assert len(response.nodes_kev) <= 3 * len(energies)
    here, there = rates(response), rates(dense(wavy))
    np.testing.assert_allclose(here / there.max(), there / there.max(), rtol=0.0, atol=3e-6)


def test_nodes_that_reach_no_channel_are_left_out() -> None:
    """Every row of the matrix counts somewhere; none is negative."""
    instrument = read_instrument("soft-concentrator")
    response = instrument_response(instrument, load_absorption("interstellar"))
    assert response.matrix.any(axis=1).all()
    assert response.matrix.min() >= 0.0
    assert response.matrix.shape[1] == len(instrument.channel_edges_kev) - 1


def test_timing_comes_along() -> None:
    """Time bin and clock error of the description."""
    instrument = replace(
        read_instrument("soft-concentrator"), time_resolution_s=3e-4, time_uncertainty_s=2e-5
    )
    response = instrument_response(instrument, load_absorption("interstellar"))
    assert (response.time_bin_s, response.clock_error_s) == (3e-4, 2e-5)
