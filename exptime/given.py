"""What the public functions are given, made into records or refused."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
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
    _within(times, 1.0, _LONGEST_S, "exposures", "s")
    return times


def exposure(exposure: One) -> float:
    """Return one exposure in seconds."""
    time = from_quantity(exposure, "s", "exposure")
    _within((time,), 1.0, _LONGEST_S, "exposure", "s")
    return time


def energies(energies: Many) -> tuple[float, ...]:
    """Return photon energies in keV."""
    kev = from_quantities(energies, "keV", "energies")
    if min(kev) <= 0.0:
        remedy = "Give energies above zero."
        raise InputError(Fault(f"{min(kev):g} keV is no photon energy.", "energies", remedy))
    return kev


def _within(values: Sequence[float], low: float, high: float, name: str, unit: str) -> None:
    for value in values:
        if not low <= value <= high:
            remedy = f"Give {low:g} to {high:g} {unit}."
            raise InputError(Fault(f"{value:g} {unit} is out of range.", name, remedy))


def draws(count: int, seed: int, is_star_fixed: bool) -> Draws:
    """Return how geometries are drawn."""
    return Draws(
        count=whole(count, "draws", 8, 100_000),
        seed=whole(seed, "seed", 0, 2**63 - 1),
        is_star_fixed=bool(is_star_fixed),
    )


def goals(pairs: Iterable[object]) -> tuple[Goal, ...]:
    """Return goals from pairs of a quantity and a precision."""
    found = []
    for pair in pairs:
        if not isinstance(pair, (tuple, list)) or len(pair) != 2:
            remedy = 'Give pairs, for example ("radius", 0.05).'
            raise InputError(Fault(f"{pair!r} is no goal.", "goals", remedy))
        found.append(goal(*pair))
    return tuple(found)


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
    try:
        is_good = not isinstance(value, bool) and value == int(value)
    except (TypeError, ValueError, OverflowError):
        is_good = False
    if not is_good or not minimum <= value <= maximum:
        raise InputError(
            Fault(f"{value!r} does not do.", name, f"Give a whole number, {minimum} to {maximum}.")
        )
    return int(value)
