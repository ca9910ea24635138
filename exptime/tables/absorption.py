"""Remake the table of interstellar absorption: ``python -m exptime.tables.absorption [FILE]``.

Cross-section per hydrogen atom of neutral gas, atoms only: hydrogen exact (Stobbe 1930), helium
by Yan, Sadeghpour & Dalgarno 1998 (ApJ 496, 1044; erratum 2001, ApJ 559, 1194), heavier atoms
from the scattering factors of Henke, Gullikson & Davis 1993 (ADNDT 54, 181) as the package
periodictable carries them. It is needed by this script and by tests alone.

Abundances by number: Wilms, Allen & McCray 2000 (ApJ 542, 914, table 2), interstellar; Anders &
Ebihara 1982 (Geochim. Cosmochim. Acta 46, 2363), solar.
"""

from __future__ import annotations

import sys
from pathlib import Path
from typing import Final

import numpy as np

from exptime.arrays import Floats

INTERSTELLAR: Final = {
    "He": 10.99, "C": 8.38, "N": 7.88, "O": 8.69, "Ne": 7.94, "Na": 6.16, "Mg": 7.40, "Al": 6.33,
    "Si": 7.27, "P": 5.42, "S": 7.09, "Cl": 5.12, "Ar": 6.41, "Ca": 6.20, "Ti": 4.81, "Cr": 5.51,
    "Mn": 5.34, "Fe": 7.43, "Co": 4.92, "Ni": 6.05,
}  # fmt: skip
"""12 + log10 of the number per hydrogen atom."""

SOLAR_1982: Final = {
    "He": 8.01e-2, "C": 4.45e-4, "N": 9.12e-5, "O": 7.39e-4, "Ne": 1.38e-4, "Na": 2.10e-6,
    "Mg": 3.95e-5, "Al": 3.12e-6, "Si": 3.68e-5, "P": 3.82e-7, "S": 1.89e-5, "Cl": 1.93e-7,
    "Ar": 3.82e-6, "Ca": 2.25e-6, "Ti": 8.82e-8, "Cr": 4.93e-7, "Mn": 3.50e-7, "Fe": 3.31e-5,
    "Co": 8.27e-8, "Ni": 1.81e-6,
}  # fmt: skip
"""Number per hydrogen atom."""

METALS: Final = tuple(symbol for symbol in SOLAR_1982 if symbol != "He")

HYDROGEN_EDGE_KEV: Final = 0.01359843
HELIUM_EDGE_KEV: Final = 0.02458
LOWEST_KEV: Final = 0.03
HIGHEST_KEV: Final = 30.0
EDGE_WIDTH: Final = 1e-7
"""Half the width that an edge keeps, over its energy."""

_ACCURACY = 2e-4
_EDGE_GAP_KEV = 0.0003
_EDGE_JUMP = 1.1
_EDGE_SLOPE = 50.0
_ELECTRON_RADIUS_CM = 2.8179403e-13
_WAVELENGTH_CM_KEV = 12.398420e-8


def hydrogen_cm2(energies_kev: Floats) -> Floats:
    """Photoionisation cross-section of hydrogen, exact for one electron (Stobbe 1930), cm²."""
    ratio = energies_kev / HYDROGEN_EDGE_KEV
    eta = (ratio - 1.0) ** -0.5
    shape = np.exp(4.0 - 4.0 * eta * np.arctan(1.0 / eta)) / -np.expm1(-2.0 * np.pi * eta)
    return np.asarray(6.30431812e-18 * ratio**-4 * shape)


def helium_cm2(energies_kev: Floats) -> Floats:
    """Photoionisation cross-section of helium (Yan et al. 1998), cm²."""
    x = energies_kev / HELIUM_EDGE_KEV
    series = 1.0 + sum(
        coefficient * x ** (-0.5 * order)
        for order, coefficient in enumerate(
            (-4.7416, 14.8200, -30.8678, 37.3584, -23.4585, 5.9133), start=1
        )
    )
    return np.asarray(733e-24 * energies_kev**-3.5 * series)


def metal_cm2(symbol: str, energies_kev: Floats) -> Floats:
    """Photoabsorption cross-section of a heavier atom (Henke et al. 1993), cm²."""
    tabulated, factor, _ = _scattering_factor(symbol)
    f2 = np.exp(np.interp(np.log(energies_kev), np.log(tabulated), np.log(factor)))
    return np.asarray(2.0 * _ELECTRON_RADIUS_CM * _WAVELENGTH_CM_KEV / energies_kev * f2)


