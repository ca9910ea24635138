"""Models of two or three parameters in closed form, to fit in place of a star."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from exptime.arrays import Floats
from exptime.information.matrix import BackgroundLevels

PHASE_BINS, CHANNELS = 8, 3
PHASE = (np.arange(PHASE_BINS) + 0.5) / PHASE_BINS
SHAPES = np.array(
    [
        np.ones((PHASE_BINS, CHANNELS)),
        1.0 + 0.6 * np.cos(2.0 * np.pi * PHASE)[:, None] * np.array([1.0, 0.8, 0.5]),
        1.0 + 0.5 * np.sin(2.0 * np.pi * PHASE)[:, None] * np.array([0.4, 0.9, 1.0]),
    ]
)
NO_LEVELS = BackgroundLevels(shape_per_s=np.zeros((0, CHANNELS)), prior_information=np.zeros(0))


@dataclass(frozen=True, kw_only=True)
class Straight:
    """Rates that are linear in mass and radius: the information matrix is exact."""

    names: tuple[str, ...] = ("mass", "radius")
    exposure_s: float = 1e5
    phase_bins: int = PHASE_BINS
    background_per_s: Floats = field(default_factory=lambda: np.full(CHANNELS, 0.5))
    levels: BackgroundLevels = NO_LEVELS

    def amplitudes(self, vector: Floats) -> Floats:
        """Return what multiplies each of the shapes."""
        return np.array([0.0, vector[0], 0.1 * vector[1]])

    def slopes(self, vector: Floats) -> Floats:
        """Return derivatives of the amplitudes, (n, 3)."""
        return np.array([[0.0, 1.0, 0.0], [0.0, 0.0, 0.1]])

    def source(self, vector: Floats) -> Floats | None:
        """Return rates, None where one is negative."""
        rates = np.tensordot(self.amplitudes(vector), SHAPES, axes=1)
        return rates if np.all(rates > 0.0) else None

    def linearised(self, vector: Floats) -> tuple[Floats, Floats] | None:
        """Return rates and derivatives."""
        rates = self.source(vector)
        return None if rates is None else (rates, np.tensordot(self.slopes(vector), SHAPES, axes=1))

    def information(self, vector: Floats) -> Floats:
        """Return the information matrix by plain loops, the background known."""
        local = self.linearised(vector)
        assert local is not None
        rates, derivatives = local
        share = self.exposure_s / self.phase_bins
        size = len(self.names)
        matrix = np.zeros((size, size))
        for phase in range(PHASE_BINS):
            for channel in range(CHANNELS):
                slope = derivatives[:, phase, channel]
                total = rates[phase, channel] + self.background_per_s[channel]
                matrix += share * np.outer(slope, slope) / total
        return matrix


@dataclass(frozen=True, kw_only=True)
class Curved(Straight):
    """The same with a ridge that bends: radius matters by its distance from a parabola."""

    bend: float = 30.0

    def amplitudes(self, vector: Floats) -> Floats:
        """Return what multiplies each of the shapes."""
        mass, radius = vector
        across = radius - 10.0 - self.bend * (mass - 1.4) ** 2
        return np.array([0.0, 1.4 + 0.02 * (mass - 1.4), 1.0 + 0.1 * across])

    def slopes(self, vector: Floats) -> Floats:
        """Return derivatives of the amplitudes, (n, 3)."""
        mass, _ = vector
        return np.array([[0.0, 0.02, -0.2 * self.bend * (mass - 1.4)], [0.0, 0.0, 0.1]])


TRUTH = np.array([1.4, 10.0])


def expected_counts(model: Straight, vector: Floats = TRUTH) -> Floats:
    """Return data without noise."""
    source = model.source(vector)
    assert source is not None
    return model.exposure_s / model.phase_bins * (source + model.background_per_s)
