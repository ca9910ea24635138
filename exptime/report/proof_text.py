"""A verification as text."""

from __future__ import annotations

from typing import TYPE_CHECKING

from exptime.report.proof import (
    geometry_facts,
    procedure,
    profile_tables,
    reasons,
    refits_table,
    run_facts,
    verdict_sentence,
)
from exptime.report.sentences import CAUTION
from exptime.report.typesetting import fact_list, grid, heading, listed, paragraphs, render
from exptime.report.words import printable
from exptime.study.verify_records import Verification

if TYPE_CHECKING:
    from rich.console import RenderableType


def verification_text(verification: Verification, width: int = 80) -> str:
    """Return a verification as text, the verdict first.

    Parameters
    ----------
    verification : Verification
        What was found.
    width : int
        Columns that no line exceeds.
    """
    target, instrument = printable(verification.target), printable(verification.instrument)
    parts: list[RenderableType] = [
        *paragraphs([verdict_sentence(verification), *reasons(verification)]),
        *paragraphs([f"Target: {target}. Instrument: {instrument}."]),
    ]
    for geometry in verification.geometries:
        for table in (*profile_tables(geometry), refits_table(geometry)):
            parts += [] if table is None else grid(table)
        title = geometry.label[:1].upper() + geometry.label[1:]
        parts += fact_list(title, geometry_facts(geometry))
    parts += [
        *listed("How it was verified", procedure(verification)),
        *listed("Assumed", verification.notes),
        *fact_list("This run", run_facts(verification)),
        *heading("Whose word counts"),
        *paragraphs([CAUTION]),
    ]
    return render(parts, width)


def verdict_parts(verification: Verification) -> list[RenderableType]:
    """Return the verdict as a part of another report."""
    return [
        *heading("Is the bound valid here?"),
        *paragraphs([verdict_sentence(verification), *reasons(verification)]),
    ]
