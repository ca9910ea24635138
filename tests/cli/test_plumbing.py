"""What a command passes on and where the answer goes, with stand-ins for the science."""

from __future__ import annotations

import os
import sys
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import numpy as np
import pytest

import exptime
from exptime.cli import main
from exptime.errors import (
    ExptimeError,
    Fault,
    InputError,
    MissingDependencyError,
    UnreachableError,
    WriteError,
)
from exptime.progress import silent
from tests.cli.running import Run, run


@dataclass(frozen=True)
class Answer:
    """A result that names itself."""

    name: str

    def to_text(self, width: int = 80) -> str:
        return f"{self.name} at {width} columns"

    def to_json(self) -> str:
        return f'{{"answer": "{self.name}"}}'

    def to_html(self) -> str:
        return f"<html>{self.name}</html>"


@dataclass
class Science:
    """Stand-ins for the public functions that remember what they were called with."""

    calls: list[tuple[str, tuple[Any, ...], dict[str, Any]]] = field(default_factory=list)
    error: BaseException | None = None

    def called(self, name: str, *arguments: Any, **options: Any) -> Any:
        self.calls.append((name, arguments, options))
        if name in ("read_target", "read_instrument"):
            if str(arguments[0]).startswith("bad"):
                raise InputError([Fault("one thing.", arguments[0]), Fault("another.", "line 2")])
            return f"{name}({arguments[0]})"
        if self.error is not None:
            raise self.error
        return Answer(name)


@dataclass(frozen=True)
class Numbers:
    """Equal to a Quantity of exactly these numbers in this unit."""

    numbers: float | tuple[float, ...]
    unit: str

    def __eq__(self, other: object) -> bool:
        unit, value = getattr(other, "unit", None), getattr(other, "value", None)
        return str(unit) == self.unit and np.array_equal(np.asarray(value), self.numbers)


@pytest.fixture
def science(monkeypatch: pytest.MonkeyPatch, empty_folder: Path) -> Science:
    """Put stand-ins in the place of the public functions, in an empty folder."""
    stand_in = Science()
    for name in ("read_target", "read_instrument", "forecast", "pulse", "expected_counts", "check"):

        def call(*arguments: Any, _name: str = name, **options: Any) -> Any:
            return stand_in.called(_name, *arguments, **options)

        monkeypatch.setattr(exptime, name, call, raising=False)
    return stand_in


FORECAST = ("forecast", "a.yaml", "-i", "soft")


def test_forecast_passes_every_option_on(science: Science) -> None:
    """Texts become numbers; what is not given has the documented default."""
    options = ("--exposure", "300ks,1Ms", "--goal", "radius 5 %", "--goal", "mass 0.1")
    more = ("--margin", "15 %", "--draws", "64", "--seed", "7", "--jobs", "3", "--fixed-star")
    shown = run(*FORECAST, *options, *more)
    assert shown == Run(0, "forecast at 80 columns\n", "")
    assert science.calls[-1] == (
        "forecast",
        ("read_target(a.yaml)", "read_instrument(soft)"),
        {
            "exposures": Numbers((3e5, 1e6), "s"),
            "goals": [("radius", 0.05), ("mass", 0.1)],
            "margin": pytest.approx(0.15),
            "draws": 64,
            "seed": 7,
            "jobs": 3,
            "fixed_star": True,
            "verify": False,
            "simulations": 0,
            "progress": silent,
        },
    )


def test_forecast_has_the_documented_defaults(science: Science) -> None:
    """13 exposures from 100 ks to 3 Ms, 5 % in radius, 128 draws, seed 1, usable cores."""
    run(*FORECAST)
    options = science.calls[-1][2]
    assert len(options["exposures"]) == 13
    assert (options["draws"], options["seed"], options["margin"]) == (128, 1, 0.0)
    assert options["jobs"] == len(os.sched_getaffinity(0))
    assert list(options["goals"]) == [("radius", 0.05)]
    assert not options["fixed_star"]


