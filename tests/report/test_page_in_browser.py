"""The page as a browser shows it: widths, light and dark, print."""

from __future__ import annotations

import html
import json
import re
import shutil
import subprocess
from pathlib import Path
from typing import Any

import pytest

from exptime.report.page import forecast_page
from tests.report.results import STATES

BROWSER = shutil.which("chromium") or shutil.which("chromium-browser")
FLAGS = (
    *("--headless", "--no-sandbox", "--disable-dev-shm-usage", "--disable-gpu", "--no-first-run"),
    *("--disable-background-networking", "--disable-component-update", "--disable-sync"),
)
DARK = "--blink-settings=preferredColorScheme=0"
LIGHT = "--blink-settings=preferredColorScheme=1"

pytestmark = pytest.mark.skipif(
    BROWSER is None,
    reason="NO BROWSER: chromium is not installed, so nothing was looked at "
    "(apt-get install chromium)",
)

# Measured in the page itself: what sticks out, and what colours things have.
MEASURE = """
const view = document.getElementById("view"), inner = view.contentDocument;
const root = inner.documentElement, style = (each) => view.contentWindow.getComputedStyle(each);
const wide = [...inner.querySelectorAll("svg text")].filter((each) => {
  const box = each.getBoundingClientRect();
  return box.left < -1 || box.right > root.clientWidth + 1;
}).map((each) => each.textContent);
const tiny = [...inner.querySelectorAll("svg text")].filter((each) =>
  each.getBoundingClientRect().height < 9).map((each) => each.textContent);
document.body.textContent = JSON.stringify({
  width: root.clientWidth, needed: root.scrollWidth, wide: wide, tiny: tiny,
  paper: style(inner.body).backgroundColor, ink: style(inner.body).color,
  label: style(inner.querySelector("svg text")).fill,
  heading: inner.querySelector("h1").getBoundingClientRect().top,
});
"""


def run(folder: Path, *options: str) -> str:
    assert BROWSER is not None
    done = subprocess.run(
        [BROWSER, *FLAGS, f"--user-data-dir={folder / 'browser'}", *options],
        capture_output=True,
        text=True,
        check=True,
        timeout=120,
    )
    return done.stdout


def look(folder: Path, state: str, width: int, scheme: str) -> Any:
    """Return what the page measures in a window of this width."""
    page = html.escape(forecast_page(STATES[state]()), quote=True)
    frame = f'<iframe id="view" style="border:0;width:{width}px;height:800px" srcdoc="{page}">'
    script = f"<script>window.onload = () => {{ {MEASURE} }}</script>"
    file = folder / "look.html"
    file.write_text(
        f'<!DOCTYPE html><meta charset="utf-8"><title>x</title><body>{frame}</iframe>{script}',
        encoding="utf-8",
    )
    shown = run(folder, scheme, "--window-size=1400,900", "--dump-dom", file.as_uri())
    found = re.search(r"\{.*\}", html.unescape(shown.split("<body>")[1]))
    assert found is not None, shown[:500]
    return json.loads(found.group(0))


@pytest.mark.parametrize("width", [390, 1280])
@pytest.mark.parametrize("state", ["normal", "evil-names"])
def test_nothing_sticks_out_sideways(tmp_path: Path, state: str, width: int) -> None:
    """The page never scrolls sideways, no label is cut, and every label can be read."""
    seen = look(tmp_path, state, width, LIGHT)
    assert seen["needed"] <= seen["width"]
    assert seen["wide"] == []
    assert seen["tiny"] == []
    assert seen["heading"] < 60


@pytest.mark.parametrize(
    ("scheme", "paper", "ink"),
    [
        (LIGHT, "rgb(252, 252, 250)", "rgb(32, 38, 43)"),
        (DARK, "rgb(20, 24, 27)", "rgb(227, 231, 232)"),
    ],
    ids=["light", "dark"],
)
def test_labels_of_figures_follow_the_paper(
    tmp_path: Path, scheme: str, paper: str, ink: str
) -> None:
    """Text in figures has the ink of the page on light and on dark paper."""
    seen = look(tmp_path, "normal", 1280, scheme)
    assert (seen["paper"], seen["ink"], seen["label"]) == (paper, ink, ink)


@pytest.mark.skipif(
    shutil.which("pdftotext") is None or shutil.which("pdfinfo") is None,
    reason="NO PDF TOOLS: pdftotext and pdfinfo are not installed (apt-get install poppler-utils)",
)
def test_it_prints_on_a4_with_the_answer_and_two_figures_first(tmp_path: Path) -> None:
    """A4 pages, few of them, the first with answer, shares and precision."""
    page, printed = tmp_path / "page.html", tmp_path / "page.pdf"
    page.write_text(forecast_page(STATES["normal"]()), encoding="utf-8")
    run(tmp_path, DARK, "--no-pdf-header-footer", f"--print-to-pdf={printed}", page.as_uri())
    facts = subprocess.run(["pdfinfo", printed], capture_output=True, text=True, check=True).stdout
    assert "A4" in facts
    pages = re.search(r"Pages:\s+(\d+)", facts)
    assert pages is not None
    assert int(pages.group(1)) <= 8
    text = subprocess.run(
        ["pdftotext", "-f", "1", "-l", "1", printed, "-"],
        capture_output=True,
        text=True,
        check=True,
    ).stdout
    words = " ".join(text.split())
    assert words.startswith("5 per cent in radius: half of the geometries by 1.2 Ms")
    assert "Share of the geometries that reach each goal" in words
    assert "One sigma over the value" in words
