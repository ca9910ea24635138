"""Verifications as text, JSON and page: the verdict first, and whole in every state."""

from __future__ import annotations

import json
from collections.abc import Callable
from dataclasses import replace

import html5lib
import pytest

from exptime.report.json_document import forecast_document
from exptime.report.page import forecast_page
from exptime.report.proof import verdict_sentence
from exptime.report.proof_figure import profile_picture
from exptime.report.text import forecast_text
from exptime.report.verification import VerificationResult
from exptime.study.verify_records import Verification
from tests.report import results
from tests.report.verifications import STATES, holds, refitted, three

every_state = pytest.mark.parametrize("state", STATES.values(), ids=STATES.keys())


def test_the_verdict_stands_first_and_names_every_geometry() -> None:
    """One sentence, grouped by verdict."""
    assert verdict_sentence(holds()) == "After 1 Ms the bound holds at the geometry given."
    assert verdict_sentence(three()) == (
        "After 1 Ms the bound holds at the median geometry; the answer is multimodal at the 16 per "
        "cent geometry; the bound is optimistic at the 84 per cent geometry."
    )
    two = replace(
        three(), geometries=(three().geometries[0], replace(three().geometries[0], label="x"))
    )
    assert verdict_sentence(two).endswith("the bound holds at the median geometry and x.")
    line = VerificationResult(three()).to_text(100).splitlines()[0]
    assert line.startswith("After 1 Ms the bound holds at the median geometry")


@every_state
@pytest.mark.parametrize("width", [60, 80, 100])
def test_text_keeps_its_width_and_says_everything(
    state: Callable[[], Verification], width: int
) -> None:
    """No line is longer; no character steers a terminal."""
    text = VerificationResult(state()).to_text(width)
    assert max(map(len, text.splitlines())) <= width
    assert "\x1b" not in text
    assert "within hard limits" in " ".join(text.split())


def test_numbers_of_refits_stand_in_the_text() -> None:
    """Scatter, bias, coverage with its error, and where the others went."""
    text = " ".join(str(VerificationResult(refitted())).split())
    for piece in ("399 of 400", "69.4 ± 2.3 %", "12, at 11.50 km (11.20–11.90 km)", "1.05", "−0.1"):
        assert piece in text, piece


def test_an_open_interval_is_said_and_is_null() -> None:
    """Infinity is a word in text and null in JSON."""
    result = VerificationResult(three())
    assert "−0.20 open" in " ".join(result.to_text().split())
    (profile, *_) = json.loads(result.to_json())["geometries"][2]["profiles"]
    assert profile["interval_68"] == [11.8, None]
    assert profile["ratio"] is None


@every_state
def test_json_is_strict_and_complete(state: Callable[[], Verification]) -> None:
    """No NaN or infinity; the gravest verdict stands for all."""

    def refuse(constant: str) -> None:
        raise AssertionError(constant)

    result = VerificationResult(state())
    document = json.loads(result.to_json(), parse_constant=refuse)
    assert document["schema"] == "exptime.verify/1"
    assert document["verdict"] == result.verdict
    assert len(document["geometries"]) == len(state().geometries)


def test_the_gravest_verdict_is_the_result() -> None:
    """And ratios come by geometry."""
    result = VerificationResult(three())
    assert result.verdict == "multimodal"
    assert result.ratios("mass") == pytest.approx(
        {
            "the median geometry": 1.0,
            "the 16 per cent geometry": 1.0,
            "the 84 per cent geometry": 1.0,
        }
    )


@every_state
def test_the_page_is_strict_html_and_loads_nothing(state: Callable[[], Verification]) -> None:
    """Parsed strictly; no source outside, no script."""
    page = VerificationResult(state()).to_html()
    html5lib.HTMLParser(strict=True).parse(page)
    assert "<script" not in page
    assert "src=" not in page
    assert "<b>A</b>" not in page
    fragment = VerificationResult(state())._repr_html_()
    html5lib.HTMLParser(strict=True).parseFragment(fragment)


def test_the_same_numbers_draw_the_same_figure() -> None:
    """To the byte; other numbers do not."""
    assert profile_picture(three()).svg == profile_picture(three()).svg
    assert profile_picture(three()).svg != profile_picture(holds()).svg


def test_the_figure_draws_profiles_beside_the_parabola() -> None:
    """The curve of a Gaussian profile lies on the parabola, that of an open one does not."""
    svg = profile_picture(three()).svg
    assert "84 per cent geometry" in svg
    assert "rise of the deviance" in svg
    assert "compactness" in svg


def test_a_forecast_carries_its_verdict_everywhere() -> None:
    """Text, JSON and page; without one there is no trace of it."""
    plain = results.known_geometry()
    proven = replace(plain, verification=three())
    sentence = verdict_sentence(three())
    assert sentence in " ".join(forecast_text(proven).split())
    page = forecast_page(proven)
    html5lib.HTMLParser(strict=True).parse(page)
    assert sentence in page
    assert 'id="figure-profiles"' in page
    summary = forecast_document(proven)["verification"]
    assert (summary["verdict"], summary["sentence"]) == ("multimodal", sentence)
    ratio = summary["geometries"][2]["ratio"]
    assert ratio["radius"] is None
    assert ratio["mass"] == pytest.approx(1.0)
    json.dumps(forecast_document(proven), allow_nan=False)
    assert "verification" not in forecast_document(plain)
    assert "Is the bound valid here" not in forecast_text(plain) + forecast_page(plain)
