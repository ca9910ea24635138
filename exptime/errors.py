"""Errors that exptime raises, sorted by what the user can do about them.

::

    ExptimeError
    ├── InputError (ValueError)      a file, option or argument that the user can mend
    │   ├── UnitsError               a value without a unit, or with one of the wrong kind
    │   ├── ProfileError             an instrument description or one of the files it names
    │   ├── OutOfRangeError          a star or setting outside the validity of the model
    │   └── UnreachableError         no hot-spot geometry reproduces what was measured
    ├── MissingDependencyError (ImportError)
    └── WriteError (OSError)         an output file that could not be written

Everything below `InputError` ends the command line with exit status 2, the rest with 1.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Fault:
    """One thing wrong with an input: what, where, and how to mend it.

    Parameters
    ----------
    what : str
        What is wrong with the value, in one sentence without the place.
    where : str
        File, line and key path, e.g. ``"target.yaml, line 3, flux.band"``; empty if none.
    remedy : str
        How to mend it: the allowed range, the nearest valid name, an example; empty if none.
    """

    what: str
    where: str = ""
    remedy: str = ""

    def __str__(self) -> str:
        """Return the fault as one line of text."""
        place = f"{self.where}: " if self.where else ""
        remedy = f" {self.remedy}" if self.remedy else ""
        return f"{place}{self.what}{remedy}"


class ExptimeError(Exception):
    """Base of every error that exptime raises on purpose."""


class InputError(ExptimeError, ValueError):
    """An input that the user can mend; holds every fault found.

    Parameters
    ----------
    faults : Fault, str or iterable of Fault
        What is wrong. A plain string makes one fault without a place.
    """

    def __init__(self, faults: Fault | str | Iterable[Fault]) -> None:
        if isinstance(faults, str):
            faults = Fault(faults)
        self.faults: tuple[Fault, ...] = (faults,) if isinstance(faults, Fault) else tuple(faults)
        super().__init__("\n".join(str(fault) for fault in self.faults))


class UnitsError(InputError):
    """A value without a unit where one is needed, or with a unit of the wrong kind."""


class ProfileError(InputError):
    """A fault in an instrument description or in a file that it names."""


class OutOfRangeError(InputError):
    """A star or a setting outside the range in which the model is valid."""


class UnreachableError(InputError):
    """No hot-spot geometry reproduces what was measured."""


class MissingDependencyError(ExptimeError, ImportError):
    """A package that this job needs is not installed.

    Parameters
    ----------
    feature : str
        What was asked for.
    package : str
        Name of the missing package.
    """

    def __init__(self, feature: str, package: str) -> None:
        self.feature = feature
        self.package = package
        super().__init__(f"{feature} needs the package {package}: pip install {package}")


class WriteError(ExptimeError, OSError):
    """An output file that could not be written."""
