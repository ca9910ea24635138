"""Target and instrument files for whole-command tests; every star and instrument is invented."""

from __future__ import annotations

KNOWN = """\
name: Known source
spin_frequency: 290 Hz
column_density: 1.1e20 cm-2
distance: {value: 310 pc, uncertainty: 20 pc}
mass: 1.5 Msun
radius: 12.2 km
inclination: 57 deg
hot_spots:
  - {colatitude: 71 deg, longitude: 0 deg, angular_radius: 9 deg, temperature: 0.13 keV}
  - {colatitude: 118 deg, longitude: 188 deg, angular_radius: 12 deg, temperature: 0.12 keV}
"""

DRAWN = """\
name: Unknown source
spin_frequency: 317 Hz
flux: {value: 2.2e-13 erg s-1 cm-2, band: 0.5-2.0 keV, absorbed: true, uncertainty: 5 %}
pulsed_fraction: {value: 0.45, uncertainty: 0.05, definition: peak-to-trough, band: 0.3-1.5 keV}
column_density: 1.0e20 cm-2
temperature: {value: 0.12 keV, frame: surface}
distance: {value: 260 pc, uncertainty: 12 pc}
mass: {value: 1.5 Msun, uncertainty: 0.1 Msun}
"""

INSTRUMENT = """\
name: Test instrument (invented)
effective_area: area.csv
channels: {band: 0.3-3.0 keV, width: 100 eV}
background: {rate: 0.2 s-1, photon_index: 0.7}
background_knowledge: 10 %
"""

AREA = """\
energy_kev,area_cm2
0.2,500
1.0,900
4.0,300
"""


def changed(text: str, *changes: tuple[str, str]) -> str:
    """Return a file with pieces replaced, each of which must be there."""
    for old, new in changes:
        assert old in text, old
        text = text.replace(old, new, 1)
    return text
