"""Read which module imports which, without importing any."""

from __future__ import annotations

import ast
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

ROOT = Path(__file__).resolve().parents[1]

FLOORS = (
    ("cli", ("cli", "__main__", "tables")),
    ("api", ("", "api", "given")),
    ("report", ("report",)),
    ("study", ("study",)),
    ("geometry", ("geometry",)),
    ("information", ("information",)),
    ("visibility", ("visibility",)),
    ("observation", ("observation",)),
    ("instrument", ("instrument",)),
    ("target", ("target",)),
    ("interstellar", ("interstellar",)),
    ("star", ("star",)),
    ("documents", ("documents",)),
    (
        "ground",
        (
            *("errors", "constants", "limits", "quantities"),
            *("parallel", "progress", "arrays", "quadrature", "_resources"),
        ),
    ),
)
"""From top to bottom: name of the floor, and the first names of its modules."""


@dataclass(frozen=True, slots=True)
class Import:
    """One import statement of one module."""

    importer: str
    imported: str
    place: str


def module_files(root: Path = ROOT, package: str = "exptime") -> dict[str, Path]:
    """Return every module of the package with its file."""
    found = {}
    for file in sorted((root / package).rglob("*.py")):
        parts = file.relative_to(root).with_suffix("").parts
        found[".".join(parts[:-1] if parts[-1] == "__init__" else parts)] = file
    return found


def read_imports(root: Path = ROOT, package: str = "exptime") -> list[Import]:
    """Return every import of the package's own modules, inside functions and checks too."""
    files = module_files(root, package)
    found = []
    for importer, file in files.items():
        for node in ast.walk(ast.parse(file.read_text(encoding="utf-8"))):
            for imported in _imported(node, files, package):
                place = f"{file.relative_to(root)}:{getattr(node, 'lineno', 0)}"
                found.append(Import(importer, imported, place))
    return found


def _imported(node: ast.AST, files: dict[str, Path], package: str) -> Iterator[str]:
    """Yield the package's modules that a statement (or a call by name) imports."""
    if isinstance(node, ast.Import):
        names = [alias.name for alias in node.names]
    elif isinstance(node, ast.ImportFrom):
        base = node.module or ""
        names = [
            f"{base}.{alias.name}" if f"{base}.{alias.name}" in files else base
            for alias in node.names
        ]
    elif isinstance(node, ast.Call) and _called(node) in ("import_module", "__import__"):
        names = [
            argument.value
            for argument in node.args
            if isinstance(argument, ast.Constant) and isinstance(argument.value, str)
        ]
    else:
        return
    yield from (name for name in names if name == package or name.startswith(f"{package}."))


def _called(call: ast.Call) -> str:
    function = call.func
    return getattr(function, "id", None) or getattr(function, "attr", "")


def floor_of(module: str) -> int:
    """Return the number of a module's floor, zero at the top.

    Raises
    ------
    LookupError
        For a module that belongs to no floor.
    """
    first = [*module.split("."), ""][1]
    for number, (_, names) in enumerate(FLOORS):
        if first in names:
            return number
    raise LookupError(module)


def upward(imports: list[Import]) -> list[str]:
    """Return one sentence for each import that does not go down or stay in its subpackage."""
    faults = []
    for each in imports:
        upper, lower = floor_of(each.importer), floor_of(each.imported)
        if lower < upper:
            names = f"{FLOORS[upper][0]} imports from {FLOORS[lower][0]} above it"
            faults.append(f"{each.place}: {names} ({each.importer} -> {each.imported})")
    return faults


def cycles(imports: list[Import]) -> list[str]:
    """Return one sentence for each chain of imports that comes back to its start."""
    graph: dict[str, list[str]] = {}
    for each in imports:
        graph.setdefault(each.importer, []).append(each.imported)
    found: list[str] = []
    finished: set[str] = set()

    def visit(module: str, path: list[str]) -> None:
        if module in path:
            found.append(" -> ".join([*path[path.index(module) :], module]))
        elif module not in finished:
            for imported in graph.get(module, []):
                visit(imported, [*path, module])
            finished.add(module)

    for module in graph:
        visit(module, [])
    return found
