"""How finely the pulse of a spot is computed."""

from __future__ import annotations

import math
from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class Resolution:
    """Counts that the pulse of one spot is computed with; fixed while derivatives are taken.

    Parameters
    ----------
    harmonics : int
        Highest harmonic of the spin frequency.
    rings : int
        Rings in each piece of the spot.
    redshift_terms : int
        Chebyshev terms in the redshift factor.
    node_factor : float
        Azimuth nodes over the number that the highest harmonic needs.
    """

    harmonics: int
    rings: int
    redshift_terms: int
    node_factor: float = 1.0

    def nodes(self, reach: float = math.pi) -> int:
        """Azimuth nodes on a visible arc: an even number that resolves the highest harmonic.

        Parameters
        ----------
        reach : float
            Half of the arc, rad.
        """
        turns = 1.7 * self.harmonics * reach / math.pi
        return 2 * math.ceil(0.5 * self.node_factor * (turns + 30.0))

    def doubled(self) -> Resolution:
        """Return twice the count of everything."""
        return Resolution(
            harmonics=2 * self.harmonics,
            rings=2 * self.rings,
            redshift_terms=2 * self.redshift_terms,
            node_factor=1.25 * self.node_factor,
        )
