"""The page: valid, self-contained, semantic, legible, harmless to any name."""

from __future__ import annotations

import re
from itertools import pairwise
from typing import Any

import html5lib
import pytest
from jinja2 import Environment, nodes

from exptime._resources import shipped_folder
from exptime.report.page import forecast_html_fragment, forecast_page
from exptime.report.sentences import CAUTION, answers
from exptime.report.words import printable
from tests.report import results
from tests.report.results import EVIL, STATES

TEMPLATES = ("forecast.html", "forecast_parts.html", "forecast_fragment.html", "forecast.css")
# The other states differ from these in sentences alone, which have tests of their own.
SHOWN = (
    *("normal", "known", "unconstrained", "prior-limited", "hidden-spots", "evil-names"),
    *("one-exposure", "no-goal"),
)


@pytest.fixture(scope="module")
def pages() -> dict[str, str]:
    return {state: forecast_page(STATES[state]()) for state in SHOWN}


def tree(page: str) -> Any:
    parser = html5lib.HTMLParser(strict=True, namespaceHTMLElements=False)
    return parser.parse(page)


def words(element: Any) -> str:
    return " ".join("".join(element.itertext()).split())


@pytest.mark.parametrize("state", SHOWN)
def test_every_state_is_valid_html(pages: dict[str, str], state: str) -> None:
    """A strict parser finds no error, and no id stands twice."""
    root = tree(pages[state])
    ids = [each.get("id") for each in root.iter() if each.get("id")]
    assert len(ids) == len(set(ids))
    for each in root.iter():
        if each.get("aria-labelledby"):
            assert each.get("aria-labelledby") in ids


@pytest.mark.parametrize("state", ["normal", "evil-names", "unconstrained"])
def test_fragments_are_valid_html(state: str) -> None:
    """A piece for a notebook, in a body of its own."""
    fragment = forecast_html_fragment(STATES[state]())
    root = tree(f"<!DOCTYPE html><html><head><title>x</title></head><body>{fragment}</body></html>")
    assert answers(STATES[state]())[0] in words(root)


@pytest.mark.parametrize("state", SHOWN)
def test_the_answer_is_the_first_thing_on_the_page(pages: dict[str, str], state: str) -> None:
    """It is the heading, and nothing is written before it."""
    body = tree(pages[state]).find("body")
    answer = answers(STATES[state]())[0]
    assert words(body).startswith(answer)
    assert words(body.find(".//h1")) == answer


@pytest.mark.parametrize("state", SHOWN)
def test_nothing_is_loaded_from_outside(pages: dict[str, str], state: str) -> None:
    """Addresses stand in citation links alone; no script, import or outer file."""
    page = pages[state]
    root = tree(page)
    tags = {each.tag for each in root.iter() if isinstance(each.tag, str)}
    assert not tags & {"script", "iframe", "object", "embed", "img", "video", "base", "form"}
    for each in root.iter():
        for name in ("src", "srcset", "data", "poster", "action"):
            assert each.get(name) is None
        target = each.get("href") or ""
        if target and each.tag != "a":
            assert target.startswith(("#", "data:"))
    links = re.findall(r'<a href="(https://[^"]+)"', page)
    assert len(re.findall("http", page)) == len(links) > 0
    assert "@import" not in page
    assert all(each.startswith("#") for each in re.findall(r"url\(([^)]*)\)", page))


def test_headings_tables_and_figures_say_what_they_are(pages: dict[str, str]) -> None:
    """Language, title, levels in order, captions, and scopes of headers."""
    root = tree(pages["normal"])
    assert root.get("lang") == "en"
    assert words(root.find(".//title")).startswith("Candidate A")
    levels = [int(each.tag[1]) for each in root.iter() if re.fullmatch(r"h[1-6]", str(each.tag))]
    assert levels[0] == 1
    assert levels.count(1) == 1
    assert all(after - before <= 1 for before, after in pairwise(levels))
    for table in root.iter("table"):
        assert words(table.find("caption"))
        assert all(each.get("scope") in ("col", "row") for each in table.iter("th"))
    drawn = list(root.iter("figure"))
    assert len(drawn) == 5
    for figure in drawn:
        assert words(figure.find("figcaption"))
        svg = next(each for each in figure if str(each.tag).endswith("svg"))
        assert svg.get("role") == "img"
        assert svg.get("aria-label")


