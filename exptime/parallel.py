"""Work spread over processes, with the same numbers for any number of them.

The unit of work is a pure function of its arguments; results come back in order. BLAS is held to
one thread whatever the number of processes, since its threads change the last bits of sums.
"""

from __future__ import annotations

import os
import sys
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import ProcessPoolExecutor
from contextlib import contextmanager
from multiprocessing import get_context
from types import ModuleType
from typing import TypeVar

from exptime.progress import Progress, silent

Item = TypeVar("Item")
Result = TypeVar("Result")

_FEWEST_FOR_A_POOL = 8


def usable_cores() -> int:
    """Return the number of cores this process may use."""
    if hasattr(os, "sched_getaffinity"):
        return max(1, len(os.sched_getaffinity(0)))
    return max(1, os.cpu_count() or 1)


class Workers:
    """Processes that map functions over items; made by `workers`.

    Parameters
    ----------
    jobs : int
        Number of processes; 1 works in this process.
    """

    def __init__(self, jobs: int) -> None:
        self._jobs = jobs
        self._pool: ProcessPoolExecutor | None = None

    def map(
        self,
        function: Callable[[Item], Result],
        items: Sequence[Item],
        progress: Progress = silent,
        chunk: int = 1,
        fewest: int = _FEWEST_FOR_A_POOL,
    ) -> list[Result]:
        """Apply a function to every item.

        Parameters
        ----------
        function : callable
            A module-level function (or a partial of one) of one item.
        items : sequence
            The items.
        progress : Progress
            Told after each result.
        chunk : int
            Items sent to a process at once.
        fewest : int
            Fewer items than this are worked off in this process.

        Returns
        -------
        list
            Results in the order of the items.
        """
        results: list[Result] = []
        for result in self._results(function, items, chunk, fewest):
            results.append(result)
            progress(len(results), len(items))
        return results

    def _results(
        self, function: Callable[[Item], Result], items: Sequence[Item], chunk: int, fewest: int
    ) -> Iterator[Result]:
        if self._jobs == 1 or len(items) < fewest:
            return map(function, items)
        with _main_module_hidden():
            return self._start().map(function, items, chunksize=chunk)

    def _start(self) -> ProcessPoolExecutor:
        if self._pool is None:
            self._pool = ProcessPoolExecutor(
                self._jobs, mp_context=get_context("spawn"), initializer=_hold_to_one_thread
            )
        return self._pool

    def close(self) -> None:
        """End the processes."""
        if self._pool is not None:
            self._pool.shutdown(wait=False, cancel_futures=True)
            self._pool = None


@contextmanager
def workers(jobs: int) -> Iterator[Workers]:
    """Provide processes for the length of a block, BLAS held to one thread throughout.

    Parameters
    ----------
    jobs : int
        Number of processes, at least 1.
    """
    team = Workers(jobs)
    with one_thread():
        try:
            yield team
        finally:
            team.close()


@contextmanager
def one_thread() -> Iterator[None]:
    """Hold BLAS to one thread for the length of a block."""
    from threadpoolctl import threadpool_limits

    with threadpool_limits(limits=1, user_api="blas"):
        yield


def _hold_to_one_thread() -> None:
    import numpy as np  # noqa: F401  # BLAS must be loaded before it can be limited
    from threadpoolctl import threadpool_limits

    threadpool_limits(limits=1, user_api="blas")


@contextmanager
def _main_module_hidden() -> Iterator[None]:
    """Keep new processes from running the caller's script again: they need nothing of it."""
    real = sys.modules["__main__"]
    sys.modules["__main__"] = ModuleType("__main__")
    try:
        yield
    finally:
        sys.modules["__main__"] = real
