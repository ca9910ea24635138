"""An invented instrument and targets, small enough for whole forecasts in tests."""

from __future__ import annotations

import numpy as np

from exptime.instrument.reader import read_instrument
from exptime.instrument.records import (
    BackgroundKnowledge,
    EffectiveArea,
    Instrument,
    Redistribution,
)
from exptime.study.forecast import make_forecast
from exptime.study.geometries import Draws
from exptime.study.records import Forecast, Goal
from exptime.target.reader import read_target_text
from exptime.target.records import Target

SPOT = "{colatitude: 70 deg, longitude: 0 deg, angular_radius: 12 deg, temperature: 0.12 keV}"
KNOWN = {
    "name": "Source C",
    "spin_frequency": "300 Hz",
    "column_density": "2e20 cm-2",
    "distance": "{value: 300 pc, uncertainty: 15 pc}",
    "inclination": "{value: 60 deg, uncertainty: 3 deg}",
    "hot_spots": f"[{SPOT}]",
}
DRAWN = {
    "name": "Source B",
    "spin_frequency": "150 Hz",
    "flux": "{value: 4e-13 erg s-1 cm-2, band: 0.5-2.0 keV, absorbed: true}",
    "pulsed_fraction": "{value: 0.5, uncertainty: 0.2, definition: rms, band: 0.5-2.0 keV}",
    "column_density": "2e20 cm-2",
    "temperature": "{value: 0.12 keV, frame: surface}",
    "distance": "{value: 400 pc, uncertainty: 30 pc}",
}
GOALS = (Goal(quantity="radius", precision=0.05), Goal(quantity="mass", precision=0.5))


def target_of(base: dict[str, str], **changes: str | None) -> Target:
    """Return a target with keys changed, added or removed."""
    entries = {**base, **changes}
    text = "".join(f"{key}: {value}\n" for key, value in entries.items() if value is not None)
    return read_target_text(text, "t.yaml")


def instrument_of(background_per_s: float = 0.1) -> Instrument:
    """Return a soft instrument of 27 channels and 16 phase bins."""
    edges = np.linspace(0.3, 3.0, 28)
    return Instrument(
        id="invented",
        name="Invented",
        area=EffectiveArea(
            energies_kev=np.array([0.2, 1.0, 4.0]),
            area_cm2=np.array([500.0, 1200.0, 300.0]),
            source="invented",
        ),
        redistribution=Redistribution(),
        channel_edges_kev=edges,
        background_per_s=np.full(27, background_per_s / 27.0),
        background_knowledge=BackgroundKnowledge(kind="fraction", fraction=0.1),
        area_uncertainty=0.03,
        phase_bins=16,
        assumptions=("The instrument is invented.",),
        warnings=("The instrument was never built.",),
    )


def forecast_of(
    target: Target, exposures_s: tuple[float, ...] = (1e5, 1e6), **options: object
) -> Forecast:
    """Forecast in this process."""
    arguments: dict[str, object] = {"goals": GOALS, **options}
    return make_forecast(
        target, instrument_of(), exposures_s, read_instrument=read_instrument, **arguments
    )  # type: ignore[arg-type]


def draws_of(count: int = 12, seed: int = 1) -> Draws:
    """Return a few draws for a star that is held."""
    return Draws(count=count, seed=seed, is_star_fixed=True)
