"""The same numbers for any number of processes, however the program was started."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from functools import partial
from pathlib import Path

import numpy as np
import pytest

from exptime.parallel import usable_cores, workers
from tests.cli.targets import AREA, INSTRUMENT

SCRIPT = """\
import json, sys
from exptime.parallel import workers
from operator import neg
with workers(2) as team:
    print(json.dumps(team.map(neg, list(range(20)))))
"""

FORECAST = """\
import dataclasses, json, sys
import numpy as np
import exptime
from exptime.api import forecast

def plain(value):
    if dataclasses.is_dataclass(value):
        return {f.name: plain(getattr(value, f.name)) for f in dataclasses.fields(value)}
    if isinstance(value, np.ndarray):
        return value.tolist()
    if isinstance(value, (tuple, list)):
        return [plain(each) for each in value]
    return value

result = forecast("target.yaml", "instrument.yaml", exposures=["100 ks", "1 Ms"], draws=16,
                  jobs=JOBS, fixed_star=True)
print(json.dumps(plain(result.record), sort_keys=True))
"""

TARGET = """\
name: Unknown source
spin_frequency: 150 Hz
flux: {value: 2.2e-13 erg s-1 cm-2, band: 0.5-2.0 keV, absorbed: true}
pulsed_fraction: {value: 0.45, uncertainty: 0.15, definition: peak-to-trough, band: 0.3-1.5 keV}
column_density: 1.0e20 cm-2
temperature: {value: 0.12 keV, frame: surface}
distance: {value: 260 pc, uncertainty: 12 pc}
"""


def dot(scale: float, vector: np.ndarray) -> float:
    """Return a product whose last bits depend on the number of threads of BLAS."""
    return float(scale * (vector @ vector))


@pytest.mark.parametrize("jobs", [1, 2])
def test_results_come_in_the_order_of_the_items(jobs: int) -> None:
    """And progress is told after each."""
    told: list[tuple[int, int]] = []
    with workers(jobs) as team:
        found = team.map(abs, list(range(-20, 0)), lambda *done: told.append(done), chunk=3)
        few = team.map(abs, [-2, 1])
    assert found == list(range(20, 0, -1))
    assert told == [(done, 20) for done in range(1, 21)]
    assert few == [2, 1]


def test_processes_give_the_same_bits() -> None:
    """Dot products of a thousand numbers."""
    vectors = list(np.random.default_rng(1).random((12, 1000)))
    with workers(1) as one, workers(2) as two:
        assert one.map(partial(dot, 0.1), vectors) == two.map(partial(dot, 0.1), vectors)


def test_blas_has_one_thread_inside() -> None:
    """Whatever it had before, it has again afterwards."""
    from threadpoolctl import threadpool_info, threadpool_limits

    def threads() -> set[int]:
        return {each["num_threads"] for each in threadpool_info() if each["user_api"] == "blas"}

    with threadpool_limits(2, user_api="blas"):
        before = threads()
        with workers(1):
            assert threads() == {1}
        assert threads() == before


def test_a_failure_in_a_process_is_told() -> None:
    """The error itself comes back, and the processes end."""
    with workers(2) as team, pytest.raises(ValueError, match="'a'"):
        team.map(int, ["1"] * 10 + ["a"])


def test_there_is_a_core() -> None:
    """At least one."""
    assert usable_cores() >= 1


def run(arguments: list[str], folder: Path, text: str | None = None) -> str:
    """Run Python in a folder and return what it printed."""
    root = Path(__file__).parent.parent
    done = subprocess.run(
        [sys.executable, *arguments],
        input=text,
        capture_output=True,
        text=True,
        cwd=folder,
        timeout=300,
        check=False,
        env={**os.environ, "PYTHONPATH": str(root)},
    )
    assert done.returncode == 0, done.stderr
    return done.stdout


def test_a_script_needs_no_main_guard(empty_folder: Path) -> None:
    """New processes do not run it again: one line is printed."""
    (empty_folder / "script.py").write_text(SCRIPT)
    assert json.loads(run(["script.py"], empty_folder)) == [-n for n in range(20)]


def test_a_script_may_come_from_standard_input(empty_folder: Path) -> None:
    """`python -`: there is no file to run again."""
    assert json.loads(run(["-"], empty_folder, SCRIPT)) == [-n for n in range(20)]


@pytest.mark.slow
def test_a_forecast_is_the_same_for_any_number_of_jobs(empty_folder: Path) -> None:
    """Every number of the record, from a file and from standard input, with one job and two."""
    (empty_folder / "target.yaml").write_text(TARGET)
    (empty_folder / "instrument.yaml").write_text(INSTRUMENT)
    (empty_folder / "area.csv").write_text(AREA)
    (empty_folder / "one.py").write_text(FORECAST.replace("JOBS", "1"))
    (empty_folder / "two.py").write_text(FORECAST.replace("JOBS", "2"))
    one, two = run(["one.py"], empty_folder), run(["two.py"], empty_folder)
    assert one == two
    assert run(["-"], empty_folder, FORECAST.replace("JOBS", "2")) == one
