"""Turn every way a command can fail into one message and an exit status."""

from __future__ import annotations

import os
import sys
from collections.abc import Sequence
from typing import Final

DONE: Final = 0
FAILED: Final = 1
MENDABLE: Final = 2
INTERRUPTED: Final = 130


def run_guarded(argv: Sequence[str]) -> int:
    """Run a command and return its exit status, whatever happens.

    Parameters
    ----------
    argv : sequence of str
        Arguments without the name of the program.
    """
    from exptime.cli.parser import run

    try:
        try:
            run(argv)
        except SystemExit as stop:
            # argparse ends this way after --help and --version.
            if stop.code:
                raise
        sys.stdout.flush()
    except BrokenPipeError:
        _give_up_output()
        return FAILED
    except KeyboardInterrupt:
        print("exptime: interrupted", file=sys.stderr)
        return INTERRUPTED
    except Exception as error:  # noqa: BLE001  the last resort: say it in one line
        if "--debug" in argv:
            import traceback

            traceback.print_exc()
        return _explain(error)
    return DONE


def _explain(error: Exception) -> int:
    """Print what went wrong, each fault on its line, and return the exit status."""
    from exptime.errors import ExptimeError, InputError

    if isinstance(error, InputError):
        for fault in error.faults:
            _say(str(fault))
        return MENDABLE
    if isinstance(error, ExptimeError):
        _say(str(error))
    elif isinstance(error, ModuleNotFoundError):
        _say(f"the package {error.name} is missing; install exptime again with pip")
    elif isinstance(error, MemoryError):
        _say("the memory of this machine is not enough for this job")
    elif isinstance(error, OSError):
        name = f"{error.filename}: " if error.filename is not None else ""
        _say(f"{name}{error.strerror or error}")
        _give_up_output()
    else:
        summary = next(iter(str(error).splitlines()), "")
        _say(f"internal error, {type(error).__name__}: {summary} (--debug shows where)")
    return FAILED


def _say(message: str) -> None:
    """Print one message to standard error on a line of its own."""
    from exptime.cli.delivery import printable

    print(f"exptime: {printable(message)}", file=sys.stderr)


def _give_up_output() -> None:
    """Send what is left in standard output nowhere.

    Its reader has ended, or its disk is full: else the interpreter tries to write it once more at
    exit, and complains.
    """
    try:
        sys.stdout.flush()
    except OSError:
        nowhere = os.open(os.devnull, os.O_WRONLY)
        os.dup2(nowhere, sys.stdout.fileno())
        os.close(nowhere)
    except ValueError:
        return
