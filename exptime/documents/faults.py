"""Collect everything wrong with an input, to raise it in one go."""

from __future__ import annotations

from typing import Final

from exptime.documents.nodes import Place
from exptime.errors import Fault, InputError

MOST_SHOWN: Final = 50
"""Nobody reads more at once; a wrong file would print pages."""


class Faults:
    """The faults found so far in one input.

    Parameters
    ----------
    error : type of InputError, optional
        What to raise. By default `InputError`, or a narrower class when every fault is of that
        class (only ranges: OutOfRangeError; only units: UnitsError).
    """

    def __init__(self, error: type[InputError] | None = None) -> None:
        self._error = error
        self._found: dict[Fault, type[InputError]] = {}

    def __len__(self) -> int:
        """Return how many faults were found."""
        return len(self._found)

    @property
    def found(self) -> tuple[Fault, ...]:
        """Every fault in the order it was found."""
        return tuple(self._found)

    def add(
        self,
        what: str,
        where: Place | str,
        remedy: str = "",
        kind: type[InputError] = InputError,
    ) -> None:
        """Note a fault; the same one in the same place is kept once."""
        self._found.setdefault(Fault(what, str(where), remedy), kind)

    def absorb(self, error: InputError, where: Place | str = "") -> None:
        """Note the faults of an error; those without a place get the one given."""
        for fault in error.faults:
            self.add(fault.what, fault.where or where, fault.remedy, type(error))

    def raise_if_any(self) -> None:
        """Raise everything noted.

        Raises
        ------
        InputError
            Or the class chosen, holding every fault.
        """
        if not self._found:
            return
        kinds = set(self._found.values())
        error = self._error or (kinds.pop() if len(kinds) == 1 else InputError)
        shown = self.found[:MOST_SHOWN]
        if len(self) > MOST_SHOWN:
            shown += (Fault(f"{len(self) - MOST_SHOWN} more faults are not shown."),)
        raise error(shown)
