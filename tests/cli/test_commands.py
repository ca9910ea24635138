"""Whole commands as users run them, from files to answers."""

from __future__ import annotations

import json
import os
from pathlib import Path
from typing import Any

import html5lib
import jsonschema
import numpy as np
import pytest

from tests.cli import schemas
from tests.cli.running import Run, run, run_fresh
from tests.cli.targets import DRAWN, KNOWN, changed

SOFT = ("-i", "soft-concentrator")


@pytest.fixture
def folder(empty_folder: Path) -> Path:
    """Return a working directory with both targets."""
    Path("known.yaml").write_text(KNOWN, encoding="utf-8")
    Path("drawn.yaml").write_text(DRAWN, encoding="utf-8")
    return empty_folder


def _json(*arguments: str, given: str = "") -> Any:
    """Run a command for JSON and return the document, in which NaN is refused."""
    shown = run(*arguments, "--format", "json", given=given)
    assert (shown.status, shown.errors) == (0, ""), shown.errors

    def refuse(constant: str) -> None:
        raise AssertionError(constant)

    return json.loads(shown.output, parse_constant=refuse)


def test_start_writes_a_target_that_checks_and_says_what_is_next(empty_folder: Path) -> None:
    """The whole output is compared."""
    assert run("start", "demo") == Run(
        0,
        "Wrote demo.yaml, an invented star: put your numbers in its place. Next:\n"
        "  exptime check demo.yaml\n"
        "  exptime forecast demo.yaml -i soft-concentrator\n",
        "",
    )
    assert os.listdir() == ["demo.yaml"]
    assert run("check", "demo.yaml").status == 0


def test_start_never_overwrites_without_force(empty_folder: Path) -> None:
    """The old file stands; --force replaces it."""
    Path("demo.yaml").write_text("mine", encoding="utf-8")
    refused = run("start", "demo")
    assert refused == Run(
        2,
        "",
        "exptime: demo.yaml: the file exists already. "
        "Choose another name, or replace it with --force.\n",
    )
    assert Path("demo.yaml").read_text(encoding="utf-8") == "mine"
    assert run("start", "demo", "--force").status == 0
    assert "spin_frequency" in Path("demo.yaml").read_text(encoding="utf-8")


def test_start_tells_a_script_the_file(empty_folder: Path) -> None:
    """The name of the target may hold anything, the name of the file does not."""
    told = json.loads(run("start", "A/B: <i>[red]", "--format", "json").output)
    assert told["file"] == "A-B-i-red.yaml"
    assert 'name: "A/B: <i>[red]"' in Path(told["file"]).read_text(encoding="utf-8")


def test_instruments_lists_at_least_three_and_says_that_they_are_invented() -> None:
    """Each id works after -i, each name says that it is invented."""
    document = _json("instruments")
    jsonschema.validate(document, schemas.INSTRUMENTS)
    shown = run("instruments")
    assert "soft-concentrator" in [entry["id"] for entry in document["instruments"]]
    for entry in document["instruments"]:
        assert "invented" in entry["name"].lower()
        assert entry["id"] in shown.output
    assert max(map(len, shown.output.splitlines())) <= 80


def test_check_shows_the_assumptions_and_computes_nothing(folder: Path) -> None:
    """What was not given is said; piped text keeps to 80 columns."""
    shown = run("check", "drawn.yaml", *SOFT)
    assert (shown.status, shown.errors) == (0, "")
    assert "Unknown source" in shown.output
    assert "radius was not given" in " ".join(shown.output.split())
    assert max(map(len, shown.output.splitlines())) <= 80
    assert isinstance(_json("check", "drawn.yaml", *SOFT), dict)


def test_a_target_comes_from_standard_input(folder: Path) -> None:
    """`-` reads the same."""
    from_file = _json("pulse", "known.yaml")
    assert _json("pulse", "-", given=KNOWN) == from_file


def test_pulse_is_flux_in_phase_bins_and_energies(folder: Path) -> None:
    """Shape, units and bin centres as documented."""
    document = _json("pulse", "known.yaml", "--energies", "0.3,0.5,1 keV", "--phases", "16")
    jsonschema.validate(document, schemas.pulse(16, 3))
    assert document["energy_kev"] == [0.3, 0.5, 1.0]
    np.testing.assert_allclose(document["phase"], (np.arange(16) + 0.5) / 16, rtol=1e-14)


def test_pulse_with_an_instrument_counts_in_proportion_to_exposure(folder: Path) -> None:
    """Source and background both grow with the exposure."""
    short = _json("pulse", "known.yaml", *SOFT, "--exposure", "100ks")
    long = _json("pulse", "known.yaml", *SOFT, "--exposure", "300ks")
    channels = len(short["channel_kev"]) - 1
    jsonschema.validate(short, schemas.counts(len(short["phase"]), channels))
    for key in ("source_counts", "background_counts"):
        # Rounding only: the same rates times another exposure.
        np.testing.assert_allclose(long[key], 3.0 * np.array(short[key]), rtol=1e-12)


