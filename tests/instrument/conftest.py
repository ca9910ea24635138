"""A good instrument description that each test changes in one place."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from exptime.instrument.reader import read_instrument
from exptime.instrument.records import Instrument

GOOD = {
    "name": "Test bench (invented)",
    "effective_area": "area.csv",
    "redistribution": "{fwhm: 80 eV, at: 1 keV, law: sqrt}",
    "channels": "{band: 0.3-2.3 keV, width: 100 eV}",
    "background": "{rate: 0.4 s-1, photon_index: 0.7}",
    "background_knowledge": "10 %",
    "time_resolution": "50 us",
    "area_uncertainty": "3 %",
}
AREA = "energy (keV), area (cm2)\n0.2, 100\n1.0, 900\n2.5, 400\n8.0, 20\n"

Changes = dict[str, str | None]


def write(folder: Path, changes: Changes, area: str = AREA) -> Path:
    """Write the description with keys changed, added or (None) removed; return its folder."""
    folder.mkdir(parents=True, exist_ok=True)
    (folder / "area.csv").write_text(area, encoding="utf-8")
    entries = {**GOOD, **changes}
    text = "".join(f"{key}: {value}\n" for key, value in entries.items() if value is not None)
    (folder / "profile.yaml").write_text(text, encoding="utf-8")
    return folder


@pytest.fixture
def bench(tmp_path: Path) -> Callable[..., Instrument]:
    """Return a reader of the description with keys changed."""

    def read(*, area: str = AREA, **changes: str | None) -> Instrument:
        return read_instrument(str(write(tmp_path / "bench", changes, area)))

    return read


def background_table(energies: np.ndarray, rates: np.ndarray) -> str:
    """Return a table of a background spectrum."""
    rows = zip(energies, rates, strict=True)
    return "energy (keV), rate (ct / (s keV))\n" + "".join(f"{e!r}, {r!r}\n" for e, r in rows)
