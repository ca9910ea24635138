"""Photoelectric absorption between the star and the observer.

The cross-section comes from a table that `exptime.tables.absorption` makes; sources stand there.
Scattering, molecules and grains are left out, which is good for columns below a few 1e21 cm^-2.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from typing import Literal

import numpy as np

from exptime._resources import shipped_table
from exptime.arrays import Floats

Abundances = Literal["interstellar", "solar-1982"]


@dataclass(frozen=True, slots=True)
class Absorption:
    """Cross-section per hydrogen atom for one set of abundances.

    Parameters
    ----------
    energies_kev : ndarray, shape (n,)
        Knots, increasing; edges are close pairs.
    scaled : ndarray, shape (n,)
        Cross-section times energy cubed, cm² keV³.
    edges_kev : ndarray, shape (m,)
        Absorption edges.
    """

    energies_kev: Floats
    scaled: Floats
    edges_kev: Floats

    def cross_section_cm2(self, energies_kev: Floats) -> Floats:
        """Cross-section per hydrogen atom, cm², by straight lines between logarithms.

        Beyond the knots, 0.03 to 30 keV, the last lines go on.
        """
        x, knots, values = np.log(energies_kev), np.log(self.energies_kev), np.log(self.scaled)
        upper = np.clip(np.searchsorted(knots, x), 1, len(knots) - 1)
        slope = (values[upper] - values[upper - 1]) / (knots[upper] - knots[upper - 1])
        logarithm = values[upper - 1] + slope * (x - knots[upper - 1])
        return np.asarray(np.exp(logarithm - 3.0 * x))

    def transmission(self, energies_kev: Floats, column_cm2: float) -> Floats:
        """Share of the photons that come through a column (cm^-2)."""
        return np.asarray(np.exp(-column_cm2 * self.cross_section_cm2(energies_kev)))


@cache
def load_absorption(abundances: Abundances = "interstellar") -> Absorption:
    """Read the table that ships with the package; every call returns the same constant.

    Parameters
    ----------
    abundances : {"interstellar", "solar-1982"}
        Wilms, Allen & McCray 2000, or Anders & Ebihara 1982.
    """
    with shipped_table("absorption.npz").open("rb") as stream, np.load(stream) as arrays:
        return Absorption(
            arrays["energies_kev"], arrays[abundances.replace("-", "_")], arrays["edges_kev"]
        )
