"""Invented targets and searches for the tests of geometries."""

from __future__ import annotations

from exptime.geometry.candidates import Search
from exptime.geometry.likelihood import bands_of
from exptime.instrument.reader import read_instrument
from exptime.interstellar.absorption import load_absorption
from exptime.observation.bands import band_energy, band_responses
from exptime.target.reader import read_target_text

TARGET = {
    "name": "Source B",
    "spin_frequency": "250 Hz",
    "flux": "{value: 4e-13 erg s-1 cm-2, band: 0.5-2.0 keV, absorbed: true}",
    "pulsed_fraction": "{value: 0.5, uncertainty: 0.04, definition: rms, band: 0.5-2.0 keV}",
    "column_density": "2e20 cm-2",
    "temperature": "{value: 0.12 keV, frame: surface}",
    "distance": "{value: 400 pc, uncertainty: 30 pc}",
}


def fraction(value: float, uncertainty: float, definition: str = "peak-to-trough") -> str:
    """Return the entry of a pulsed fraction."""
    return (
        f"{{value: {value}, uncertainty: {uncertainty}, definition: {definition}, "
        "band: 0.5-2.0 keV}"
    )


def search_of(is_star_fixed: bool = False, **changes: str | None) -> Search:
    """Return the search for geometries of the target with keys changed, added or removed."""
    entries = {**TARGET, **changes}
    text = "".join(f"{key}: {value}\n" for key, value in entries.items() if value is not None)
    target = read_target_text(text, "t.yaml")
    absorption = load_absorption(target.abundances)
    assert target.flux is not None
    return Search(
        target=target,
        flux=band_energy(target.flux, absorption),
        pulses=band_responses(bands_of(target), absorption, read_instrument),
        is_star_fixed=is_star_fixed,
    )