def gas_cm2(abundances: str, energies_kev: Floats) -> Floats:
    """Cross-section per hydrogen atom of neutral gas, cm².

    Parameters
    ----------
    abundances : {"interstellar", "solar_1982"}
        Numbers of atoms.
    energies_kev : ndarray
        Photon energies, keV.
    """
    numbers = {
        "interstellar": {symbol: 10.0 ** (value - 12.0) for symbol, value in INTERSTELLAR.items()},
        "solar_1982": SOLAR_1982,
    }[abundances]
    total = hydrogen_cm2(energies_kev) + numbers["He"] * helium_cm2(energies_kev)
    for symbol in METALS:
        total += numbers[symbol] * metal_cm2(symbol, energies_kev)
    return np.asarray(total)


def compute() -> dict[str, Floats]:
    """Compute the table.

    Returns
    -------
    dict of ndarray
        ``energies_kev``, shape (n,), increasing, with two knots at every edge; ``interstellar``
        and ``solar_1982``, shape (n,), cm² keV³ per hydrogen atom; ``edges_kev``, shape (m,).
        Straight lines between logarithms follow the atoms' own tables to 2e-4.
    """
    curves = {symbol: _scattering_factor(symbol) for symbol in METALS}
    edges = _inside(np.concatenate([curve[2] for curve in curves.values()]))
    pairs = np.concatenate([edges * (1.0 - EDGE_WIDTH), edges * (1.0 + EDGE_WIDTH)])
    fine = _inside(np.concatenate([curve[0] for curve in curves.values()]))
    # Most atoms share the grid of the first; a few have finer ones of their own.
    first = _inside(curves[METALS[0]][0])
    knots = np.unique(np.concatenate([[LOWEST_KEV, HIGHEST_KEV], first, pairs]))
    truth = {name: gas_cm2(name, fine) * fine**3 for name in ("interstellar", "solar_1982")}
    while True:
        scaled = {name: gas_cm2(name, knots) * knots**3 for name in truth}
        error = np.max([_misfit(fine, knots, truth[n], scaled[n]) for n in truth], axis=0)
        worst = _worst_between(fine, knots, error)
        if not len(worst):
            return {"energies_kev": knots, **scaled, "edges_kev": edges}
        knots = np.unique(np.concatenate([knots, fine[worst]]))


def _scattering_factor(symbol: str) -> tuple[Floats, Floats, Floats]:
    """Return energies (keV), scattering factor f2 and the edges (keV) of an atom.

    The table has two rows for an edge, 0.2 eV apart; they are drawn together here.
    """
    import periodictable

    table = np.asarray(periodictable.elements.symbol(symbol).xray.sftable)
    # One atom has the energies of two rows of an edge exchanged.
    energies, factor = np.sort(table[0]), table[2]
    rise, width = np.diff(np.log(factor)), np.diff(np.log(energies))
    jump = (np.diff(energies) < _EDGE_GAP_KEV) & (energies[:-1] > LOWEST_KEV)
    jump &= (rise > np.log(_EDGE_JUMP)) & (rise > _EDGE_SLOPE * width)
    edges = 0.5 * (energies[:-1] + energies[1:])[jump]
    ends, begins = np.append(jump, False), np.insert(jump, 0, False)
    alone = ~(ends | begins)
    moved = np.concatenate(
        [energies[alone], edges * (1.0 - EDGE_WIDTH), edges * (1.0 + EDGE_WIDTH)]
    )
    order = np.argsort(moved, kind="stable")
    values = np.concatenate([factor[alone], factor[ends], factor[begins]])
    return moved[order], values[order], edges


def _inside(energies: Floats) -> Floats:
    """Return the energies inside the table's range, increasing, each once."""
    return np.unique(energies[(energies > LOWEST_KEV) & (energies < HIGHEST_KEV)])


def _misfit(at: Floats, knots: Floats, truth: Floats, scaled: Floats) -> Floats:
    """Return the relative error of straight lines between logarithms."""
    line = np.interp(np.log(at), np.log(knots), np.log(scaled))
    return np.asarray(np.abs(np.exp(line) / truth - 1.0))


def _worst_between(at: Floats, knots: Floats, error: Floats) -> list[int]:
    """Return the worst point of every interval that has one above the accuracy wanted."""
    interval = np.searchsorted(knots, at)
    bad = np.flatnonzero(error > _ACCURACY)
    return [
        int(group[np.argmax(error[group])])
        for group in (bad[interval[bad] == k] for k in np.unique(interval[bad]))
    ]


def main() -> None:
    """Write the table to the file named, or to where the package keeps it."""
    default = Path(__file__).with_name("data") / "absorption.npz"
    target = Path(sys.argv[1]) if len(sys.argv) > 1 else default
    table = compute()
    with target.open("wb") as stream:
        np.savez_compressed(
            stream,
            energies_kev=table["energies_kev"],
            interstellar=table["interstellar"],
            solar_1982=table["solar_1982"],
            edges_kev=table["edges_kev"],
        )


if __name__ == "__main__":
    main()
