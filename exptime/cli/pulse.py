"""The command ``pulse``: photon flux or expected counts against phase and energy."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING, Final

from exptime.cli.arguments import Once, add_delivery, add_draws, add_instrument, add_target

if TYPE_CHECKING:
    from collections.abc import Callable

    from exptime.cli.delivery import Result
    from exptime.cli.gathering import Gathering

DEFAULT_ENERGIES: Final = "0.3,0.5,1,2 keV"
DEFAULT_PHASES: Final = "32"
MISSING_EXPOSURE: Final = "1 s"
"""Stands where none was given, which is a fault of its own."""

_EPILOG: Final = """\
example:
  exptime pulse demo.yaml --energies "0.3,0.5,1 keV" --phases 16
  exptime pulse demo.yaml -i soft-concentrator --exposure 300ks --format json

Without hot spots in the target file the pulse is that of the median geometry.
"""


def add_parser(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the options of this command."""
    parser = commands.add_parser(
        "pulse",
        help="photon flux against phase and energy, or expected counts",
        description="Photon flux at the observer against phase and energy, without the column; or, "
        "with an instrument and one exposure, expected counts in phase bins and channels.",
        epilog=_EPILOG,
    )
    add_target(parser)
    parser.add_argument(
        "--energies",
        action=Once,
        metavar="LIST",
        help=f'photon energies (default "{DEFAULT_ENERGIES}"); not with -i',
    )
    parser.add_argument(
        "--phases",
        action=Once,
        metavar="N",
        help=f"phase bins (default {DEFAULT_PHASES}, with -i those of the instrument)",
    )
    add_instrument(parser)
    parser.add_argument(
        "--exposure", action=Once, metavar="TIME", help="with -i: one exposure, such as 300ks"
    )
    add_draws(parser)
    add_delivery(parser, ("text", "json"))
    parser.set_defaults(run=run)


def run(arguments: argparse.Namespace) -> None:
    """Read the input, compute the pulse, write it."""
    from exptime.cli.delivery import deliver, refuse_output
    from exptime.cli.gathering import Gathering
    from exptime.cli.options import read_whole
    from exptime.cli.progress_bar import progress_bar

    gathering = Gathering()
    inputs = (arguments.target, arguments.instrument)
    gathering.read("--output", refuse_output, arguments.output, *inputs)
    gathering.read("", _refuse_mixture, arguments)
    draws = gathering.read("--draws", read_whole, arguments.draws, 8, 100_000)
    seed = gathering.read("--seed", read_whole, arguments.seed, 0, 2**63 - 1)
    jobs = gathering.read("--jobs", read_whole, arguments.jobs, 1, 1024)
    question = _flux if arguments.instrument is None else _counts
    compute = question(arguments, gathering)
    with progress_bar("Geometries", is_quiet=arguments.quiet) as progress:
        result = compute(
            draws=draws.value,
            seed=seed.value,
            jobs=jobs.value,
            fixed_star=arguments.fixed_star,
            progress=progress,
        )
    deliver(result, arguments.format, arguments.output, is_quiet=arguments.quiet)


def _flux(arguments: argparse.Namespace, gathering: Gathering) -> Callable[..., Result]:
    """Return the call that computes photon flux, once everything is read."""
    from functools import partial

    import exptime
    from exptime.cli.options import read_energies, read_whole
    from exptime.quantities import to_quantity

    written = DEFAULT_ENERGIES if arguments.energies is None else arguments.energies
    energies = gathering.read("--energies", read_energies, written)
    phases = gathering.read("--phases", read_whole, arguments.phases or DEFAULT_PHASES, 4, 1024)
    target = gathering.read("TARGET", exptime.read_target, arguments.target)
    gathering.finish()
    wanted = to_quantity(energies.value, "keV")
    return partial(exptime.pulse, target.value, energies=wanted, phases=phases.value)


def _counts(arguments: argparse.Namespace, gathering: Gathering) -> Callable[..., Result]:
    """Return the call that computes expected counts, once everything is read."""
    from functools import partial

    import exptime
    from exptime.cli.options import read_exposure, read_whole
    from exptime.quantities import to_quantity

    exposure = gathering.read("--exposure", read_exposure, arguments.exposure or MISSING_EXPOSURE)
    target = gathering.read("TARGET", exptime.read_target, arguments.target)
    instrument = gathering.read("-i", exptime.read_instrument, arguments.instrument)
    phases = None
    if arguments.phases is not None:
        phases = gathering.read("--phases", read_whole, arguments.phases, 4, 1024)
    gathering.finish()
    return partial(
        exptime.expected_counts,
        target.value,
        instrument.value,
        to_quantity(exposure.value, "s"),
        phases=None if phases is None else phases.value,
    )


def _refuse_mixture(arguments: argparse.Namespace) -> None:
    """Raise where options of the two kinds of pulse are mixed."""
    from exptime.errors import Fault, InputError

    if arguments.instrument is None and arguments.exposure is not None:
        raise InputError(Fault("--exposure needs an instrument.", "", "Add -i INSTRUMENT."))
    if arguments.instrument is not None and arguments.energies is not None:
        what = "--energies has no meaning with -i: the channels of the instrument stand."
        raise InputError(Fault(what, "", "Leave one of them out."))
    if arguments.instrument is not None and arguments.exposure is None:
        raise InputError(Fault("-i needs one exposure.", "", "Add for example --exposure 300ks."))
