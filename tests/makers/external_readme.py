"""Make tests/external/README.md anew from the results of the tests beside it.

Run ``python -m tests.makers.external_readme`` in the folder of the repository: it runs the tests
of tests/external, slow ones included, and writes what they compared. Files that runs of pytest
wrote under EXPTIME_WRITE_CHECKS may be named instead.
"""

from __future__ import annotations

import ast
import json
import os
import re
import subprocess
import sys
import tempfile
from collections import Counter
from collections.abc import Iterable
from pathlib import Path

from tests.external.recording import Record

FOLDER = Path(__file__).parents[1] / "external"
PAGE = FOLDER / "README.md"

INTRODUCTION = """\
# What is checked against the outside

Every number below was compared by a test of this folder when the page was made. The page is
written by `python -m tests.makers.external_readme` from the results of the tests themselves; a
comparison that fails stops it.

Columns: the value of the program (*ours*) and that of the source (*theirs*) at the point that
comes closest to its tolerance, out of the number of points compared; their *difference*, and the
*tolerance* that the test asserts, both relative where they are in per cent or marked so. The
*kind* says what the other value is:

- **published**: stands in the source, or follows from it without a calculation of one's own;
- **computed independently**: worked out from the source's relation by other code than the
  program's (mpmath, a package, a closed form, a sampler);
- **common practice**: a rule of the trade with no source;
- **from memory**: the source is believed right but was not at hand.

A range in place of a value means that the source is not sharper than that, or that it leaves
open what a sharper comparison would need.
"""


def render(records: Iterable[Record]) -> str:
    """Return the page."""
    topics: dict[str, dict[str, list[Record]]] = {}
    for record in sorted(records, key=lambda each: each.topic):
        topics.setdefault(record.topic, {}).setdefault(record.check, []).append(record)
    checks = [points for group in topics.values() for points in group.values()]
    kinds = Counter(points[0].kind for points in checks)
    shares = ", ".join(f"{number} {kind}" for kind, number in kinds.most_common())
    total = sum(record.points for points in checks for record in points)
    parts = [INTRODUCTION, f"{len(checks)} checks of {total} numbers: {shares}.\n"]
    for topic, group in topics.items():
        parts.append(f"\n## {topic}\n")
        parts.append(
            "| check | ours | theirs | difference | tolerance | points | source | kind |\n"
            "|---|---|---|---|---|---|---|---|"
        )
        parts += [_row(points) for points in group.values()]
        notes = [
            f"- {check}: {note}." for check, points in group.items() for note in _notes(points)
        ]
        parts += ["", *notes] if notes else []
        parts += _every_point(group)
    return "\n".join(parts) + "\n"


def _cell(text: str) -> str:
    return text.replace("|", "\\|")


def _row(points: list[Record]) -> str:
    worst = max(points, key=lambda record: record.strain)
    label = f"{worst.check} ({worst.at})" if worst.at else worst.check
    cells = (label, worst.ours, worst.theirs, worst.difference, worst.tolerance)
    count = sum(record.points for record in points)
    rest = (str(count), worst.source, worst.kind)
    return "| " + " | ".join(_cell(text) for text in (*cells, *rest)) + " |"


def _notes(points: list[Record]) -> list[str]:
    return list(dict.fromkeys(record.note for record in points if record.note))


def _every_point(group: dict[str, list[Record]]) -> list[str]:
    tables = {check: points for check, points in group.items() if len(points) > 1}
    if not tables:
        return []
    lines = ["", "<details><summary>Every labelled point</summary>", ""]
    lines += [
        "| check | at | ours | theirs | difference | tolerance |",
        "|---|---|---|---|---|---|",
    ]
    for check, points in tables.items():
        for record in points:
            cells = (check, record.at, record.ours, record.theirs, record.difference)
            lines.append("| " + " | ".join(map(_cell, (*cells, record.tolerance))) + " |")
    return [*lines, "", "</details>"]


def names_in_tests() -> set[str]:
    """Return the checks that the tests of the folder write out."""
    names = set()
    for path in sorted(FOLDER.glob("test_*.py")):
        for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
            if (
                isinstance(node, ast.Call)
                and isinstance(node.func, ast.Attribute)
                and isinstance(node.func.value, ast.Name)
                and node.func.value.id == "checks"
            ):
                names.add(ast.literal_eval(node.args[0]))
    return names


def checks_in_page(page: str) -> list[str]:
    """Return the first cells of the rows of a page: a check, and a label in brackets behind."""
    rows = re.findall(r"^\| (.+)$", page, flags=re.MULTILINE)
    first = [row.replace("\\|", "\0").split(" | ")[0].replace("\0", "|") for row in rows]
    return [cell for cell in first if cell != "check"]


def run_tests() -> list[Record]:
    """Run the tests of the folder and return what they compared."""
    with tempfile.TemporaryDirectory() as folder:
        file = Path(folder, "checks.json")
        command = [sys.executable, "-m", "pytest", "-q", "-m", "slow or not slow", str(FOLDER)]
        environment = {**os.environ, "EXPTIME_WRITE_CHECKS": str(file)}
        subprocess.run(command, check=True, env=environment, cwd=FOLDER.parents[1])
        return read_records(file)


def read_records(file: Path) -> list[Record]:
    """Return what a run of pytest wrote."""
    return [Record(**entry) for entry in json.loads(file.read_text(encoding="utf-8"))]


if __name__ == "__main__":
    given = [record for name in sys.argv[1:] for record in read_records(Path(name))]
    PAGE.write_text(render(given or run_tests()), encoding="utf-8")
