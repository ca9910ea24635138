"""Help pages, usage errors and exit statuses."""

from __future__ import annotations

import pytest

from exptime.cli.parser import COMMANDS, build_parser
from tests.cli.running import run, run_fresh

NAMES = [command.__name__.rpartition(".")[2] for command in COMMANDS]


def test_help_of_the_program_lists_every_command() -> None:
    """The first page names each command and shows an example."""
    shown = run("--help")
    assert shown.status == 0
    assert shown.errors == ""
    for name in NAMES:
        assert f"\n    {name}" in shown.output
    assert "exptime forecast demo.yaml -i soft-concentrator" in shown.output


def test_no_command_shows_the_help() -> None:
    """The bare name of the program is a request for help."""
    assert run().output == run("--help").output


@pytest.mark.parametrize("name", NAMES)
def test_every_help_page_renders_with_an_example_within_80_columns(name: str) -> None:
    """Per cent signs are escaped, an example stands at the end, nothing is too wide."""
    shown = run_fresh(name, "--help", COLUMNS="80")
    assert shown.status == 0
    assert shown.errors == ""
    assert f"example:\n  exptime {name} " in shown.output or name == "instruments"
    assert max(len(line) for line in shown.output.splitlines()) <= 80
    assert "%%" not in shown.output


@pytest.mark.parametrize("name", NAMES)
def test_every_option_is_explained(name: str) -> None:
    """No option stands in a help page without a word about it."""
    parser = build_parser()
    for action in parser._subparsers._group_actions[0].choices[name]._actions:  # type: ignore
        assert action.help, action.dest


def test_version_is_printed() -> None:
    """--version names program and version on one line."""
    shown = run("--version")
    assert shown.status == 0
    assert shown.output.startswith("exptime 0.")
    assert shown.output.count("\n") == 1


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (
            ["forcast"],
            "exptime: command 'forcast' is none of start, instruments, check, pulse, forecast, "
            "verify; did you mean forecast. See exptime --help.\n",
        ),
        (
            ["forecast", "a.yaml", "-i", "b", "--exposre", "1Ms"],
            "exptime: there is no option --exposre. Did you mean --exposure? "
            "See exptime forecast --help.\n",
        ),
        (
            ["forecast", "a.yaml", "-i", "b", "--margin", "15", "%"],
            "exptime: '%' belongs to no option. Put a value that contains spaces in quotation "
            'marks: --goal "radius 5 %".\n',
        ),
        (
            ["forecast", "a.yaml"],
            "exptime: the following arguments are required: -i/--instrument. "
            "See exptime forecast --help.\n",
        ),
        (
            ["instruments", "--format", "jsn"],
            "exptime: --format 'jsn' is none of text, json; did you mean json. "
            "See exptime instruments --help.\n",
        ),
        (
            ["check", "a.yaml", "-i", "one", "-i", "two"],
            "exptime: -i is given twice. See exptime check --help.\n",
        ),
        (
            ["check", "a.yaml", "--form", "json"],
            "exptime: there is no option --form. Did you mean --format? "
            "See exptime check --help.\n",
        ),
        (["--nope"], "exptime: there is no option --nope. See exptime --help.\n"),
    ],
    ids=["command", "option", "space", "required", "choice", "twice", "abbreviation", "no command"],
)
def test_a_wrong_command_line_is_one_message_with_status_2(
    arguments: list[str], message: str
) -> None:
    """The whole output is the message: what is wrong and how to mend it."""
    shown = run(*arguments)
    assert (shown.status, shown.output, shown.errors) == (2, "", message)