@pytest.fixture(scope="module")
def known_forecast(tmp_path_factory: pytest.TempPathFactory) -> Any:
    """Return the document of a forecast at a known geometry."""
    file = tmp_path_factory.mktemp("known") / "known.yaml"
    file.write_text(KNOWN, encoding="utf-8")
    goals = ("--goal", "radius 5 %", "--goal", "mass 5 %")
    return _json("forecast", str(file), *SOFT, "--exposure", "100ks,300ks,1Ms", *goals)


def test_a_known_geometry_has_equal_quantiles(known_forecast: Any) -> None:
    """There is one geometry, and the document is complete."""
    jsonschema.validate(known_forecast, schemas.forecast(3))
    assert known_forecast["geometry"]["known"] is True
    assert known_forecast["exposure_s"] == [1e5, 3e5, 1e6]
    for quantity in ("mass_msun", "radius_km", "compactness"):
        for kind in ("sigma", "data_sigma"):
            curves = known_forecast[quantity][kind]
            assert curves["p16"] == curves["p50"] == curves["p84"]


def test_more_exposure_is_never_worse(known_forecast: Any) -> None:
    """Sigma falls with exposure and never below the root of it."""
    sigma = known_forecast["radius_km"]["sigma"]["p50"]
    assert sigma[0] > sigma[1] > sigma[2]
    # Priors only slow the fall: it is never steeper than exposure^-1/2.
    assert sigma[2] / sigma[0] > 10**-0.5 * (1 - 1e-9)


def test_goals_come_back_in_the_order_asked(known_forecast: Any) -> None:
    """With the fraction at each exposure."""
    goals = known_forecast["goals"]
    assert [(goal["quantity"], goal["precision"]) for goal in goals] == [
        ("radius", pytest.approx(0.05)),
        ("mass", pytest.approx(0.05)),
    ]


@pytest.mark.slow
def test_drawn_geometries_spread_and_repeat_with_their_seed(folder: Path) -> None:
    """The same seed gives the same numbers, quantiles are ordered."""
    options = (*SOFT, "--exposure", "1Ms", "--draws", "16", "--goal", "radius 5 %")
    first = _json("forecast", "drawn.yaml", *options, "--jobs", "1")
    jsonschema.validate(first, schemas.forecast(1))
    assert first["geometry"]["known"] is False
    assert first["geometry"]["draws"] == 16
    spread = first["radius_km"]["data_sigma"]
    values = [np.inf if spread[key][0] is None else spread[key][0] for key in ("p16", "p50", "p84")]
    assert values == sorted(values)
    assert values[0] < values[2]
    assert _json("forecast", "drawn.yaml", *options, "--jobs", "2") == first


def test_an_unreachable_fraction_is_the_users_to_mend(folder: Path) -> None:
    """Status 2, the range that can be reached, and the old page stands."""
    text = DRAWN + "inclination: {value: 0 deg, uncertainty: 0 deg}\n"
    Path("page.html").write_text("old", encoding="utf-8")
    options = (*SOFT, "--format", "html", "--output", "page.html", "--draws", "8")
    shown = run("forecast", "-", *options, given=text)
    assert shown.status == 2
    assert "cannot be reached" in shown.errors
    assert len(shown.errors.splitlines()) == 1
    assert Path("page.html").read_text(encoding="utf-8") == "old"


def test_a_fresh_process_gives_the_answer_on_standard_output_alone(folder: Path) -> None:
    """Nothing is on standard error, the document can be piped on."""
    shown = run_fresh("forecast", "known.yaml", *SOFT, "--exposure", "1Ms", "--format", "json")
    assert (shown.status, shown.errors) == (0, "")
    jsonschema.validate(json.loads(shown.output), schemas.forecast(1))


def test_the_page_is_one_html_document_that_loads_nothing(folder: Path) -> None:
    """Markup in the name of the target is text there."""
    text = changed(KNOWN, ("name: Known source", 'name: "<script>alert(1)</script> [red]x"'))
    Path("known.yaml").write_text(text, encoding="utf-8")
    options = (*SOFT, "--exposure", "300ks,1Ms", "--goal", "radius 5 %")
    shown = run("forecast", "known.yaml", *options, "--format", "html", "--output", "page.html")
    assert shown == Run(0, "", "")
    page = Path("page.html").read_text(encoding="utf-8")
    html5lib.HTMLParser(strict=True).parse(page)
    assert "<script>alert" not in page
    assert "&lt;script&gt;" in page
    assert page.count("<link") == 1
    for tag in ("src=", '<link rel="icon" href=', "@import", "url("):
        for piece in page.split(tag)[1:]:
            assert piece.lstrip("\"'").startswith(("data:", "#")), piece[:80]


def test_the_text_report_keeps_to_80_columns_when_piped(folder: Path) -> None:
    """And shows markup in a name as it is."""
    text = changed(KNOWN, ("name: Known source", 'name: "[red]Known[/red] source"'))
    shown = run("forecast", "-", *SOFT, "--exposure", "300ks,1Ms", given=text)
    assert (shown.status, shown.errors) == (0, "")
    assert "[red]Known[/red] source" in shown.output
    assert max(map(len, shown.output.splitlines())) <= 80
    assert "\x1b" not in shown.output
