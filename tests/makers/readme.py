"""Render the generated parts of the README: ``python -m tests.makers.readme``.

Parts stand between comments: tables of keys, and the output of the commands of the session.
"""

from __future__ import annotations

import re
import shlex
import subprocess
import sys
import tempfile
from pathlib import Path

from tests.imports import ROOT

README = ROOT / "README.md"
_KEYS = re.compile(r"(<!-- keys: (\w+) -->\n).*?(<!-- end of keys -->)", re.DOTALL)
_OUTPUT = re.compile(
    r"(<!-- output(?: of (\d+) lines)?: exptime (.+?) -->\n)(?:```text\n.*?\n```\n)?", re.DOTALL
)


def with_keys(text: str) -> str:
    """Return the README with the tables of keys rendered from the tables of fields."""
    from exptime.documents.listing import render_markdown
    from exptime.instrument.fields import INSTRUMENT_FIELDS
    from exptime.target.fields import TARGET_FIELDS

    tables = {"target": TARGET_FIELDS, "instrument": INSTRUMENT_FIELDS}
    return _KEYS.sub(
        lambda found: f"{found[1]}\n{render_markdown(tables[found[2]])}{found[3]}", text
    )


def with_session(text: str) -> str:
    """Return the README with the commands of the session and what they print."""
    with tempfile.TemporaryDirectory() as folder:
        return _OUTPUT.sub(
            lambda found: f"{found[1]}{_shown(found[3], found[2], Path(folder))}", text
        )


def _shown(arguments: str, most: str | None, folder: Path) -> str:
    """Return one command and its output, or its first lines, as a block of Markdown."""
    done = subprocess.run(
        [sys.executable, "-m", "exptime", *shlex.split(arguments)],
        cwd=folder,
        capture_output=True,
        text=True,
        check=True,
        timeout=300,
    )
    lines = done.stdout.rstrip().splitlines()
    if most is not None and len(lines) > int(most):
        lines = [*lines[: int(most)], "[...]"]
    return "\n".join(["```text", f"$ exptime {arguments}", *lines, "```", ""])


if __name__ == "__main__":
    README.write_text(with_session(with_keys(README.read_text(encoding="utf-8"))), encoding="utf-8")
