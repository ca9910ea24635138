"""The command ``instruments``: list the descriptions that ship."""

from __future__ import annotations

import argparse
from typing import Final

from exptime.cli.arguments import add_delivery

_EPILOG: Final = """\
example:
  exptime instruments
  exptime instruments --format json
"""


def add_parser(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the options of this command."""
    parser = commands.add_parser(
        "instruments",
        help="list the instrument descriptions that ship",
        description="List the instrument descriptions that ship. All are invented; describe yours "
        "in a file of the same form.",
        epilog=_EPILOG,
    )
    add_delivery(parser, ("text", "json"))
    parser.set_defaults(run=run)


def run(arguments: argparse.Namespace) -> None:
    """List them."""
    import exptime
    from exptime.cli.delivery import deliver, refuse_output

    refuse_output(arguments.output)
    result = exptime.list_instruments()
    deliver(result, arguments.format, arguments.output, is_quiet=arguments.quiet)
