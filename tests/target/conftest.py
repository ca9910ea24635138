"""A good target file that each test changes in one place."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from exptime.target.reader import read_target_text
from exptime.target.records import Target

DRAWN = {
    "name": "Source B",
    "spin_frequency": "250 Hz",
    "flux": "{value: 4e-13 erg s-1 cm-2, band: 0.5-2.0 keV, absorbed: true}",
    "pulsed_fraction": "{value: 0.5, uncertainty: 0.04, definition: rms, band: 0.5-2.0 keV}",
    "column_density": "2e20 cm-2",
    "temperature": "{value: 0.12 keV, frame: surface}",
    "distance": "{value: 400 pc, uncertainty: 30 pc}",
}
"""Everything that is required where geometries are drawn."""

SPOTS = {
    "name": "Source C",
    "spin_frequency": "250 Hz",
    "column_density": "2e20 cm-2",
    "distance": "{value: 400 pc, uncertainty: 30 pc}",
    "inclination": "60 deg",
    "hot_spots": "[{colatitude: 50 deg, longitude: 20 deg, angular_radius: 8 deg, "
    "temperature: 0.11 keV}]",
}
"""Everything that is required where hot spots are given."""

Changes = dict[str, str | None]


def document(base: dict[str, str], changes: Changes) -> str:
    """Return the text of a target file with keys changed, added or (None) removed."""
    entries = {**base, **changes}
    return "".join(f"{key}: {text}\n" for key, text in entries.items() if text is not None)


@pytest.fixture
def drawn() -> Callable[..., Target]:
    """Return a reader of the drawn target with keys changed."""

    def read(**changes: str | None) -> Target:
        return read_target_text(document(DRAWN, changes), "t.yaml")

    return read


@pytest.fixture
def known() -> Callable[..., Target]:
    """Return a reader of the target with hot spots with keys changed."""

    def read(**changes: str | None) -> Target:
        return read_target_text(document(SPOTS, changes), "t.yaml")

    return read
