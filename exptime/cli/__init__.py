"""The command line: parse, call the public functions, write. No science, no heavy imports.

One module per command. Only the standard library and the light ground floor are imported at
the top, so that help and usage errors appear at once; each command imports what it needs.
"""

from __future__ import annotations

import sys
from collections.abc import Sequence


def main(argv: Sequence[str] | None = None) -> int:
    """Run the command line and return its exit status.

    Parameters
    ----------
    argv : sequence of str, optional
        Arguments without the name of the program; by default those of this process.

    Returns
    -------
    int
        0 done; 2 something the user can mend by changing files or options; 1 a missing package, a
        failed write or an internal error; 130 interrupted.
    """
    from exptime.cli.failures import run_guarded
    from exptime.cli.process import prepare_process

    prepare_process()
    return run_guarded(sys.argv[1:] if argv is None else list(argv))
