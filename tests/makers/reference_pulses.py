"""Make tests/star/reference_pulses.json: pulses of direct integration, with their own error.

Run `python -m tests.makers.reference_pulses` (some minutes). `error` is the largest change, over
the peak of each energy, between the stored mesh and one half as fine in both directions;
`elements` the largest difference from the sum over surface elements, which knows nothing of rows
and is good to some 1e-5 where the horizon cuts a large spot. All stars are invented.
"""

from __future__ import annotations

import json
import math
from dataclasses import asdict
from pathlib import Path
from typing import Any

import numpy as np

from exptime.arrays import Floats
from exptime.star.records import Emission, HotSpot, Star
from tests.star.direct_integration import Mesh, direct_photon_flux, element_photon_flux

PATH = Path(__file__).parent.parent / "star" / "reference_pulses.json"
FINE = Mesh(rows=320, nodes=8)
COARSE = Mesh(rows=160, nodes=4)
DISTANCE_PC = 250.0
PHASE_BINS = 32
BLACKBODY = Emission()
DARKENED = Emission(model="limb-darkened", coefficient=0.5)
STRONGLY_DARKENED = Emission(model="limb-darkened", coefficient=1.5)


def star(spin: float, inclination: float, figure: str = "oblate", **size: float) -> Star:
    """Return a star seen from an inclination in degrees; 1.4 solar masses, 12 km by default."""
    values: dict[str, Any] = {"mass_msun": 1.4, "radius_km": 12.0} | size
    cosine = math.cos(math.radians(inclination))
    return Star(spin_hz=spin, cos_inclination=cosine, figure=figure, **values)  # type: ignore[arg-type]


def spot(colatitude: float, longitude: float, radius: float, kev: float = 0.12) -> HotSpot:
    """Return a spot; angles in rad."""
    return HotSpot(
        colatitude=colatitude, longitude=longitude, angular_radius=radius, temperature_kev=kev
    )


CASES: dict[str, tuple[Star, tuple[HotSpot, ...], Emission, tuple[float, ...]]] = {
    "slow, tiny spot": (star(1.0, 60.0), (spot(1.0, 0.0, 0.01),), BLACKBODY, (0.3, 1.0, 2.0)),
    "slow sphere, two spots": (
        star(1.0, 70.0, "sphere"),
        (spot(1.3, 0.4, 0.1), spot(2.1, 3.3, 0.3, 0.1)),
        DARKENED,
        (0.3, 1.0, 2.0),
    ),
    "ordinary, two spots": (
        star(200.0, 68.0),
        (spot(1.31, 0.0, 0.12), spot(1.95, 3.4, 0.21, 0.1)),
        BLACKBODY,
        (0.3, 1.0, 2.0),
    ),
    "ordinary, two darkened spots": (
        star(317.0, 50.0),
        (spot(0.9, 5.0, 0.2), spot(2.2, 2.0, 0.35, 0.09)),
        DARKENED,
        (0.25, 0.8, 2.5),
    ),
    "heavy star": (
        star(300.0, 75.0, mass_msun=2.0, radius_km=12.2),
        (spot(1.5, 1.0, 0.15, 0.2),),
        BLACKBODY,
        (0.5, 2.0, 6.0),
    ),
    "light wide star": (
        star(400.0, 40.0, mass_msun=1.2, radius_km=13.5),
        (spot(0.8, 1.0, 0.25),),
        BLACKBODY,
        (0.3, 1.0, 2.0),
    ),
    "fast, tiny spot": (
        star(700.0, 66.0),
        (spot(1.2, 2.5, 0.01, 0.3),),
        BLACKBODY,
        (0.3, 1.0, 2.0),
    ),
    "fast, tiny darkened spot eclipsed": (
        star(700.0, 80.0),
        (spot(2.0, 0.5, 0.03, 0.2),),
        STRONGLY_DARKENED,
        (0.3, 1.0, 2.0),
    ),
    "fast sphere": (
        star(650.0, 85.0, "sphere"),
        (spot(1.4, 0.0, 0.3, 0.15),),
        BLACKBODY,
        (0.3, 1.0, 2.0),
    ),
    "fast, two spots, both eclipsed in turn": (
        star(600.0, 88.0, mass_msun=1.3, radius_km=12.5),
        (spot(1.55, 0.2, 0.2), spot(1.65, 3.2, 0.25, 0.14)),
        DARKENED,
        (0.3, 1.0, 2.0),
    ),
    "fast, spot that reaches over the hidden edge": (
        star(700.0, 55.0),
        (spot(2.3, 4.0, 1.0, 0.15),),
        BLACKBODY,
        (0.3, 1.0, 2.0),
    ),
    "fastest, largest spot": (
        star(700.0, 66.0),
        (spot(2.0, 0.7, 1.2, 0.12),),
        DARKENED,
        (0.3, 1.0, 2.0),
    ),
    "cap over the pole": (star(500.0, 35.0), (spot(0.3, 1.0, 0.6),), DARKENED, (0.3, 1.0, 2.0)),
    "cap over the far pole, partly hidden": (
        star(700.0, 30.0),
        (spot(2.9, 1.0, 1.1, 0.15),),
        BLACKBODY,
        (0.3, 1.0, 2.0),
    ),
    "spot that touches the pole": (
        star(450.0, 60.0),
        (spot(0.4, 6.0, 0.4),),
        BLACKBODY,
        (0.3, 1.0, 2.0),
    ),
    "just visible at the far limb": (
        star(350.0, 45.0),
        (spot(2.45, 1.0, 0.15, 0.25),),
        BLACKBODY,
        (0.3, 1.0, 2.0),
    ),
    "nearly along the axis": (
        star(700.0, 4.0),
        (spot(1.7, 0.3, 0.5), spot(0.5, 3.0, 0.2)),
        DARKENED,
        (0.3, 1.0, 2.0),
    ),
}


def relative(one: Floats, other: Floats) -> float:
    """Return the largest difference over the peak of its energy."""
    return float(np.max(np.abs(one - other) / np.max(other, axis=0)))


def main() -> None:
    """Write the file."""
    document = []
    for name, (body, spots, emission, energies) in CASES.items():
        scene = (body, spots, emission, DISTANCE_PC, energies, PHASE_BINS)
        flux = direct_photon_flux(*scene, mesh=FINE)
        error = relative(direct_photon_flux(*scene, mesh=COARSE), flux)
        elements = relative(element_photon_flux(*scene, radial=32, azimuthal=96), flux)
        print(f"{name}: error {error:.1e}, elements {elements:.1e}", flush=True)
        document.append(
            {
                "name": name,
                "star": asdict(body),
                "spots": [asdict(each) for each in spots],
                "emission": asdict(emission),
                "distance_pc": DISTANCE_PC,
                "energies_kev": energies,
                "error": float(f"{error:.2g}"),
                "elements": float(f"{elements:.2g}"),
                "photon_flux": [[float(f"{value:.12g}") for value in row] for row in flux],
            }
        )
    lines = ",\n".join(json.dumps(case) for case in document)
    PATH.write_text(f"[\n{lines}\n]\n", encoding="utf-8")


if __name__ == "__main__":
    main()
