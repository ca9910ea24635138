"""What every test finds: a home of its own, one thread, no colour, and valid defaults to change."""

from __future__ import annotations

import os
import shutil
import tempfile
from pathlib import Path

import pytest

_HOME = tempfile.mkdtemp(prefix="exptime-tests-")
# Before numpy, astropy and matplotlib are imported: they read these once.
os.environ["HOME"] = _HOME
os.environ["MPLCONFIGDIR"] = str(Path(_HOME, "matplotlib"))
for _variable in ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ[_variable] = "1"
for _variable in (
    *("NO_COLOR", "FORCE_COLOR", "CLICOLOR", "CLICOLOR_FORCE", "PYTHON_COLORS"),
    *("COLORTERM", "COLUMNS", "LINES", "TTY_COMPATIBLE", "TTY_INTERACTIVE"),
):
    os.environ.pop(_variable, None)

from hypothesis import settings  # noqa: E402  after the environment is set

# Busy machines are no reason to fail; the same examples everywhere make failures repeatable.
settings.register_profile("exptime", deadline=None, derandomize=True, print_blob=True)
settings.load_profile("exptime")


def pytest_unconfigure() -> None:
    """Remove the temporary home."""
    shutil.rmtree(_HOME, ignore_errors=True)


@pytest.fixture
def empty_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """Return an empty folder that is the working directory."""
    monkeypatch.chdir(tmp_path)
    return tmp_path