@pytest.mark.parametrize(
    ("kind", "content"),
    [
        ("text", "forecast at 80 columns\n"),
        ("json", '{"answer": "forecast"}\n'),
        ("html", "<html>forecast</html>\n"),
    ],
)
def test_the_answer_goes_to_a_file_in_the_format_asked_for(
    science: Science, kind: str, content: str
) -> None:
    """Nothing is printed then."""
    shown = run(*FORECAST, "--format", kind, "--output", "answer")
    assert shown == Run(0, "", "")
    assert Path("answer").read_text(encoding="utf-8") == content
    assert os.listdir() == ["answer"]


def test_a_name_that_promises_another_format_is_remarked_on(science: Science) -> None:
    """The file is written as asked; --quiet leaves the remark out."""
    remark = "exptime: page.html holds text; --format html writes what its name says\n"
    assert run(*FORECAST, "--output", "page.html") == Run(0, "", remark)
    assert run("--quiet", *FORECAST, "--output", "page.html") == Run(0, "", "")


def test_options_for_messages_stand_before_or_after_the_command(science: Science) -> None:
    """Both places mean the same."""
    assert run(*FORECAST, "--quiet", "--output", "page.html") == Run(0, "", "")


def test_faults_of_options_and_files_are_reported_together(science: Science) -> None:
    """Every fault has its line and names option or file; nothing is computed."""
    options = ("--goal", "radis 5 %", "--margin", "15", "--draws", "many", "--exposure", "1 km")
    shown = run("forecast", "bad.yaml", "-i", "bad/profile", *options)
    assert shown.status == 2
    assert shown.output == ""
    assert shown.errors.splitlines() == [
        "exptime: --exposure: '1 km' is a length, not a time. Write for example 300ks,1Ms.",
        "exptime: --goal: 'radis 5 %' names no quantity. Did you mean radius? "
        "Goals are about mass, radius, compactness.",
        "exptime: --margin: '15' is not between 0 and 200 %. Write for example 15 %.",
        "exptime: --draws: 'many' is no whole number.",
        "exptime: bad.yaml: one thing.",
        "exptime: line 2: another.",
        "exptime: bad/profile: one thing.",
    ]
    assert [name for name, _, _ in science.calls] == ["read_target", "read_instrument"]


@pytest.mark.parametrize(
    ("error", "status", "message"),
    [
        (UnreachableError("no geometry reaches 0.99."), 2, "no geometry reaches 0.99."),
        (WriteError("disk full"), 1, "disk full"),
        (ExptimeError("the folder templates is missing"), 1, "the folder templates is missing"),
        (
            MissingDependencyError("the page", "jinja2"),
            1,
            "the page needs the package jinja2: pip install jinja2",
        ),
        (
            ModuleNotFoundError("No module named 'scipy'", name="scipy"),
            1,
            "the package scipy is missing; install exptime again with pip",
        ),
        (MemoryError(), 1, "the memory of this machine is not enough for this job"),
        (OSError(28, "No space left on device"), 1, "No space left on device"),
        (
            ZeroDivisionError("division\nby zero"),
            1,
            "internal error, ZeroDivisionError: division (--debug shows where)",
        ),
        (KeyboardInterrupt(), 130, "interrupted"),
        (
            InputError(Fault("bad \x1b[31mred\x1b[0m name", "a\nb")),
            2,
            "a b: bad \ufffd[31mred\ufffd[0m name",
        ),
    ],
    ids=lambda value: type(value).__name__ if isinstance(value, BaseException) else "",
)
def test_a_failure_is_one_message_and_leaves_the_output_file_alone(
    science: Science, error: BaseException, status: int, message: str
) -> None:
    """No traceback, no partial file, the old content stands."""
    Path("old.html").write_text("old", encoding="utf-8")
    science.error = error
    shown = run(*FORECAST, "--format", "html", "--output", "old.html")
    assert shown == Run(status, "", f"exptime: {message}\n")
    assert Path("old.html").read_text(encoding="utf-8") == "old"
    assert os.listdir() == ["old.html"]


def test_debug_shows_the_traceback(science: Science) -> None:
    """And the message after it."""
    science.error = ZeroDivisionError("x")
    shown = run(*FORECAST, "--debug")
    assert shown.status == 1
    assert shown.errors.startswith("Traceback (most recent call last):")
    assert "internal error, ZeroDivisionError: x" in shown.errors.splitlines()[-1]


