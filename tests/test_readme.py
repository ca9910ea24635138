"""The README says what the program does."""

from __future__ import annotations

import doctest
import re

import pytest

from exptime.cli.parser import COMMANDS, build_parser
from tests.makers.readme import README, with_keys, with_session

TEXT = README.read_text(encoding="utf-8")


def test_the_tables_of_keys_are_those_of_the_program() -> None:
    """`python -m tests.makers.readme` renders them anew."""
    assert with_keys(TEXT) == TEXT
    assert TEXT.count("| key | example |") == 2


def test_every_option_is_listed() -> None:
    """No option of any command is missing from the README."""
    parser = build_parser()
    listed = TEXT.split("## Commands and options")[1].split("\n## ")[0]
    for command in COMMANDS:
        name = command.__name__.rpartition(".")[2]
        assert f"`exptime {name}" in listed
        group = parser._subparsers._group_actions[0]  # type: ignore[union-attr]
        for action in group.choices[name]._actions:  # type: ignore[index,call-overload]
            for option in action.option_strings[-1:]:
                assert option in (*re.findall(r"--[\w-]+", listed), "--help", "--instrument")


@pytest.mark.slow
def test_the_examples_of_the_interface_are_true() -> None:
    """The section on Python runs as a doctest."""
    section = TEXT.split("<!-- api -->")[1].split("<!-- end of api -->")[0]
    examples = doctest.DocTestParser().get_doctest(section, {}, "README", str(README), 0)
    assert len(examples.examples) >= 5
    runner = doctest.DocTestRunner(optionflags=doctest.ELLIPSIS | doctest.NORMALIZE_WHITESPACE)
    runner.run(examples)
    assert runner.summarize(verbose=False).failed == 0


def _without_numbers(text: str) -> str:
    return re.sub(r"[\s─━-]+", " ", re.sub(r"\d[\d.]*", "#", text))


@pytest.mark.slow
def test_the_session_prints_what_the_readme_shows() -> None:
    """The commands of the session run; words are compared, last digits may differ elsewhere."""
    assert _without_numbers(with_session(TEXT)) == _without_numbers(TEXT)
