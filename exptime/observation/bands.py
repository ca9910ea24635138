"""Responses that sum photons, energy or counts over bands: what archival measurements refer to."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np

from exptime.arrays import Floats
from exptime.constants import KEV_ERG
from exptime.instrument.records import BackgroundKnowledge, Instrument
from exptime.interstellar.absorption import Absorption
from exptime.observation.instrument_response import instrument_response
from exptime.observation.response import Response
from exptime.quadrature import piecewise_nodes
from exptime.target.records import Flux

_WIDEST_KEV = 0.25
_WIDEST_RELATIVE = 0.25
_ORDER = 5


@dataclass(frozen=True, slots=True, kw_only=True)
class Band:
    """Where a pulse was measured.

    Parameters
    ----------
    band_kev : tuple of float
        Lower and upper energy, keV.
    instrument : str or None
        None: photon flux at the observer; else counts of this instrument.
    """

    band_kev: tuple[float, float]
    instrument: str | None


def band_energy(flux: Flux, absorption: Absorption) -> Response:
    """Return the response whose single channel is the energy flux in a band, erg cm^-2 s^-1.

    Parameters
    ----------
    flux : Flux
        Its band, and whether it is absorbed, count.
    absorption : Absorption
        The column's cross-section.
    """
    nodes, weights = _nodes(flux.band_kev, absorption)
    section = absorption.cross_section_cm2(nodes)
    return Response(
        nodes_kev=nodes,
        matrix=(weights * nodes * KEV_ERG)[:, None],
        cross_section_cm2=section if flux.absorbed else np.zeros_like(section),
    )


def band_responses(
    bands: Sequence[Band],
    absorption: Absorption,
    read_instrument: Callable[[str], Instrument],
) -> Response:
    """Return one response with a channel for each band.

    Parameters
    ----------
    bands : sequence of Band
        At least one.
    absorption : Absorption
        The column's cross-section.
    read_instrument : callable
        Reads an instrument by id or path.
    """
    return joined([_of_band(band, absorption, read_instrument) for band in bands])


def joined(parts: Sequence[Response]) -> Response:
    """Return one response with the channels of several, one after the other."""
    rows = np.cumsum([0, *(len(part.nodes_kev) for part in parts)])
    columns = np.cumsum([0, *(part.matrix.shape[1] for part in parts)])
    matrix = np.zeros((rows[-1], columns[-1]))
    for index, part in enumerate(parts):
        own = slice(rows[index], rows[index + 1]), slice(columns[index], columns[index + 1])
        matrix[own] = part.matrix
    widths = np.diff(columns)

    def of_channels(values: Sequence[float | Floats]) -> Floats:
        pairs = zip(values, widths, strict=True)
        return np.concatenate([np.broadcast_to(value, width) for value, width in pairs])

    return Response(
        nodes_kev=np.concatenate([part.nodes_kev for part in parts]),
        matrix=matrix,
        cross_section_cm2=np.concatenate([part.cross_section_cm2 for part in parts]),
        time_bin_s=of_channels([part.time_bin_s for part in parts]),
        clock_error_s=of_channels([part.clock_error_s for part in parts]),
    )


def _of_band(
    band: Band, absorption: Absorption, read_instrument: Callable[[str], Instrument]
) -> Response:
    if band.instrument is not None:
        instrument = replace(
            read_instrument(band.instrument),
            channel_edges_kev=np.array(band.band_kev),
            background_per_s=np.zeros(1),
            background_knowledge=BackgroundKnowledge(),
        )
        return instrument_response(instrument, absorption)
    nodes, weights = _nodes(band.band_kev, absorption)
    return Response(
        nodes_kev=nodes,
        matrix=weights[:, None],
        cross_section_cm2=absorption.cross_section_cm2(nodes),
    )


def _nodes(band_kev: tuple[float, float], absorption: Absorption) -> tuple[Floats, Floats]:
    low, high = band_kev
    inside = absorption.edges_kev[(absorption.edges_kev > low) & (absorption.edges_kev < high)]
    return piecewise_nodes(
        np.concatenate([[low, high], inside]), _WIDEST_KEV, _ORDER, _WIDEST_RELATIVE
    )
