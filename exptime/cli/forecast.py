"""The command ``forecast``: the main job."""

from __future__ import annotations

import argparse
from typing import Final

from exptime.cli.arguments import Once, add_delivery, add_draws, add_instrument, add_target
from exptime.cli.verify import MOST_SIMULATIONS, add_simulations

DEFAULT_EXPOSURES: Final = "100ks..3Ms"

_EPILOG: Final = """\
example:
  exptime forecast demo.yaml -i soft-concentrator
  exptime forecast demo.yaml -i soft-concentrator --exposure 300ks,1Ms \\
      --goal "radius 5 %" --goal "mass 10 %" --margin "15 %" \\
      --format html --output demo.html
"""


def add_parser(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the options of this command."""
    parser = commands.add_parser(
        "forecast",
        help="precision of mass and radius against exposure (the main job)",
        description="Precision of mass and radius against exposure, with its spread over the hot-"
        "spot geometries that fit what is known of the target.",
        epilog=_EPILOG,
    )
    add_target(parser)
    add_instrument(parser, is_required=True)
    parser.add_argument(
        "--exposure",
        action=Once,
        metavar="TIMES",
        default=DEFAULT_EXPOSURES,
        help="A..B for 13 exposures evenly spaced in logarithm, or a comma list "
        f"(default {DEFAULT_EXPOSURES})",
    )
    parser.add_argument(
        "--goal",
        action="append",
        metavar="GOAL",
        default=[],
        help='wanted precision such as "mass 10%%"; mass, radius or compactness, repeatable '
        "(default radius 5%%)",
    )
    parser.add_argument(
        "--margin",
        action=Once,
        metavar="SHARE",
        default="0 %",
        help='added to required exposures in the text, such as "15%%" (default 0)',
    )
    parser.add_argument(
        "--verify",
        action="store_true",
        help="test the bound at the longest exposure, as the command verify does",
    )
    add_simulations(parser, "0")
    add_draws(parser)
    add_delivery(parser, ("text", "json", "html"))
    parser.set_defaults(run=run)


def run(arguments: argparse.Namespace) -> None:
    """Read the input, forecast, write the report."""
    import exptime
    from exptime.api import DEFAULT_GOALS
    from exptime.cli.delivery import deliver, refuse_output
    from exptime.cli.gathering import Gathering
    from exptime.cli.options import read_exposures, read_goal, read_margin, read_whole
    from exptime.cli.progress_bar import progress_bar
    from exptime.quantities import to_quantity

    gathering = Gathering()
    inputs = (arguments.target, arguments.instrument)
    gathering.read("--output", refuse_output, arguments.output, *inputs)
    exposures = gathering.read("--exposure", read_exposures, arguments.exposure)
    goals = [gathering.read("--goal", read_goal, goal) for goal in arguments.goal]
    margin = gathering.read("--margin", read_margin, arguments.margin)
    simulations = gathering.read("--simulations", _read_simulations, arguments)
    draws = gathering.read("--draws", read_whole, arguments.draws, 8, 100_000)
    seed = gathering.read("--seed", read_whole, arguments.seed, 0, 2**63 - 1)
    jobs = gathering.read("--jobs", read_whole, arguments.jobs, 1, 1024)
    target = gathering.read("TARGET", exptime.read_target, arguments.target)
    instrument = gathering.read("-i", exptime.read_instrument, arguments.instrument)
    gathering.finish()
    with progress_bar("Geometries", is_quiet=arguments.quiet) as progress:
        result = exptime.forecast(
            target.value,
            instrument.value,
            exposures=to_quantity(exposures.value, "s"),
            goals=[goal.value for goal in goals] or DEFAULT_GOALS,
            margin=margin.value,
            draws=draws.value,
            seed=seed.value,
            jobs=jobs.value,
            fixed_star=arguments.fixed_star,
            verify=arguments.verify,
            simulations=simulations.value,
            progress=progress,
        )
    deliver(result, arguments.format, arguments.output, is_quiet=arguments.quiet)


def _read_simulations(arguments: argparse.Namespace) -> int:
    """Return how many observations to simulate, of which only --verify makes use."""
    from exptime.cli.options import read_whole
    from exptime.errors import Fault, InputError

    count = read_whole(arguments.simulations, 0, MOST_SIMULATIONS)
    if count and not arguments.verify:
        raise InputError(Fault("simulations are refitted with --verify.", "", "Add --verify."))
    return count
