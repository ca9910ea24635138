"""Remake the tables of the invented instruments: ``python tests/makers/instrument_profiles.py``.

Every curve is a formula chosen for its character alone; none describes a real instrument.
"""

from __future__ import annotations

from pathlib import Path

import numpy as np

FOLDER = Path(__file__).resolve().parents[2] / "instrument_profiles"


def logistic(x, center, width):
    return 1.0 / (1.0 + np.exp(-(x - center) / width))


def soft_concentrator_area(energies):
    """Grazing mirrors that fade above 2 keV, behind a thin window with an edge at 0.6 keV."""
    mirrors = 2300.0 / (1.0 + (energies / 2.6) ** 3.2)
    window = np.exp(-0.035 * energies**-2.4) * np.where(energies > 0.6, 0.93, 1.0)
    return mirrors * window


def collimated_array_area(energies):
    """Thick silicon-like detectors behind a collimator: soft photons stopped, hard ones lost."""
    window = np.exp(-9.0 * energies**-2.7)
    stopped = 1.0 - np.exp(-((energies / 21.0) ** -2.9))
    return 9200.0 * window * stopped


def coarse_imager_area(energies):
    """One mirror shell with an edge at 2.1 keV and a detector that fades below 0.3 keV."""
    mirror = 620.0 * np.exp(-0.5 * (np.log(energies / 1.35) / 0.85) ** 2)
    edge = np.where(energies > 2.1, 0.72, 1.0)
    return mirror * edge * logistic(energies, 0.25, 0.05)


def with_edge(low, high, edge=None, count=160):
    energies = np.geomspace(low, high, count)
    return energies if edge is None else np.union1d(energies, [edge * 0.99999, edge * 1.00001])


def write(folder, name, comment, columns):
    lines = ["# %ECSV 1.0", "# ---", "# datatype:"]
    lines += [f"# - {{name: {key}, unit: {unit}, datatype: float64}}" for key, unit, _ in columns]
    lines += [f"# meta: {{comments: ['{comment}']}}", "# schema: astropy-2.0"]
    lines.append(" ".join(key for key, _, _ in columns))
    for row in zip(*(values for _, _, values in columns), strict=True):
        lines.append(" ".join(f"{value:.7g}" for value in row))
    path = FOLDER / folder / name
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_text("\n".join(lines) + "\n", encoding="utf-8")


def main():
    note = "Invented by a formula, no real instrument"
    for folder, law, energies in (
        ("soft-concentrator", soft_concentrator_area, with_edge(0.15, 10.0, 0.6)),
        ("collimated-array", collimated_array_area, with_edge(1.5, 40.0)),
        ("coarse-imager", coarse_imager_area, with_edge(0.12, 12.0, 2.1)),
    ):
        columns = [("energy", "keV", energies), ("area", "cm2", law(energies))]
        write(folder, "area.ecsv", note, columns)
    energies = np.geomspace(0.2, 4.0, 80)
    rate = 0.055 * energies**-1.1 + 0.05 * np.exp(-0.5 * ((energies - 0.57) / 0.05) ** 2)
    columns = [("energy", "keV", energies), ("rate", "ct / (s keV)", rate)]
    write("soft-concentrator", "background.ecsv", note, columns)


if __name__ == "__main__":
    main()
