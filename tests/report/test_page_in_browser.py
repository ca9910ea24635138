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
    "--hide-scrollbars",
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
window.onload = () => {
  const seen = [...document.querySelectorAll("iframe")].map((view) => {
    const inner = view.contentDocument, root = inner.documentElement;
    const style = (each) => view.contentWindow.getComputedStyle(each);
    const labels = [...inner.querySelectorAll("svg text")];
    const box = (each) => each.getBoundingClientRect();
    const names = (some) => some.map((each) => each.textContent);
    return {
      width: root.clientWidth,
      needed: root.scrollWidth,
      wide: names(labels.filter((x) => box(x).left < -1 || box(x).right > root.clientWidth + 1)),
      paper: style(inner.body).backgroundColor,
      ink: style(inner.body).color,
      label: style(labels[0]).fill,
      heading: box(inner.querySelector("h1")).top,
    };
  });
  document.body.textContent = JSON.stringify(seen);
};
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


def look(folder: Path, scheme: str, *views: tuple[str, int]) -> Any:
    """Return what the pages measure in frames of these widths."""
    frames = "".join(
        f'<iframe style="border:0;width:{width}px;height:800px" '
        f'srcdoc="{html.escape(forecast_page(STATES[state]()), quote=True)}"></iframe>'
        for state, width in views
    )
    file = folder / "look.html"
    file.write_text(
        f'<!DOCTYPE html><meta charset="utf-8"><title>x</title><body>{frames}'
        f"<script>{MEASURE}</script>",
        encoding="utf-8",
    )
    shown = run(folder, scheme, "--window-size=1400,900", "--dump-dom", file.as_uri())
    found = re.search(r"\[\{.*\}\]", html.unescape(shown.split("<body>")[1]))
    assert found is not None, shown[:500]
    return json.loads(found.group(0))


def test_nothing_sticks_out_on_phone_or_laptop(tmp_path: Path) -> None:
    """The page never scrolls sideways, no label is cut, on light paper the ink is dark."""
    views = [("normal", 390), ("evil-names", 390), ("normal", 1280), ("evil-names", 1280)]
    for view, seen in zip(views, look(tmp_path, LIGHT, *views), strict=True):
        assert seen["width"] == view[1]
        assert seen["needed"] <= seen["width"], view
        assert seen["wide"] == [], view
        assert seen["heading"] < 60, view
        assert seen["paper"] == "rgb(252, 252, 250)"
        assert seen["label"] == seen["ink"] == "rgb(32, 38, 43)"


def test_labels_of_figures_are_light_on_dark_paper(tmp_path: Path) -> None:
    """Text in figures has the ink of the page."""
    (seen,) = look(tmp_path, DARK, ("normal", 1280))
    assert seen["paper"] == "rgb(20, 24, 27)"
    assert seen["label"] == seen["ink"] == "rgb(227, 231, 232)"


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
