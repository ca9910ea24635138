"""The command ``verify``: whether the bound of a forecast can be believed."""

from __future__ import annotations

import argparse
from typing import Final

from exptime.cli.arguments import Once, add_delivery, add_draws, add_instrument, add_target

DEFAULT_SIMULATIONS: Final = "100"
MOST_SIMULATIONS: Final = 100_000

_EPILOG: Final = """\
example:
  exptime verify demo.yaml -i soft-concentrator --exposure 1Ms
  exptime verify demo.yaml -i soft-concentrator --exposure 1Ms \\
      --simulations 400 --resume refits.json --format html --output verify.html

The geometry given is verified; without hot spots in the target file, the median
geometry and those at 16 and 84 per cent of the error in radius.
An interrupted run goes on where it was when it is started again with --resume.
"""


def add_parser(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the options of this command."""
    parser = commands.add_parser(
        "verify",
        help="test a forecast against profile likelihood and refits",
        description="Whether the bound behind a forecast holds: profile likelihood with and "
        "without hard limits, a search for other solutions, and simulated observations refitted.",
        epilog=_EPILOG,
    )
    add_target(parser)
    add_instrument(parser, is_required=True)
    parser.add_argument(
        "--exposure", action=Once, metavar="TIME", required=True, help="one, such as 1Ms"
    )
    add_simulations(parser, DEFAULT_SIMULATIONS)
    parser.add_argument(
        "--resume",
        action=Once,
        metavar="FILE",
        help="keep the refits there as they are done, and take up those that it keeps",
    )
    add_draws(parser)
    add_delivery(parser, ("text", "json", "html"))
    parser.set_defaults(run=run)


def add_simulations(parser: argparse.ArgumentParser, default: str) -> None:
    """Add the number of simulated observations."""
    parser.add_argument(
        "--simulations",
        action=Once,
        metavar="N",
        default=default,
        help="simulated observations to refit for each geometry; 400 give the coverage to 2 "
        f"per cent, 0 leaves them out (default {default})",
    )


def run(arguments: argparse.Namespace) -> None:
    """Read the input, verify, write the report."""
    import exptime
    from exptime.cli.delivery import deliver, refuse_output
    from exptime.cli.gathering import Gathering
    from exptime.cli.options import read_exposure, read_whole
    from exptime.cli.progress_bar import progress_bar
    from exptime.quantities import to_quantity

    gathering = Gathering()
    inputs = (arguments.target, arguments.instrument, arguments.resume)
    gathering.read("--output", refuse_output, arguments.output, *inputs)
    gathering.read("--resume", _refuse_resume, arguments)
    exposure = gathering.read("--exposure", read_exposure, arguments.exposure)
    simulations = gathering.read(
        "--simulations", read_whole, arguments.simulations, 0, MOST_SIMULATIONS
    )
    draws = gathering.read("--draws", read_whole, arguments.draws, 8, 100_000)
    seed = gathering.read("--seed", read_whole, arguments.seed, 0, 2**63 - 1)
    jobs = gathering.read("--jobs", read_whole, arguments.jobs, 1, 1024)
    target = gathering.read("TARGET", exptime.read_target, arguments.target)
    instrument = gathering.read("-i", exptime.read_instrument, arguments.instrument)
    gathering.finish()
    with progress_bar("Profiles and refits", is_quiet=arguments.quiet) as progress:
        result = exptime.verify(
            target.value,
            instrument.value,
            to_quantity(exposure.value, "s"),
            simulations=simulations.value,
            draws=draws.value,
            seed=seed.value,
            jobs=jobs.value,
            fixed_star=arguments.fixed_star,
            resume=arguments.resume,
            progress=progress,
        )
    deliver(result, arguments.format, arguments.output, is_quiet=arguments.quiet)


def _refuse_resume(arguments: argparse.Namespace) -> None:
    """Raise where the file to resume from is standard output or that of the answer."""
    import os

    from exptime.errors import Fault, InputError

    resume, output = arguments.resume, arguments.output
    if resume is None:
        return
    if resume in ("", "-"):
        raise InputError(Fault("refits are kept in a file.", "", "Name one."))
    if output is not None and os.path.abspath(resume) == os.path.abspath(output):
        what = "the answer and the refits cannot go into the same file."
        raise InputError(Fault(what, "", "Name two."))
