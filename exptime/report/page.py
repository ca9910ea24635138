"""The report as one self-contained page, and as a piece of one for a notebook."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any, Final

from exptime._resources import shipped_folder
from exptime.report.background import limits, method, references
from exptime.report.data_figures import pulse_picture, spectrum_picture
from exptime.report.drawing import Picture
from exptime.report.ellipses import ellipse_picture
from exptime.report.feasibility import feasibility
from exptime.report.figures import precision_picture, share_picture
from exptime.report.proof import (
    procedure,
    profile_tables,
    reasons,
    refits_table,
    verdict_sentence,
)
from exptime.report.proof_figure import profile_picture
from exptime.report.sentences import CAUTION, answers, notes_on_goals
from exptime.report.tables import (
    fixed_quantities,
    geometry_facts,
    goals_table,
    key_facts,
    precision_tables,
    rate_facts,
    reading,
    run_facts,
    shares_table,
)
from exptime.report.words import printable
from exptime.study.records import Forecast

if TYPE_CHECKING:
    from jinja2 import Environment

_LONGEST_TITLE: Final = 60


def forecast_page(forecast: Forecast) -> str:
    """Return a forecast as one HTML file that loads nothing from outside.

    Parameters
    ----------
    forecast : Forecast
        The answer of the main job.
    """
    figures = {
        "share": share_picture(forecast),
        "precision": precision_picture(forecast),
        "ellipses": ellipse_picture(forecast),
        "pulse": pulse_picture(forecast),
        "spectrum": spectrum_picture(forecast),
    }
    context: dict[str, Any] = {
        **_summary(forecast),
        "figures": {name: drawn(figure) for name, figure in figures.items()},
        "precision_tables": precision_tables(forecast),
        "shares_table": None if forecast.is_geometry_known else shares_table(forecast),
        "notes": plain([*fixed_quantities(forecast), *notes_on_goals(forecast)]),
        "reading": reading(forecast),
        "assumptions": plain(forecast.assumptions),
        "geometry_facts": geometry_facts(forecast),
        "rate_facts": rate_facts(forecast),
        "limits": limits(forecast),
        "method": method(forecast),
        "references": references(forecast),
        "entries": [
            (printable(each.key), printable(each.text), str(each.line))
            for each in forecast.target.entries
        ],
        "run_facts": run_facts(forecast),
        "feasibility": feasibility(forecast),
        "verification": _verification(forecast),
        "caution": CAUTION,
    }
    return environment().get_template("forecast.html").render(context)


def forecast_html_fragment(forecast: Forecast) -> str:
    """Return the answer, its main table and figure as a piece of HTML for a notebook.

    Parameters
    ----------
    forecast : Forecast
        The answer of the main job.
    """
    context: dict[str, Any] = {
        **_summary(forecast),
        "figure_content": drawn(precision_picture(forecast)),
        "caution": CAUTION,
    }
    return environment().get_template("forecast_fragment.html").render(context)


def _summary(forecast: Forecast) -> dict[str, Any]:
    """Return what page and fragment share."""
    name = printable(forecast.target.name)
    first, *others = answers(forecast)
    return {
        "title": name if len(name) <= _LONGEST_TITLE else f"{name[:_LONGEST_TITLE]}…",
        "target": name,
        "instruments": [printable(each.name) for each in forecast.instruments],
        "answer": first,
        "other_answers": others,
        "warnings": plain(forecast.warnings),
        "key_facts": key_facts(forecast),
        "goals_table": goals_table(forecast),
    }


def _verification(forecast: Forecast) -> dict[str, Any] | None:
    found = forecast.verification
    if found is None:
        return None
    tables = [table for each in found.geometries for table in profile_tables(each)[:1]]
    refits = [table for each in found.geometries if (table := refits_table(each)) is not None]
    return {
        "verdict": verdict_sentence(found),
        "reasons": plain(reasons(found)),
        "figure": drawn(profile_picture(found)),
        "tables": [*tables, *refits],
        "procedure": procedure(found),
    }


def drawn(figure: Picture | None) -> dict[str, Any] | None:
    """Return a figure for a template; its svg is our own and not escaped again."""
    from markupsafe import Markup

    if figure is None:
        return None
    svg = Markup(figure.svg)  # noqa: S704  made by drawing.py, which escapes every text
    return {"name": figure.name, "svg": svg, "caption": figure.caption}


def plain(sentences: tuple[str, ...] | list[str]) -> list[str]:
    """Return sentences without characters that steer what shows them."""
    return [printable(sentence) for sentence in sentences]


def environment() -> Environment:
    """Return what renders the templates that ship."""
    from jinja2 import Environment, FunctionLoader, StrictUndefined

    folder = shipped_folder("templates")
    return Environment(
        loader=FunctionLoader(lambda name: folder.joinpath(name).read_text(encoding="utf-8")),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        keep_trailing_newline=True,
    )
