"""Set the process up before anything heavy is imported."""

from __future__ import annotations

import os
import sys
from typing import Final

_THREAD_VARIABLES: Final = (
    "OPENBLAS_NUM_THREADS",
    "MKL_NUM_THREADS",
    "OMP_NUM_THREADS",
    "VECLIB_MAXIMUM_THREADS",
    "NUMEXPR_NUM_THREADS",
)


def prepare_process() -> None:
    """Hold linear algebra to one thread and make standard output speak UTF-8.

    Threads inside the linear algebra change the last bits of a result and slow small matrices
    down; work is spread over processes instead. The libraries read these variables once, when
    numpy is imported, so they are set first. What the user has set stays.
    """
    for variable in _THREAD_VARIABLES:
        os.environ.setdefault(variable, "1")
    for name in ("stdout", "stderr"):
        # A closed stream is None; what is written for nobody goes nowhere.
        if getattr(sys, name) is None:
            setattr(sys, name, open(os.devnull, "w", encoding="utf-8"))
    for stream in (sys.stdout, sys.stderr):
        reconfigure = getattr(stream, "reconfigure", None)
        if reconfigure is not None:
            # Names and units need more than ASCII even where the locale is C; what cannot be
            # encoded at all (half a surrogate pair in an argument) must not end the program.
            reconfigure(encoding="utf-8", errors="backslashreplace")


def hide_library_warnings() -> None:
    """Keep warnings of the packages underneath away from users; ``-W`` brings them back."""
    import warnings

    if not sys.warnoptions:
        warnings.simplefilter("ignore")
