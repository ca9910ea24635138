"""What the public functions are given, made into records or refused."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Final, TypeAlias

from exptime.errors import Fault, InputError
from exptime.instrument import reader as instrument_reader
from exptime.instrument.records import Instrument
from exptime.quantities import from_quantities, from_quantity
from exptime.study.geometries import Draws
from exptime.study.records import QUANTITIES, Goal
from exptime.target import reader as target_reader
from exptime.target.records import Target

if TYPE_CHECKING:
    from astropy.units import Quantity

    One: TypeAlias = Quantity | str
    Many: TypeAlias = Quantity | str | Sequence[Quantity | str]

MOST_PHASES: Final = 1024
_MOST_SIMULATIONS: Final = 100_000
_LONGEST_S: Final = 1e8


def read_target(path: str) -> Target:
    """Read a target file.

    Parameters
    ----------
    path : str
        Path; ``"-"`` for standard input.

    Raises
    ------
    InputError
        Everything wrong with it, in one go.
    """
    return target_reader.read_target(str(path))


def read_instrument(name: str) -> Instrument:
    """Read an instrument description.

    Parameters
    ----------
    name : str
        Id of a shipped instrument, otherwise a path.

    Raises
    ------
    ProfileError
        Everything wrong with it, in one go.
    """
    return instrument_reader.read_instrument(str(name))


def simulations(count: int) -> int:
    """Return a number of simulated observations."""
    return whole(count, "simulations", 0, _MOST_SIMULATIONS)


def target(target: Target | str) -> Target:
    """Return a target, read if it is a path."""
    return target if isinstance(target, Target) else read_target(target)


def instrument(instrument: Instrument | str) -> Instrument:
    """Return an instrument, read if it is an id or a path."""
    return instrument if isinstance(instrument, Instrument) else read_instrument(instrument)


def exposures(exposures: Many) -> tuple[float, ...]:
    """Return exposures in seconds."""
    times = from_quantities(exposures, "s", "exposures")
    for time in times:
        if not 1.0 <= time <= _LONGEST_S:
            raise InputError(
                Fault(f"{time:g} s is no exposure.", "exposures", "Give 1 s to 1e8 s.")
            )
    return times


def draws(count: int, seed: int, is_star_fixed: bool) -> Draws:
    """Return how geometries are drawn."""
    return Draws(
        count=whole(count, "draws", 8, 100_000),
        seed=whole(seed, "seed", 0, 2**63 - 1),
        is_star_fixed=bool(is_star_fixed),
    )


def goal(quantity: str, precision: float) -> Goal:
    """Return a goal."""
    for name in QUANTITIES:
        if name == quantity:
            wanted = from_quantity(precision, "", "goals")
            if not 0.0 < wanted < 1.0:
                raise InputError(
                    Fault(f"{wanted:g} is no precision.", "goals", "Give a share below 1.")
                )
            return Goal(quantity=name, precision=wanted)
    raise InputError(
        Fault(f"{quantity!r} cannot be a goal.", "goals", f"Valid: {', '.join(QUANTITIES)}.")
    )


def whole(value: int, name: str, minimum: int, maximum: int) -> int:
    """Return a whole number within bounds."""
    if isinstance(value, bool) or int(value) != value or not minimum <= value <= maximum:
        raise InputError(
            Fault(f"{value!r} does not do.", name, f"Give a whole number, {minimum} to {maximum}.")
        )
    return int(value)
