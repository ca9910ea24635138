"""The command ``check``: read everything, compute nothing."""

from __future__ import annotations

import argparse
from typing import Final

from exptime.cli.arguments import add_delivery, add_instrument, add_target

_EPILOG: Final = """\
example:
  exptime check demo.yaml
  exptime check demo.yaml -i soft-concentrator
"""


def add_parser(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the options of this command."""
    parser = commands.add_parser(
        "check",
        help="read everything, report every problem at once, compute nothing",
        description="Read a target file, and an instrument if one is given, and say how they are "
        "understood, what is assumed, and everything that is wrong with them.",
        epilog=_EPILOG,
    )
    add_target(parser)
    add_instrument(parser)
    add_delivery(parser, ("text", "json"))
    parser.set_defaults(run=run)


def run(arguments: argparse.Namespace) -> None:
    """Read both files and show what was understood."""
    import exptime
    from exptime.cli.delivery import deliver, refuse_output
    from exptime.cli.gathering import Gathering

    gathering = Gathering()
    inputs = (arguments.target, arguments.instrument)
    gathering.read("--output", refuse_output, arguments.output, *inputs)
    target = gathering.read("TARGET", exptime.read_target, arguments.target)
    instrument = None
    if arguments.instrument is not None:
        instrument = gathering.read("-i", exptime.read_instrument, arguments.instrument)
    gathering.finish()
    result = exptime.check(target.value, None if instrument is None else instrument.value)
    deliver(result, arguments.format, arguments.output, is_quiet=arguments.quiet)
