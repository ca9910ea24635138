"""Templates, instruments and tables are found however the package was installed."""

from __future__ import annotations

import os
import subprocess
import sys
import sysconfig
import tarfile
import venv
import zipfile
from pathlib import Path

import pytest

from tests.imports import ROOT

pytestmark = pytest.mark.slow

REPORT = """
from exptime._resources import shipped_folder, shipped_table
for name in ("templates", "instrument_profiles"):
    print(*sorted(item.name for item in shipped_folder(name).iterdir()))
print(len(shipped_table("rays.npz").read_bytes()))
"""


def _run(*command: str | Path, folder: Path, **environment: str) -> str:
    """Run a command somewhere and return its standard output."""
    clean = {name: value for name, value in os.environ.items() if name != "PYTHONPATH"}
    done = subprocess.run(
        [str(part) for part in command],
        cwd=folder,
        env={**clean, **environment},
        capture_output=True,
        text=True,
        check=False,
        timeout=300,
    )
    assert done.returncode == 0, done.stdout + done.stderr
    return done.stdout


def _contents(folder: Path) -> str:
    """Return what `REPORT` prints for the checkout, read without the package."""
    lines = [
        " ".join(sorted(item.name for item in (folder / name).iterdir()))
        for name in ("templates", "instrument_profiles")
    ]
    table = folder / "exptime" / "tables" / "data" / "rays.npz"
    return "\n".join([*lines, str(table.stat().st_size)]) + "\n"


@pytest.fixture(scope="module")
def unpacked(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return the source archive, built and unpacked."""
    folder = tmp_path_factory.mktemp("source")
    _run(sys.executable, "-m", "hatchling", "build", "-t", "sdist", "-d", folder, folder=ROOT)
    (archive,) = folder.glob("*.tar.gz")
    with tarfile.open(archive) as opened:
        opened.extractall(folder, filter="data")
    (inner,) = (item for item in folder.iterdir() if item.is_dir())
    return inner


@pytest.fixture(scope="module")
def wheel(unpacked: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return the wheel built from the source archive."""
    folder = tmp_path_factory.mktemp("wheel")
    _run(sys.executable, "-m", "hatchling", "build", "-t", "wheel", "-d", folder, folder=unpacked)
    (built,) = folder.glob("*.whl")
    return built


def _environment(folder: Path) -> Path:
    """Make a virtual environment that sees the packages of this one, without exptime itself."""
    venv.create(folder, with_pip=False)
    version = f"python{sys.version_info[0]}.{sys.version_info[1]}"
    packages = folder / "lib" / version / "site-packages"
    # Lines of such a file come after the environment's own packages, and the editable installs
    # that this process may have are not followed from there.
    (packages / "packages.pth").write_text(f"{sysconfig.get_paths()['purelib']}\n")
    return folder / "bin" / "python"


@pytest.fixture
def decoys(tmp_path: Path) -> Path:
    """Return a folder in which folders of the same names would mislead."""
    for name in ("templates", "instrument_profiles"):
        (tmp_path / name).mkdir()
        (tmp_path / name / "decoy.yaml").write_text("name: decoy\n")
    return tmp_path


@pytest.fixture(scope="module")
def installed(wheel: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return the Python of an environment into which the wheel is installed."""
    folder = tmp_path_factory.mktemp("clean") / "environment"
    python = _environment(folder)
    pip = (sys.executable, "-m", "pip", "--python", python, "--disable-pip-version-check")
    _run(*pip, "install", "--no-deps", "--no-index", wheel, folder=folder)
    return python


def test_the_wheel_holds_the_package_and_nothing_beside_it(wheel: Path) -> None:
    """No tests, no loose folders; the shipped data, the licence and the type marker are there."""
    names = zipfile.ZipFile(wheel).namelist()
    tops = {name.split("/")[0] for name in names}
    assert {top for top in tops if not top.endswith(".dist-info")} == {"exptime"}
    assert "exptime/py.typed" in names
    assert "exptime/_data/templates/target.yaml" in names
    assert any(name.endswith(".dist-info/licenses/LICENSE") for name in names)
    assert not [name for name in names if "__pycache__" in name or name.endswith(".pyc")]


def test_the_source_archive_holds_the_tests(unpacked: Path) -> None:
    """Whoever packages the program can test it."""
    assert (unpacked / "tests" / "conftest.py").is_file()
    assert not (unpacked / "exptime" / "_data").exists()


def test_an_installed_wheel_finds_its_data_among_decoys(installed: Path, decoys: Path) -> None:
    """The installed copy wins over folders of the working directory."""
    assert _run(installed, "-c", REPORT, folder=decoys) == _contents(ROOT)
    where = _run(installed, "-c", "import exptime; print(exptime.__file__)", folder=decoys)
    assert Path(where.strip()).is_relative_to(installed.parents[1])


def test_the_installed_command_writes_a_target(installed: Path, decoys: Path) -> None:
    """The console script runs from any folder."""
    command = installed.with_name("exptime")
    assert _run(command, "--version", folder=decoys).startswith("exptime 0.")
    _run(command, "start", "demo", folder=decoys)
    assert "name:" in (decoys / "demo.yaml").read_text(encoding="utf-8")


def test_a_zipped_wheel_finds_its_data(wheel: Path, decoys: Path, tmp_path: Path) -> None:
    """Nothing relies on the package lying in a folder."""
    python = _environment(tmp_path / "environment")
    shown = _run(python, "-c", REPORT, folder=decoys, PYTHONPATH=str(wheel))
    assert shown == _contents(ROOT)


def test_an_uninstalled_checkout_finds_its_data(
    unpacked: Path, decoys: Path, tmp_path: Path
) -> None:
    """The folders beside the package serve where nothing is installed."""
    python = _environment(tmp_path / "environment")
    shown = _run(python, "-c", REPORT, folder=decoys, PYTHONPATH=str(unpacked))
    assert shown == _contents(unpacked)


def test_an_editable_install_sees_changes_at_once(
    unpacked: Path, decoys: Path, tmp_path: Path
) -> None:
    """The data of an editable install are those of the tree, not a copy."""
    folder = tmp_path / "environment"
    python = _environment(folder)
    pip = (sys.executable, "-m", "pip", "--python", python, "--disable-pip-version-check")
    options = ("--no-deps", "--no-index", "--no-build-isolation")
    _run(*pip, "install", *options, "-e", unpacked, folder=folder)
    assert _run(python, "-c", REPORT, folder=decoys) == _contents(unpacked)
    fresh = unpacked / "templates" / "fresh.yaml"
    fresh.touch()
    try:
        assert "fresh.yaml" in _run(python, "-c", REPORT, folder=decoys)
    finally:
        fresh.unlink()
