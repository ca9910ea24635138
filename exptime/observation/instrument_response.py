"""The response of an instrument behind a column."""

from __future__ import annotations

import numpy as np

from exptime.instrument.records import Instrument
from exptime.instrument.response import photon_breakpoints, response_matrix, widest_piece_kev
from exptime.interstellar.absorption import Absorption
from exptime.observation.response import Response
from exptime.quadrature import piecewise_nodes

_ORDER = 4
_MANY_BREAKPOINTS = 400


def instrument_response(instrument: Instrument, absorption: Absorption) -> Response:
    """Return the map from photon spectra to the channels of an instrument.

    Parameters
    ----------
    instrument : Instrument
        The instrument.
    absorption : Absorption
        The column's cross-section.

    Returns
    -------
    Response
        With nodes that resolve the redistribution, the knots of the area and the absorption
        edges.
    """
    breakpoints = photon_breakpoints(instrument)
    low, high = breakpoints[0], breakpoints[-1]
    edges = absorption.edges_kev[(absorption.edges_kev > low) & (absorption.edges_kev < high)]
    # Tables of thousands of rows are themselves fine: one node a row is then enough.
    order = _ORDER if len(breakpoints) < _MANY_BREAKPOINTS else 2
    nodes, weights = piecewise_nodes(
        np.concatenate([breakpoints, edges]), widest_piece_kev(instrument), order
    )
    matrix = response_matrix(instrument, nodes, weights)
    reached = matrix.any(axis=1)
    return Response(
        nodes_kev=nodes[reached],
        matrix=matrix[reached],
        cross_section_cm2=absorption.cross_section_cm2(nodes[reached]),
        time_bin_s=instrument.time_resolution_s,
        clock_error_s=instrument.time_uncertainty_s,
    )
