"""How much observing time buys which precision in a neutron star's mass and radius.

The public face is loaded on first use, so that importing the package costs nothing.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from exptime.api import (
        check,
        expected_counts,
        forecast,
        list_instruments,
        pulse,
        read_instrument,
        read_target,
        starter_target,
        verify,
    )
    from exptime.errors import (
        ExptimeError,
        InputError,
        MissingDependencyError,
        OutOfRangeError,
        ProfileError,
        UnitsError,
        UnreachableError,
        WriteError,
    )

__all__ = [
    "ExptimeError",
    "InputError",
    "MissingDependencyError",
    "OutOfRangeError",
    "ProfileError",
    "UnitsError",
    "UnreachableError",
    "WriteError",
    "__version__",
    "check",
    "expected_counts",
    "forecast",
    "list_instruments",
    "pulse",
    "read_instrument",
    "read_target",
    "starter_target",
    "verify",
]


def __getattr__(name: str) -> object:
    if name == "__version__":
        from importlib.metadata import version

        return version("exptime")
    if name not in __all__:
        raise AttributeError(f"module 'exptime' has no attribute {name!r}")
    from importlib import import_module

    source = "exptime.errors" if name.endswith("Error") else "exptime.api"
    return getattr(import_module(source), name)


def __dir__() -> list[str]:
    return list(__all__)
