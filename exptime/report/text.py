"""Results as text of so many columns, whole when piped."""

from __future__ import annotations

from typing import TYPE_CHECKING

from exptime.report.background import limits, method
from exptime.report.digits import duration, significant
from exptime.report.feasibility import feasibility
from exptime.report.proof_text import verdict_parts
from exptime.report.sentences import CAUTION, answers, notes_on_goals
from exptime.report.tables import (
    Table,
    fixed_quantities,
    geometry_facts,
    goals_table,
    precision_tables,
    rate_facts,
    reading,
    run_facts,
)
from exptime.report.typesetting import fact_list, grid, heading, listed, paragraphs, render
from exptime.report.words import printable
from exptime.study.pulse_records import Counts, Pulse
from exptime.study.records import Forecast

if TYPE_CHECKING:
    from rich.console import RenderableType

_COLUMN_WIDTH = 11
_FIRST_COLUMN_WIDTH = 10


def forecast_text(forecast: Forecast, width: int = 80) -> str:
    """Return a forecast as text, the answer first.

    Parameters
    ----------
    forecast : Forecast
        The answer of the main job.
    width : int
        Columns that no line exceeds.
    """
    target = printable(forecast.target.name)
    names = " and ".join(printable(each.name) for each in forecast.instruments)
    parts: list[RenderableType] = [
        *paragraphs(answers(forecast)),
        *paragraphs([f"Target: {target}. Instrument: {names}."]),
        *listed("Warnings", forecast.warnings),
        *grid(goals_table(forecast)),
    ]
    if forecast.verification is not None:
        parts += verdict_parts(forecast.verification)
    for table in precision_tables(forecast):
        parts += grid(table)
    parts += paragraphs([*fixed_quantities(forecast), *notes_on_goals(forecast), reading(forecast)])
    parts += [
        *fact_list("Geometry", geometry_facts(forecast)),
        *fact_list("Counts", rate_facts(forecast)),
        *listed("Assumed", forecast.assumptions),
        *listed("How it was computed", method(forecast)),
        *listed("What could be wrong", limits(forecast)),
        *heading("For the feasibility section"),
        *paragraphs([feasibility(forecast)]),
        *fact_list("This run", run_facts(forecast)),
        *heading("Whose word counts"),
        *paragraphs([CAUTION]),
    ]
    return render(parts, width)


def pulse_text(pulse: Pulse, width: int = 80) -> str:
    """Return photon flux against phase and energy as a table.

    Parameters
    ----------
    pulse : Pulse
        The pulse; energies that do not fit side by side follow below.
    width : int
        Columns that no line exceeds.
    """
    title = f"Photon flux of {printable(pulse.target)} at the observer, without the column, in "
    title += "photons cm⁻² s⁻¹ keV⁻¹, averaged over each phase bin"
    parts = paragraphs([title])
    for columns in _blocks(len(pulse.energies_kev), width):
        parts += grid(
            Table(
                caption="",
                header=("phase", *(f"{pulse.energies_kev[each]:.4g} keV" for each in columns)),
                rows=tuple(
                    (f"{phase:.6f}", *(f"{row[each]:.4e}" for each in columns))
                    for phase, row in zip(pulse.phase, pulse.photon_flux, strict=True)
                ),
            )
        )
    return render([*parts, *listed("Notes", pulse.notes)], width)


def counts_text(counts: Counts, width: int = 80) -> str:
    """Return expected counts: summed over energy for each phase bin, and over phase.

    Parameters
    ----------
    counts : Counts
        Expected counts; every cell stands in the JSON document.
    width : int
        Columns that no line exceeds.
    """
    source, background = counts.source_counts, counts.background_counts
    edges = counts.channel_edges_kev
    title = (
        f"Expected counts of {printable(counts.target)} in {printable(counts.instrument)}, "
        f"{duration(counts.exposure_s)}: {significant(float(source.sum()), 4)} of the source over "
        f"{significant(float(background.sum()), 4)} of the background in "
        f"{edges[0]:.3g}-{edges[-1]:.3g} keV. Each cell of phase and channel stands in the JSON "
        "document (--format json)."
    )
    by_phase = Table(
        caption="By phase, summed over channels",
        header=("phase", "source", "background"),
        rows=tuple(
            (f"{phase:.6f}", f"{own:.5g}", f"{other:.5g}")
            for phase, own, other in zip(
                counts.phase, source.sum(axis=1), background.sum(axis=1), strict=True
            )
        ),
    )
    by_channel = Table(
        caption="By channel, summed over phase",
        header=("channel (keV)", "source", "background"),
        rows=tuple(
            (f"{low:.4g} - {high:.4g}", f"{own:.5g}", f"{other:.5g}")
            for low, high, own, other in zip(
                edges[:-1], edges[1:], source.sum(axis=0), background.sum(axis=0), strict=True
            )
        ),
    )
    parts = [*paragraphs([title]), *grid(by_phase), *grid(by_channel)]
    return render([*parts, *listed("Notes", counts.notes)], width)


def _blocks(count: int, width: int) -> list[range]:
    """Return which columns stand side by side."""
    size = max(1, (width - _FIRST_COLUMN_WIDTH) // (_COLUMN_WIDTH + 2))
    return [range(start, min(start + size, count)) for start in range(0, count, size)]
