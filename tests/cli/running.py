"""Run the command line as a user would, in this process or in a fresh one."""

from __future__ import annotations

import io
import os
import subprocess
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from unittest import mock

from exptime.cli import main


@dataclass(frozen=True, slots=True)
class Run:
    """What one run left behind."""

    status: int
    output: str
    errors: str


class _Stream(io.TextIOWrapper):
    """A standard stream in memory."""

    def text(self) -> str:
        self.flush()
        buffer = self.buffer
        assert isinstance(buffer, io.BytesIO)
        return buffer.getvalue().decode()


@contextmanager
def _streams(given: bytes) -> Iterator[tuple[_Stream, _Stream]]:
    output, errors = _Stream(io.BytesIO(), "utf-8"), _Stream(io.BytesIO(), "utf-8")
    entered = io.TextIOWrapper(io.BytesIO(given), "utf-8")
    with mock.patch.multiple(sys, stdout=output, stderr=errors, stdin=entered):
        yield output, errors


def run(*arguments: str, given: str = "") -> Run:
    """Run a command in this process with its streams in memory.

    Parameters
    ----------
    *arguments : str
        The command line without the name of the program.
    given : str
        What stands on standard input.
    """
    with _streams(given.encode()) as (output, errors):
        status = main(list(arguments))
        return Run(status, output.text(), errors.text())


def run_fresh(*arguments: str, given: str = "", **environment: str) -> Run:
    """Run a command in a fresh process."""
    done = subprocess.run(
        [sys.executable, "-m", "exptime", *arguments],
        input=given.encode(),
        capture_output=True,
        check=False,
        timeout=120,
        env={**os.environ, **environment},
    )
    return Run(done.returncode, done.stdout.decode(), done.stderr.decode())
