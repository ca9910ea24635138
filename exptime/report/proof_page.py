"""A verification as one self-contained page, and as a piece of one for a notebook."""

from __future__ import annotations

from typing import Any

from exptime.report.page import drawn, environment, plain
from exptime.report.proof import (
    geometry_facts,
    procedure,
    profile_tables,
    reasons,
    refits_table,
    run_facts,
    verdict_sentence,
)
from exptime.report.proof_figure import profile_picture
from exptime.report.sentences import CAUTION
from exptime.report.words import printable
from exptime.study.verify_records import CheckedGeometry, Verification

_LONGEST_TITLE = 60


def verification_page(verification: Verification) -> str:
    """Return a verification as one HTML file that loads nothing from outside.

    Parameters
    ----------
    verification : Verification
        What was found.
    """
    context = {
        **_summary(verification),
        "procedure": procedure(verification),
        "notes": plain(verification.notes),
        "run_facts": run_facts(verification),
    }
    return environment().get_template("verify.html").render(context)


def verification_html_fragment(verification: Verification) -> str:
    """Return the verdict, its tables and figure as a piece of HTML for a notebook."""
    return environment().get_template("verify_fragment.html").render(_summary(verification))


def _summary(verification: Verification) -> dict[str, Any]:
    name = printable(verification.target)
    return {
        "title": name if len(name) <= _LONGEST_TITLE else f"{name[:_LONGEST_TITLE]}…",
        "target": name,
        "instruments": [printable(verification.instrument)],
        "verdict": verdict_sentence(verification),
        "reasons": plain(reasons(verification)),
        "figure_content": drawn(profile_picture(verification)),
        "geometries": [_geometry(geometry) for geometry in verification.geometries],
        "caution": CAUTION,
    }


def _geometry(geometry: CheckedGeometry) -> dict[str, Any]:
    refits = refits_table(geometry)
    return {
        "label": geometry.label[:1].upper() + geometry.label[1:],
        "tables": [*profile_tables(geometry), *([] if refits is None else [refits])],
        "facts": geometry_facts(geometry),
    }
