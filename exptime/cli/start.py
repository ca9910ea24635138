"""The command ``start``: write a target file to begin with."""

from __future__ import annotations

import argparse
from typing import Final

from exptime.cli.arguments import Once

FIRST_INSTRUMENT: Final = "soft-concentrator"
"""The shipped instrument that the message proposes."""

_EPILOG: Final = """\
example:
  exptime start "Candidate A"
  exptime start demo --output proposals/demo.yaml
"""


def add_parser(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the options of this command."""
    parser = commands.add_parser(
        "start",
        help="write a commented target file that runs as it is",
        description="Write NAME.yaml, a commented target file of an invented star that runs as it "
        "is. Replace its numbers by yours.",
        epilog=_EPILOG,
    )
    parser.add_argument("name", metavar="NAME", help="name of the target, and of its file")
    parser.add_argument(
        "--force", action="store_true", help="replace the file if it exists already"
    )
    parser.add_argument(
        "--output", action=Once, metavar="FILE", help="target file to write (default NAME.yaml)"
    )
    parser.add_argument(
        "--format",
        action=Once,
        choices=("text", "json"),
        default="text",
        help="of the message that follows (default text)",
    )
    parser.set_defaults(run=run)


def run(arguments: argparse.Namespace) -> None:
    """Write the file, then say what to run next."""
    import json
    import shlex

    import exptime
    from exptime.cli.delivery import deliver_text, printable
    from exptime.cli.options import read_file_name
    from exptime.documents.writing import write_text

    path = arguments.output or f"{read_file_name(arguments.name)}.yaml"
    text = exptime.starter_target(arguments.name)
    if path == "-":
        deliver_text(text, None)
        return
    write_text(path, text, overwrite=arguments.force)
    quoted = shlex.quote(path)
    commands = (f"exptime check {quoted}", f"exptime forecast {quoted} -i {FIRST_INSTRUMENT}")
    if arguments.format == "json":
        deliver_text(json.dumps({"file": path, "next": commands}, ensure_ascii=False), None)
    elif not arguments.quiet:
        lines = (
            f"Wrote {printable(path)}, an invented star: put your numbers in its place. Next:",
        )
        deliver_text("\n".join([*lines, *(f"  {command}" for command in commands)]), None)