@pytest.mark.parametrize(
    ("output", "message"),
    [
        ("missing/a.html", "missing/a.html: its folder does not exist. Make the folder first."),
        (".", ".: this is a folder, not a file. Name a file."),
        (
            "a.yaml",
            "a.yaml: this is the file that is read; the answer would replace it. "
            "Choose another name.",
        ),
    ],
)
def test_an_output_that_cannot_be_written_is_refused_before_computing(
    science: Science, output: str, message: str
) -> None:
    """A long job must not end in a missing folder."""
    Path("a.yaml").write_text("name: a\n", encoding="utf-8")
    assert run(*FORECAST, "--output", output) == Run(2, "", f"exptime: {message}\n")
    assert "forecast" not in [name for name, _, _ in science.calls]


def test_pulse_takes_energies_and_phases(science: Science) -> None:
    """Photon flux without an instrument."""
    shown = run("pulse", "-", "--energies", "300 eV, 0.5, 1 keV", "--phases", "16")
    assert shown == Run(0, "pulse at 80 columns\n", "")
    name, arguments, options = science.calls[-1]
    assert (name, arguments) == ("pulse", ("read_target(-)",))
    assert options["energies"] == Numbers((0.3, 0.5, 1.0), "keV")
    assert options["phases"] == 16


def test_pulse_with_an_instrument_gives_expected_counts(science: Science) -> None:
    """One exposure and the phase bins of the instrument."""
    shown = run("pulse", "a.yaml", "-i", "soft", "--exposure", "300ks", "--format", "json")
    assert shown == Run(0, '{"answer": "expected_counts"}\n', "")
    _, arguments, options = science.calls[-1]
    assert arguments == ("read_target(a.yaml)", "read_instrument(soft)", Numbers(3e5, "s"))
    assert options.get("phases") is None
    assert "energies" not in options


@pytest.mark.parametrize(
    ("options", "message"),
    [
        (("--exposure", "1Ms"), "--exposure needs an instrument. Add -i INSTRUMENT."),
        (("-i", "soft"), "-i needs one exposure. Add for example --exposure 300ks."),
        (
            ("-i", "soft", "--exposure", "1Ms", "--energies", "1 keV"),
            "--energies has no meaning with -i: the channels of the instrument stand. "
            "Leave one of them out.",
        ),
        (
            ("-i", "soft", "--exposure", "1Ms,2Ms"),
            "--exposure: '1Ms,2Ms' is 2 exposures; one is wanted here. Write for example 300 ks.",
        ),
        (("--phases", "3"), "--phases: 3 is not between 4 and 1024."),
    ],
)
def test_pulse_refuses_mixed_questions(
    science: Science, options: tuple[str, ...], message: str
) -> None:
    """Flux and counts are two questions; one message says what is missing."""
    assert run("pulse", "a.yaml", *options) == Run(2, "", f"exptime: {message}\n")


def test_check_reads_the_instrument_only_when_given(science: Science) -> None:
    """Both files are read, even when the first is wrong."""
    assert run("check", "a.yaml") == Run(0, "check at 80 columns\n", "")
    assert science.calls[-1][1] == ("read_target(a.yaml)", None)
    shown = run("check", "bad.yaml", "-i", "bad")
    assert shown.status == 2
    assert shown.errors.count("\n") == 3


def test_a_terminal_gets_its_width_up_to_100_columns(
    science: Science, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """Piped text keeps to 80."""
    monkeypatch.setattr(sys.stdout, "isatty", lambda: True, raising=False)
    for columns, width in (("70", 70), ("300", 100)):
        monkeypatch.setenv("COLUMNS", columns)
        assert main(list(FORECAST)) == 0
        assert capsys.readouterr().out == f"forecast at {width} columns\n"


def test_a_reader_that_leaves_early_causes_no_message(science: Science) -> None:
    """A closed pipe is quiet."""
    science.error = BrokenPipeError(32, "Broken pipe")
    shown = run(*FORECAST)
    assert (shown.status, shown.errors) == (1, "")
