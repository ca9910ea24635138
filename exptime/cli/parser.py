"""The options of every command, and the one way into a command."""

from __future__ import annotations

import argparse
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any, Final, NoReturn

from exptime.cli import check, forecast, instruments, pulse, start, verify

if TYPE_CHECKING:
    from exptime.errors import Fault

COMMANDS: Final = (start, instruments, check, pulse, forecast, verify)

_DESCRIPTION: Final = (
    "How much observing time buys which precision in the mass and radius of a neutron star: from "
    "a flux, a pulsed fraction, a column, a spin frequency and the effective area of an instrument."
)
_EPILOG: Final = """\
example:
  exptime start demo
  exptime forecast demo.yaml -i soft-concentrator

A target is a YAML file, or - for standard input. An instrument is the id of one that ships
(exptime instruments lists them), otherwise the path of a description.
Exit status: 0 done, 2 a file or option to mend, 1 anything else that failed.
"""


class Formatter(argparse.HelpFormatter):
    """Fills descriptions, and leaves text of several lines (the examples) as it is."""

    def _fill_text(self, text: str, width: int, indent: str) -> str:
        return text if "\n" in text else super()._fill_text(text, width, indent)


class Parser(argparse.ArgumentParser):
    """An argument parser whose errors are raised like every other fault of an input."""

    def __init__(self, **options: Any) -> None:
        options.setdefault("allow_abbrev", False)
        options.setdefault("formatter_class", Formatter)
        super().__init__(**options)

    def error(self, message: str) -> NoReturn:
        """Raise the message with a hint where help stands."""
        from exptime.errors import Fault, InputError

        raise InputError(Fault(f"{_hinted(message)}.", "", f"See {self.prog} --help."))

    def known_options(self) -> list[str]:
        """Return every long option of this parser."""
        return [name for name in self._option_string_actions if name.startswith("--")]


class Version(argparse.Action):
    """Print the version of the installed package, which takes a while to look up."""

    def __call__(self, parser: argparse.ArgumentParser, *_: object) -> NoReturn:
        """Print and stop."""
        from importlib.metadata import PackageNotFoundError, version

        try:
            number = version("exptime")
        except PackageNotFoundError:
            number = "(not installed)"
        print(f"exptime {number}")
        parser.exit()


def build_parser() -> Parser:
    """Return the parser of the whole command line."""
    parser = Parser(prog="exptime", description=_DESCRIPTION, epilog=_EPILOG)
    parser.add_argument("--version", action=Version, nargs=0, help="show the version and exit")
    _add_common(parser, is_top=True)
    commands = parser.add_subparsers(dest="command", metavar="COMMAND", title="commands")
    for command in COMMANDS:
        command.add_parser(commands)
    for each in commands.choices.values():
        _add_common(each, is_top=False)
    return parser


def run(argv: Sequence[str]) -> None:
    """Parse the arguments and run the command that they name.

    Raises
    ------
    InputError
        When the arguments are wrong, and whatever the command raises.
    """
    parser = build_parser()
    arguments, unknown = parser.parse_known_args(argv)
    if unknown:
        _refuse(_command_parser(parser, arguments.command), unknown)
    if arguments.command is None:
        parser.print_help()
        return
    if not arguments.debug:
        from exptime.cli.process import hide_library_warnings

        hide_library_warnings()
    arguments.run(arguments)


def _add_common(parser: argparse.ArgumentParser, *, is_top: bool) -> None:
    """Add the options that may stand before and after the name of the command."""
    group = parser.add_argument_group("messages")
    for name, meaning in (
        ("--quiet", "no progress bar and no remarks on standard error"),
        ("--debug", "show the traceback of an error"),
    ):
        default = False if is_top else argparse.SUPPRESS
        group.add_argument(name, action="store_true", default=default, help=meaning)


def _command_parser(parser: Parser, name: str | None) -> Parser:
    """Return the parser of one command, or of the program where none is named."""
    for action in parser._actions:
        if name is not None and isinstance(action, argparse._SubParsersAction):
            return action.choices[name]  # type: ignore[no-any-return]  # a table of parsers
    return parser


def _refuse(parser: Parser, unknown: Sequence[str]) -> NoReturn:
    """Raise for arguments that no option took."""
    from exptime.errors import InputError

    raise InputError(_unknown_fault(parser, unknown[0]))


def _unknown_fault(parser: Parser, first: str) -> Fault:
    """Return what is wrong with an argument that no option took."""
    import difflib

    from exptime.errors import Fault

    if not first.startswith("-"):
        remedy = 'Put a value that contains spaces in quotation marks: --goal "radius 5 %".'
        return Fault(f"{first!r} belongs to no option.", "", remedy)
    name = first.split("=")[0]
    near = difflib.get_close_matches(name, parser.known_options(), n=1)
    hint = f"Did you mean {near[0]}? " if near else ""
    return Fault(f"there is no option {name}.", "", f"{hint}See {parser.prog} --help.")


def _hinted(message: str) -> str:
    """Return a message of argparse in our words, with the nearest valid name."""
    import difflib
    import re

    found = re.fullmatch(r"argument (.+?): invalid choice: '(.*?)' \(choose from (.*)\)", message)
    if not found:
        return message
    name, given, listed = found.groups()
    choices = [choice.strip(" '") for choice in listed.split(",")]
    near = difflib.get_close_matches(given, choices, n=1)
    hint = f"; did you mean {near[0]}" if near else ""
    kind = "command" if name == "COMMAND" else name
    return f"{kind} {given!r} is none of {', '.join(choices)}{hint}"
