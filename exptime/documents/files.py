"""Bytes and text of a user's file, or one fault that says why not."""

from __future__ import annotations

import gzip
import io
import sys
import zlib
from pathlib import Path
from typing import Final

from exptime.errors import Fault, InputError

STANDARD_INPUT: Final = "-"
LARGEST_YAML: Final = 1_000_000
LARGEST_TABLE: Final = 50_000_000
LARGEST_FITS: Final = 500_000_000


def read_bytes(path: str, limit: int) -> bytes:
    """Return the content of a file.

    Parameters
    ----------
    path : str
        Path; ``"-"`` for standard input.
    limit : int
        Largest size in bytes; no more than this is ever read.

    Raises
    ------
    InputError
        When the file is missing, a folder, unreadable or too large.
    """
    content = first_bytes(path, limit + 1)
    if len(content) > limit:
        what = f"the file is larger than {limit / 1e6:g} MB."
        raise InputError(Fault(what, path, "Is it the right file?"))
    return content


def first_bytes(path: str, count: int) -> bytes:
    """Return at most so many bytes from the beginning of a file.

    Raises
    ------
    InputError
        When the file is missing, a folder or unreadable.
    """
    try:
        if path == STANDARD_INPUT:
            return sys.stdin.buffer.read(count)
        with Path(path).open("rb") as file:
            return file.read(count)
    except FileNotFoundError:
        raise InputError(Fault("there is no such file.", path, "Check the path.")) from None
    except IsADirectoryError:
        raise InputError(Fault("this is a folder, not a file.", path, "Name the file.")) from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise InputError(Fault(f"the file cannot be read: {reason}.", path)) from None


def decode(content: bytes, file: str) -> str:
    """Return UTF-8 bytes as text with plain line ends and without a byte-order mark.

    Raises
    ------
    InputError
        When the bytes are not UTF-8, with the line of the first that is not.
    """
    try:
        text = content.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = content.count(b"\n", 0, error.start) + 1
        where = f"{file}, line {line}"
        raise InputError(
            Fault("the text is not UTF-8.", where, "Save the file as UTF-8.")
        ) from None
    return text.replace("\r\n", "\n").replace("\r", "\n")


def read_text(path: str, limit: int = LARGEST_TABLE) -> str:
    """Return a UTF-8 file as text; raises as `read_bytes` and `decode`."""
    return decode(read_bytes(path, limit), path)


def unzip(content: bytes, file: str, limit: int) -> bytes:
    """Return gzip content unpacked; other content as it is.

    Raises
    ------
    InputError
        When the archive is damaged or larger than the limit.
    """
    if not content.startswith(b"\x1f\x8b"):
        return content
    try:
        with gzip.GzipFile(fileobj=io.BytesIO(content)) as archive:
            unpacked = archive.read(limit + 1)
    except (OSError, EOFError, zlib.error):
        raise InputError(Fault("the gzip archive is damaged.", file, "Copy it anew.")) from None
    if len(unpacked) > limit:
        raise InputError(Fault(f"the file unpacks to more than {limit / 1e6:g} MB.", file))
    return unpacked


def beside(document: str, name: str) -> str:
    """Return the path of a file that a document names, relative to that document.

    Parameters
    ----------
    document : str
        Path of the document; ``"-"`` stands for the working directory.
    name : str
        Path as written in it.
    """
    if document == STANDARD_INPUT:
        return name
    return str(Path(document).parent / Path(name))
