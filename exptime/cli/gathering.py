"""Try everything a command was given before complaining, to complain once."""

from __future__ import annotations

from collections.abc import Callable
from typing import Generic, ParamSpec, TypeVar, cast

from exptime.documents.faults import Faults
from exptime.errors import InputError

Value = TypeVar("Value")
Arguments = ParamSpec("Arguments")


class Reading(Generic[Value]):
    """What was read, or nothing where reading failed."""

    def __init__(self, value: Value | None) -> None:
        self._value = value

    @property
    def value(self) -> Value:
        """What was read; asked for only after `Gathering.finish`."""
        return cast("Value", self._value)


class Gathering:
    """Collects the faults of several readings."""

    def __init__(self) -> None:
        self._faults = Faults()

    def read(
        self,
        where: str,
        reader: Callable[Arguments, Value],
        *arguments: Arguments.args,
        **options: Arguments.kwargs,
    ) -> Reading[Value]:
        """Call a reader; keep the faults it raises, placed at `where` if they have no place."""
        try:
            return Reading(reader(*arguments, **options))
        except InputError as error:
            self._faults.absorb(error, where)
            return Reading(None)

    def finish(self) -> None:
        """Raise everything that was found.

        Raises
        ------
        InputError
            Holding every fault of every reading.
        """
        self._faults.raise_if_any()
