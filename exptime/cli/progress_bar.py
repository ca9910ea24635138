"""The progress bar: on standard error, only on a terminal."""

from __future__ import annotations

import sys
from collections.abc import Iterator
from contextlib import contextmanager

from exptime.progress import Progress, silent


@contextmanager
def progress_bar(label: str, *, is_quiet: bool) -> Iterator[Progress]:
    """Show a bar while the body runs, and yield the callback that moves it.

    Parameters
    ----------
    label : str
        What is being done.
    is_quiet : bool
        Show nothing.

    Yields
    ------
    Progress
        Called with units done and units in all.
    """
    if is_quiet or not sys.stderr.isatty():
        yield silent
        return
    from rich.console import Console
    from rich.progress import BarColumn, TaskProgressColumn, TextColumn, TimeRemainingColumn
    from rich.progress import Progress as Bar

    columns = (TextColumn("{task.description}"), BarColumn())
    numbers = (TaskProgressColumn(), TimeRemainingColumn())
    with Bar(*columns, *numbers, console=Console(stderr=True), transient=True) as bar:
        task = bar.add_task(label, total=None)

        def show(done: int, total: int) -> None:
            bar.update(task, completed=done, total=total)

        yield show