def test_the_page_keeps_its_order(pages: dict[str, str]) -> None:
    """Answer, figures, tables; what it rests on, doubts, method, inputs; the paragraph."""
    page = pages["normal"]
    marks = (
        *("<h1>", 'class="key"', 'id="figure-share"', 'id="figure-precision"', 'id="tables"'),
        *('id="basis"', 'id="limits"', 'id="method"', 'id="inputs"', "seed"),
        *('id="feasibility"', CAUTION[:30]),
    )
    places = [page.index(mark) for mark in marks[:9]]
    places += [page.index(mark, places[-1]) for mark in marks[9:]]
    assert places == sorted(places)


def test_inputs_are_echoed_with_their_lines(pages: dict[str, str]) -> None:
    """Key, value as written, and line."""
    root = tree(pages["normal"])
    rows = [[words(cell) for cell in row] for row in root.iter("tr")]
    assert ["spin_frequency", "317 Hz", "2"] in rows
    assert ["flux.value", "2.2e-13 erg s-1 cm-2", "3"] in rows


def test_names_are_text_wherever_they_stand(pages: dict[str, str]) -> None:
    """Markup, braces, marks that turn the line and control characters do nothing."""
    page = pages["evil-names"]
    root = tree(page)
    assert not list(root.iter("b"))
    assert "<b>A</b>" not in page
    assert "\x1b" not in page
    assert "\u202e" not in page
    isolated = [words(each) for each in root.iter("bdi")]
    assert words_of(printable(EVIL)) in isolated
    assert len(words(root.find(".//title"))) < 120


def words_of(text: str) -> str:
    return " ".join(text.split())


def test_warnings_stand_before_the_numbers(pages: dict[str, str]) -> None:
    """And the section is left out where there are none."""
    page = pages["hidden-spots"]
    assert page.index('id="warnings"') < page.index('class="key"')
    assert 'id="warnings"' not in pages["normal"]


def test_known_geometry_shows_no_shares(pages: dict[str, str]) -> None:
    """There is one geometry: no spread, no share."""
    root = tree(pages["known"])
    assert "Share of the geometries" not in words(root)
    assert len(list(root.iter("figure"))) == 4


def test_what_is_prior_limited_is_marked(pages: dict[str, str]) -> None:
    """In the rows of the mass, and explained."""
    root = tree(pages["prior-limited"])
    mass = next(x for x in root.iter("table") if words(x.find("caption")).startswith("Mass"))
    assert words(mass).count("prior-limited") == 5
    assert "not to be quoted as a measurement" in words(root)


def test_pages_are_the_same_every_time(pages: dict[str, str]) -> None:
    """The same record gives the same file."""
    assert forecast_page(results.normal()) == pages["normal"]


def test_templates_do_no_arithmetic() -> None:
    """Numbers arrive ready; templates only place them."""
    arithmetic = (nodes.BinExpr, nodes.UnaryExpr)
    allowed = (nodes.And, nodes.Or, nodes.Not)
    for name in TEMPLATES:
        text = shipped_folder("templates").joinpath(name).read_text(encoding="utf-8")
        parsed = Environment(autoescape=True).parse(text)
        found = [x for x in parsed.find_all(arithmetic) if not isinstance(x, allowed)]
        assert found == [], name


def test_a_template_with_arithmetic_is_noticed() -> None:
    """The check above can fail."""
    parsed = Environment(autoescape=True).parse("{{ 2 * exposure }}")
    assert list(parsed.find_all((nodes.BinExpr,)))


def luminance(color: str) -> float:
    """Relative luminance of WCAG 2.1, section 'relative luminance'."""
    channels = [int(color[start : start + 2], 16) / 255.0 for start in (1, 3, 5)]
    linear = [x / 12.92 if x <= 0.04045 else ((x + 0.055) / 1.055) ** 2.4 for x in channels]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def contrast(one: str, other: str) -> float:
    high, low = sorted((luminance(one), luminance(other)), reverse=True)
    return (high + 0.05) / (low + 0.05)


@pytest.mark.external
def test_contrast_reaches_level_aa_on_every_paper() -> None:
    """WCAG 2.1: 4.5 to 1 for text (1.4.3), 3 to 1 for lines of figures (1.4.11)."""
    css = shipped_folder("templates").joinpath("forecast.css").read_text(encoding="utf-8")
    papers = [
        dict(re.findall(r"--([a-z0-9-]+): (#[0-9a-f]{6})", block))
        for block in re.findall(r"\{[^{}]*--paper[^{}]*\}", css)
    ]
    assert len(papers) == 3
    assert contrast("#ffffff", "#000000") == pytest.approx(21.0)
    for paper in papers:
        for text in ("ink", "soft", "line-1", "line-2", "line-3"):
            assert contrast(paper[text], paper["paper"]) >= 4.5, (text, paper)
        for line in ("faint", "line-4"):
            assert contrast(paper[line], paper["paper"]) >= 3.0, (line, paper)
