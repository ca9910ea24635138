"""The house stands as it was drawn: floors, start-up, who touches files, sizes."""

from __future__ import annotations

import ast
import subprocess
import sys
from pathlib import Path

import pytest

from tests.imports import FLOORS, ROOT, cycles, floor_of, module_files, read_imports, upward

FILE_FLOORS = ("documents", "report", "cli")
FILE_MODULES = ("exptime._resources",)
FILE_CALLS = {
    *("open", "read_text", "read_bytes", "write_text", "write_bytes", "mkdir", "unlink", "rmdir"),
    *("touch", "rename", "load", "save", "savez", "savez_compressed", "loadtxt", "genfromtxt"),
    *("fromfile", "tofile", "memmap", "savetxt", "NamedTemporaryFile", "mkstemp", "mkdtemp"),
}
SHIPPED = ("shipped_folder", "shipped_table")
DECLARATIONS = ("exptime.study.records", "exptime.target.fields")
HEAVY = ("matplotlib", "jinja2", "rich", "astropy.table", "astropy.io.fits", "numpy", "scipy")


def test_imports_only_go_down() -> None:
    """No module imports from a floor above its own."""
    assert upward(read_imports()) == []


def test_nobody_imports_the_makers_of_tables() -> None:
    """The modules that remake shipped numbers are run by hand only."""
    makers = [
        each.place
        for each in read_imports()
        if each.imported.startswith("exptime.tables")
        and not each.importer.startswith("exptime.tables")
    ]
    assert makers == []


def test_siblings_import_each_other_without_a_cycle() -> None:
    """No chain of imports comes back to where it started."""
    assert cycles(read_imports()) == []


@pytest.fixture
def crooked_house(tmp_path: Path) -> Path:
    """Return a made-up package with one of each mistake."""
    files = {
        "exptime/__init__.py": "",
        "exptime/star/__init__.py": "",
        "exptime/star/hidden.py": "def f():\n    from exptime.report import page\n",
        "exptime/star/typed.py": "from typing import TYPE_CHECKING\nif TYPE_CHECKING:\n"
        "    import exptime.geometry.draws\n",
        "exptime/star/one.py": "from exptime.star import two\n",
        "exptime/star/two.py": "from exptime.star.one import f\n",
        "exptime/geometry/__init__.py": "",
        "exptime/geometry/draws.py": "from exptime.star import one\n",
        "exptime/report/__init__.py": "",
        "exptime/report/page.py": "import exptime.star.one\n",
    }
    for name, text in files.items():
        (tmp_path / name).parent.mkdir(parents=True, exist_ok=True)
        (tmp_path / name).write_text(text)
    return tmp_path


def test_an_upward_import_is_found_wherever_it_hides(crooked_house: Path) -> None:
    """Imports in functions and under TYPE_CHECKING are named with file, line and both floors."""
    assert upward(read_imports(crooked_house)) == [
        "exptime/star/hidden.py:2: star imports from report above it "
        "(exptime.star.hidden -> exptime.report.page)",
        "exptime/star/typed.py:3: star imports from geometry above it "
        "(exptime.star.typed -> exptime.geometry.draws)",
    ]


def test_a_cycle_is_found(crooked_house: Path) -> None:
    """Two siblings that import each other are named."""
    assert "exptime.star.one -> exptime.star.two -> exptime.star.one" in cycles(
        read_imports(crooked_house)
    )


def test_every_module_belongs_to_a_floor() -> None:
    """A new subpackage has to be given its place."""
    for module in module_files():
        assert FLOORS[floor_of(module)]


def test_no_module_is_longer_than_300_lines() -> None:
    """What grows further is split; pure declarations may reach 450."""
    too_long = {}
    for name, file in module_files().items():
        length = len(file.read_text(encoding="utf-8").splitlines())
        if length > (450 if name in DECLARATIONS else 300):
            too_long[name] = length
    assert too_long == {}


def _file_calls(tree: ast.AST) -> list[tuple[int, str]]:
    """Return calls that touch files, those of functions that fetch shipped data left out."""
    found: list[tuple[int, str]] = []
    for node in ast.iter_child_nodes(tree):
        if isinstance(node, ast.FunctionDef) and _fetches_shipped_data(node):
            continue
        if isinstance(node, ast.Call):
            name = getattr(node.func, "id", None) or getattr(node.func, "attr", "")
            if name in FILE_CALLS:
                found.append((node.lineno, name))
        found.extend(_file_calls(node))
    return found


def _fetches_shipped_data(function: ast.FunctionDef) -> bool:
    calls = [node for node in ast.walk(function) if isinstance(node, ast.Call)]
    return any(getattr(call.func, "id", "") in SHIPPED for call in calls)


def test_only_a_few_floors_touch_files() -> None:
    """Users' files are read by documents, shipped data come through _resources."""
    found = []
    for name, file in module_files().items():
        floor = name.split(".")[1] if "." in name else ""
        if floor in (*FILE_FLOORS, "tables") or name in FILE_MODULES:
            continue
        tree = ast.parse(file.read_text(encoding="utf-8"))
        found += [f"{file.relative_to(ROOT)}:{line}: {call}" for line, call in _file_calls(tree)]
    assert found == []


def test_a_file_call_is_found() -> None:
    """The search above sees a call, and lets shipped data through."""
    tree = ast.parse(
        "def f():\n    return Path('x').read_text()\n"
        "def g():\n    return shipped_folder('x').joinpath('y').read_text()\n"
    )
    assert _file_calls(tree) == [(2, "read_text")]


def test_nothing_below_report_prints() -> None:
    """Numbers are computed in silence."""
    found = []
    for name, file in module_files().items():
        if name.split(".")[1:2] in (["cli"], ["tables"], ["report"]):
            continue
        for node in ast.walk(ast.parse(file.read_text(encoding="utf-8"))):
            if isinstance(node, ast.Call) and getattr(node.func, "id", "") == "print":
                found.append(f"{file.relative_to(ROOT)}:{node.lineno}")
    assert found == []


def _loaded_after(statement: str) -> set[str]:
    """Return which of the heavy packages a fresh process has loaded after a statement."""
    script = f"{statement}\nimport sys\nprint(*[n for n in {HEAVY!r} if n in sys.modules])"
    run = subprocess.run(
        [sys.executable, "-c", script], capture_output=True, text=True, check=True, timeout=60
    )
    return set(run.stdout.split("\n")[-2].split())


def test_importing_the_package_loads_nothing_heavy() -> None:
    """`import exptime` is instant: everything comes on first use."""
    assert _loaded_after("import exptime") == set()


def test_the_check_for_heavy_packages_sees_one() -> None:
    """The search above finds what is loaded."""
    assert "numpy" in _loaded_after("import numpy")


@pytest.mark.parametrize("arguments", [["--help"], ["--version"], ["forecast", "--help"], ["nope"]])
def test_help_and_usage_errors_load_nothing_heavy(arguments: list[str]) -> None:
    """Help, version and usage errors need no science."""
    statement = (
        "import contextlib, io\nfrom exptime.cli import main\n"
        "with contextlib.redirect_stdout(io.StringIO()), contextlib.redirect_stderr(io.StringIO()):"
        f"\n    main({arguments!r})"
    )
    assert _loaded_after(statement) == set()


def test_no_subpackage_is_named_like_a_public_function() -> None:
    """Importing such a subpackage would replace the function."""
    import exptime

    subpackages = {name.split(".")[1] for name in module_files() if "." in name}
    assert subpackages.isdisjoint(getattr(exptime, "__all__", ()))
