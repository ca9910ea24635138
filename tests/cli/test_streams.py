"""Standard streams as they are in the wild: terminals, closed, full, left early, in a C locale."""

from __future__ import annotations

import os
import pty
import subprocess
import sys
from pathlib import Path

import pytest

from tests.cli.running import run_fresh

BAR = """
from exptime.cli.progress_bar import progress_bar
with progress_bar("[red]Geometries", is_quiet={quiet}) as progress:
    for done in range(9):
        progress(done, 8)
print("answer")
"""


def _terminal_errors(script: str) -> tuple[str, str]:
    """Run a script with standard error on a terminal; return its output and what that showed."""
    leader, follower = pty.openpty()
    environment = {**os.environ, "TERM": "xterm"}
    with subprocess.Popen(
        [sys.executable, "-c", script], stdout=subprocess.PIPE, stderr=follower, env=environment
    ) as process:
        os.close(follower)
        shown = b""
        while True:
            try:
                piece = os.read(leader, 4096)
            except OSError:
                # Linux says so when the last writer has closed a terminal.
                break
            if not piece:
                break
            shown += piece
        assert process.stdout is not None
        output = process.stdout.read().decode()
    os.close(leader)
    return output, shown.decode()


def test_the_progress_bar_shows_on_a_terminal_only_on_standard_error() -> None:
    """Standard output holds the answer and nothing else."""
    output, shown = _terminal_errors(BAR.format(quiet=False))
    assert output == "answer\n"
    assert "100%" in shown
    assert "[red]Geometries" not in output


def test_quiet_shows_no_bar() -> None:
    """Not even on a terminal."""
    assert _terminal_errors(BAR.format(quiet=True)) == ("answer\n", "")


def test_a_piped_standard_error_shows_no_bar() -> None:
    """Logs stay clean."""
    run = subprocess.run(
        [sys.executable, "-c", BAR.format(quiet=False)], capture_output=True, text=True, check=True
    )
    assert (run.stdout, run.stderr) == ("answer\n", "")


@pytest.mark.parametrize("stream", [1, 2])
def test_a_closed_stream_is_no_error(stream: int) -> None:
    """What is written for nobody goes nowhere."""
    command = f'exec "$0" -m exptime --help {stream}>&-'
    run = subprocess.run(["sh", "-c", command, sys.executable], capture_output=True, check=False)
    assert run.returncode == 0
    assert run.stderr == b""


def test_a_reader_that_leaves_early_sees_no_traceback() -> None:
    """`exptime ... | head` is quiet."""
    reader, writer = os.pipe()
    os.close(reader)
    run = subprocess.run(
        [sys.executable, "-m", "exptime", "start", "x", "--output", "-"],
        stdout=writer,
        stderr=subprocess.PIPE,
        check=False,
    )
    os.close(writer)
    assert (run.returncode, run.stderr) == (1, b"")


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="needs a device that is always full")
def test_a_full_disk_is_one_message() -> None:
    """A failed write has status 1."""
    with open("/dev/full", "w") as full:
        run = subprocess.run(
            [sys.executable, "-m", "exptime", "start", "x", "--output", "-"],
            stdout=full,
            stderr=subprocess.PIPE,
            check=False,
        )
    assert (run.returncode, run.stderr) == (1, b"exptime: No space left on device\n")


def test_output_is_utf8_in_a_c_locale() -> None:
    """Names keep their letters wherever the program runs."""
    shown = run_fresh("start", "Étoile µ", "--output", "-", LC_ALL="C", PYTHONIOENCODING="ascii")
    assert shown.status == 0
    assert 'name: "Étoile µ"' in shown.output


def test_an_argument_that_is_no_text_is_a_message() -> None:
    """Half a surrogate pair in a file name makes one fault, not a second error."""
    shown = run_fresh("check", "no-\udcff-such.yaml")
    assert shown.status == 2
    assert shown.errors.startswith("exptime: no-")
    assert "Traceback" not in shown.errors
