"""Write a file whole or not at all."""

from __future__ import annotations

import contextlib
import os
import tempfile
from pathlib import Path

from exptime.errors import Fault, InputError, WriteError


def write_text(path: str, text: str, *, overwrite: bool = True) -> None:
    """Write text as UTF-8; see `write_bytes`."""
    write_bytes(path, text.encode("utf-8"), overwrite=overwrite)


def write_bytes(path: str, content: bytes, *, overwrite: bool = True) -> None:
    """Write a file by way of a temporary neighbour, so that it is never half-written.

    Devices and pipes are written straight.

    Parameters
    ----------
    path : str
        Path of the file.
    content : bytes
        Its content.
    overwrite : bool
        Replace an existing file; False refuses.

    Raises
    ------
    InputError
        When the file exists and may not be replaced, the folder is missing, or the path is a
        folder.
    WriteError
        When writing fails; an existing file is untouched then.
    """
    refuse_unwritable(path, overwrite=overwrite)
    target = Path(path)
    if target.exists() and not target.is_file():
        _write_through(target, content)
        return
    if target.is_symlink():
        # Replace what the link points to, not the link.
        target = Path(os.path.realpath(target))
    temporary: str | None = None
    try:
        mode = target.stat().st_mode & 0o777 if target.exists() else 0o666 & ~_umask()
        handle, temporary = tempfile.mkstemp(dir=target.parent, prefix=f".{target.name[:100]}.")
        with os.fdopen(handle, "wb") as file:
            file.write(content)
            file.flush()
            os.fsync(file.fileno())
        Path(temporary).chmod(mode)
        if overwrite:
            os.replace(temporary, target)
        else:
            # Unlike replace, link fails when somebody made the file in the meantime.
            os.link(temporary, target)
            os.unlink(temporary)
        temporary = None
    except FileExistsError:
        raise _exists(path) from None
    except OSError as error:
        raise WriteError(f"{path} could not be written: {error.strerror or error}") from error
    finally:
        if temporary is not None:
            with contextlib.suppress(OSError):
                os.unlink(temporary)


def _write_through(target: Path, content: bytes) -> None:
    """Write to a device or pipe, such as /dev/null, which must not be replaced by a file."""
    try:
        with target.open("wb") as stream:
            stream.write(content)
    except BrokenPipeError:
        raise
    except OSError as error:
        raise WriteError(f"{target} could not be written: {error.strerror or error}") from error


def refuse_unwritable(path: str, *, overwrite: bool = True) -> None:
    """Raise before a long job for a path that cannot be written after it.

    Raises
    ------
    InputError
        As `write_bytes`.
    """
    target = Path(path)
    try:
        # Unlike is_dir this raises for paths that no file can have.
        with contextlib.suppress(FileNotFoundError, NotADirectoryError):
            target.lstat()
        if target.is_dir():
            raise InputError(Fault("this is a folder, not a file.", path, "Name a file."))
        if not target.parent.is_dir():
            raise InputError(Fault("its folder does not exist.", path, "Make the folder first."))
        if not overwrite and (target.exists() or target.is_symlink()):
            raise _exists(path)
    except (OSError, ValueError) as error:
        if isinstance(error, InputError):
            raise
        reason = getattr(error, "strerror", None) or str(error)
        raise InputError(Fault(f"the path cannot be used: {reason}.", path[:200])) from None


def _exists(path: str) -> InputError:
    """Return the error of a file that may not be replaced."""
    remedy = "Choose another name, or replace it with --force."
    return InputError(Fault("the file exists already.", path, remedy))


def _umask() -> int:
    """Return the permissions that new files do without."""
    mask = os.umask(0)
    os.umask(mask)
    return mask
