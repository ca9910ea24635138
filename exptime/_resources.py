"""Find what ships with the program: templates, instrument profiles and computed tables.

The one place that knows where they lie: inside the installed package, or beside it in an
uninstalled checkout.
"""

from __future__ import annotations

from importlib.resources import files
from importlib.resources.abc import Traversable
from pathlib import Path

from exptime.errors import ExptimeError


def shipped_folder(name: str) -> Traversable:
    """Return a folder of shipped data.

    Parameters
    ----------
    name : {"templates", "instrument_profiles"}
        Name of the folder.

    Raises
    ------
    ExptimeError
        When the folder is neither in the installed package nor beside it.
    """
    installed = files("exptime").joinpath("_data", name)
    if installed.is_dir():
        return installed
    beside = Path(__file__).resolve().parents[1] / name
    if beside.is_dir():
        return beside
    raise ExptimeError(
        f"the folder {name} that ships with exptime is neither in {installed} nor in {beside}; "
        "install exptime again"
    )


def shipped_table(name: str) -> Traversable:
    """Return a file of computed numbers, made by `python -m exptime.tables.…`.

    Parameters
    ----------
    name : str
        File name in ``exptime/tables/data``.
    """
    return files("exptime").joinpath("tables", "data", name)
