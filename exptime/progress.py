"""The shape of a progress callback; the bar itself is made only by the command line."""

from __future__ import annotations

from collections.abc import Callable

Progress = Callable[[int, int], None]
"""Called with (units done, units in all); units are those of the work at hand."""


def silent(done: int, total: int) -> None:
    """Ignore progress: the default wherever a `Progress` is taken."""
