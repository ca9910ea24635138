"""The file that keeps refits done so far, so that an interrupted run goes on where it was."""

from __future__ import annotations

import json
import math
from pathlib import Path
from typing import Any, Final

from exptime.documents.files import LARGEST_FITS, read_text
from exptime.documents.writing import refuse_unwritable, write_text
from exptime.errors import Fault, InputError

_SCHEMA: Final = "exptime.resume/1"


def read_refits(path: str, fingerprint: str) -> dict[str, list[float]]:
    """Return the refits that a file keeps; none where there is no such file yet.

    Parameters
    ----------
    path : str
        Path of the file.
    fingerprint : str
        Of the run that asks.

    Raises
    ------
    InputError
        When the file keeps something else or the refits of another run, or when it could not be
        written later.
    """
    refuse_unwritable(path)
    if not Path(path).exists():
        return {}
    try:
        document = json.loads(read_text(path, LARGEST_FITS))
    except (ValueError, RecursionError) as error:
        if isinstance(error, InputError):
            raise
        document = None
    if not isinstance(document, dict) or document.get("schema") != _SCHEMA:
        what = "this file keeps no refits; it is not overwritten."
        raise InputError(Fault(what, path, "Name another file."))
    if document.get("fingerprint") != fingerprint:
        what = (
            "these refits belong to another run: of another target, instrument, exposure, draws, "
            "seed or version."
        )
        raise InputError(Fault(what, path, "Name another file, or run as that one was run."))
    refits: Any = document.get("refits")
    if not _is_sound(refits):
        raise InputError(Fault("the file is damaged.", path, "Delete it and begin again."))
    return {str(key): [float(value) for value in values] for key, values in refits.items()}


def keep_refits(path: str, fingerprint: str, refits: dict[str, list[float]]) -> None:
    """Write the refits done so far, whole or not at all.

    Parameters
    ----------
    path : str
        A file that `read_refits` has found fit for it.
    fingerprint : str
        Of the run.
    refits : dict
        Name of each refit to its numbers.

    Raises
    ------
    WriteError
        When writing fails; what was kept before is untouched then.
    """
    document = {"schema": _SCHEMA, "fingerprint": fingerprint, "refits": refits}
    write_text(path, json.dumps(document, allow_nan=False) + "\n")


def _is_sound(refits: Any) -> bool:
    return isinstance(refits, dict) and all(
        isinstance(values, list)
        and len(values) > 1
        and all(
            isinstance(value, int | float) and not isinstance(value, bool) and math.isfinite(value)
            for value in values
        )
        for values in refits.values()
    )
