"""Every definition of the pulsed fraction in use against the closed form of a sinusoid.

For F = mean (1 + A cos phase) the definitions of common practice (no single source) give: peak to
trough A, above minimum A, fractional root mean square A/sqrt(2), first harmonic A, full swing 2A;
and rms² = sum of a_k²/2 over the amplitudes a_k of the harmonics (Parseval).
"""

from __future__ import annotations

import math

import numpy as np
import pytest

from exptime.geometry.light_curve import harmonic_fraction, pulsed_fraction
from exptime.target.records import FractionDefinition

pytestmark = pytest.mark.external


@pytest.mark.parametrize(
    ("definition", "factor"),
    [
        ("peak-to-trough", 1.0),
        ("above-minimum", 1.0),
        ("rms", 1.0 / math.sqrt(2.0)),
        ("first-harmonic", 1.0),
        ("full-swing", 2.0),
    ],
)
@pytest.mark.parametrize("amplitude", [0.03, 0.3, 0.6, 0.95])
def test_a_sinusoid_has_the_closed_form(
    definition: FractionDefinition, factor: float, amplitude: float
) -> None:
    """To 1e-7: a parabola through samples 1/256 apart misses the tip by less."""
    harmonics = np.array([2.0, amplitude * np.exp(0.7j)])
    assert pulsed_fraction(harmonics, definition) == pytest.approx(factor * amplitude, abs=1e-7)


def test_rms_is_the_sum_of_the_harmonics() -> None:
    """Parseval for five harmonics."""
    random = np.random.default_rng(4)
    harmonics = np.concatenate([[1.0], 0.1 * np.exp(2j * np.pi * random.random(5))])
    amplitudes = [harmonic_fraction(harmonics, number) for number in range(1, 6)]
    assert pulsed_fraction(harmonics, "rms") ** 2 == pytest.approx(
        sum(a**2 for a in amplitudes) / 2.0, rel=1e-12
    )


@pytest.mark.parametrize("definition", ["peak-to-trough", "rms", "first-harmonic", "full-swing"])
def test_background_dilutes(definition: FractionDefinition) -> None:
    """A share f of unpulsed counts: a fraction of the source falls by 1 - f."""
    source = np.array([1.0, 0.2, 0.0])
    mixed = source.copy()
    mixed[0] /= 1.0 - 0.25
    assert pulsed_fraction(mixed, definition) == pytest.approx(
        0.75 * pulsed_fraction(source, definition), rel=1e-6
    )
