"""The response of an instrument behind a column."""

from __future__ import annotations

from exptime.instrument.records import Instrument
from exptime.instrument.response import photon_nodes, response_matrix
from exptime.interstellar.absorption import Absorption
from exptime.observation.response import Response


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
    nodes, weights = photon_nodes(instrument, absorption.edges_kev)
    matrix = response_matrix(instrument, nodes, weights)
    reached = matrix.any(axis=1)
    return Response(
        nodes_kev=nodes[reached],
        matrix=matrix[reached],
        cross_section_cm2=absorption.cross_section_cm2(nodes[reached]),
        time_bin_s=instrument.time_resolution_s,
        clock_error_s=instrument.time_uncertainty_s,
    )
