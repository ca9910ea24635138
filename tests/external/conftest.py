"""Keeps what is compared with the outside; EXPTIME_WRITE_CHECKS names a file to write it to."""

from __future__ import annotations

import json
import os
from collections.abc import Iterator
from dataclasses import asdict
from pathlib import Path

import pytest

from tests.external.recording import Checks, Record

_KEPT = pytest.StashKey[list[Record]]()


@pytest.fixture(scope="module")
def checks(request: pytest.FixtureRequest) -> Iterator[Checks]:
    """Return what asserts a comparison and keeps it."""
    topic = str(request.module.__doc__).splitlines()[0].rstrip(".")
    kept = Checks(topic=topic)
    yield kept
    request.config.stash.setdefault(_KEPT, []).extend(kept.records.values())


def pytest_sessionfinish(session: pytest.Session) -> None:
    """Write what was kept, if a file is named."""
    file = os.environ.get("EXPTIME_WRITE_CHECKS")
    if file:
        kept = [asdict(record) for record in session.config.stash.get(_KEPT, [])]
        Path(file).write_text(json.dumps(kept), encoding="utf-8")
