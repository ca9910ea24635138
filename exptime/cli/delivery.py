"""Bring an answer to standard output or into a file."""

from __future__ import annotations

import os
import shutil
import sys
from typing import Final, Protocol

from exptime.errors import Fault, InputError

PIPED_WIDTH: Final = 80
_WIDEST: Final = 100
_STANDARD_OUTPUT: Final = "-"
_SUFFIXES: Final = {".html": "html", ".htm": "html", ".json": "json"}


class Result(Protocol):
    """What every answer can do."""

    def to_text(self, width: int = ...) -> str:
        """Return it as text of at most so many columns."""
        ...

    def to_json(self) -> str:
        """Return it as a JSON document."""
        ...


def refuse_output(output: str | None, *inputs: str | None) -> None:
    """Raise, before a long job, for an output file that cannot be written after it.

    Parameters
    ----------
    output : str or None
        What ``--output`` gave.
    *inputs : str or None
        Files that the command reads: they are not to be replaced by its answer.

    Raises
    ------
    InputError
        When the folder is missing, the path is a folder or one of the inputs.
    """
    from exptime.documents.writing import refuse_unwritable

    if output is None or output == _STANDARD_OUTPUT:
        return
    refuse_unwritable(output)
    for given in inputs:
        if given and os.path.exists(given) and os.path.exists(output):
            if os.path.samefile(given, output):
                what = "this is the file that is read; the answer would replace it."
                raise InputError(Fault(what, output, "Choose another name."))


def deliver(result: Result, kind: str, output: str | None, *, is_quiet: bool) -> None:
    """Write an answer in the format asked for.

    Parameters
    ----------
    result : Result
        The answer.
    kind : {"text", "json", "html"}
        Format; html only where the answer has it.
    output : str or None
        File, or None (or ``-``) for standard output.
    is_quiet : bool
        Make no remark.

    Raises
    ------
    InputError, WriteError
        As `exptime.documents.writing.write_text`.
    """
    is_file = output is not None and output != _STANDARD_OUTPUT
    width = PIPED_WIDTH if is_file else output_width()
    text = result.to_text(width) if kind == "text" else getattr(result, f"to_{kind}")()
    deliver_text(text, output)
    if output is not None and is_file and not is_quiet:
        _remark(output, kind)


def deliver_text(text: str, output: str | None) -> None:
    """Write text to a file or to standard output, ended by a line end."""
    from exptime.documents.writing import write_text

    text = text if text.endswith("\n") else f"{text}\n"
    if output is None or output == _STANDARD_OUTPUT:
        sys.stdout.write(text)
    else:
        write_text(output, text)


def output_width() -> int:
    """Return the columns that text may take: 80 when piped, else those of the terminal."""
    if not sys.stdout.isatty():
        return PIPED_WIDTH
    return max(40, min(shutil.get_terminal_size((PIPED_WIDTH, 24)).columns, _WIDEST))


def printable(text: str) -> str:
    """Return the text on one line, without characters that steer a terminal."""
    return "".join(
        character if character.isprintable() else " " if character.isspace() else "\ufffd"
        for character in text
    )


def _remark(output: str, kind: str) -> None:
    """Say on standard error when the name of a file promises another format."""
    promised = _SUFFIXES.get(os.path.splitext(output)[1].lower(), kind)
    if promised != kind:
        print(
            f"exptime: {output} holds {kind}; --format {promised} writes what its name says",
            file=sys.stderr,
        )
