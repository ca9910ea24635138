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
from tests.external.recording import Checks

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
    checks: Checks, definition: FractionDefinition, factor: float, amplitude: float
) -> None:
    """To 1e-7: a parabola through samples 1/256 apart misses the tip by less."""
    harmonics = np.array([2.0, amplitude * np.exp(0.7j)])
    checks.close(
        "pulsed fraction of 1 + A cos(phase)", pulsed_fraction(harmonics, definition),
        factor * amplitude, absolute=1e-7, at=f"{definition}, A = {amplitude:g}",
        source="definitions in use", kind="common practice",
    )  # fmt: skip


def test_rms_is_the_sum_of_the_harmonics(checks: Checks) -> None:
    """Parseval for five harmonics."""
    random = np.random.default_rng(4)
    harmonics = np.concatenate([[1.0], 0.1 * np.exp(2j * np.pi * random.random(5))])
    amplitudes = [harmonic_fraction(harmonics, number) for number in range(1, 6)]
    checks.close(
        "rms² as the sum of a_k²/2", pulsed_fraction(harmonics, "rms") ** 2,
        sum(a**2 for a in amplitudes) / 2.0, relative=1e-12, source="Parseval's theorem",
        kind="computed independently",
    )  # fmt: skip


@pytest.mark.parametrize("definition", ["peak-to-trough", "rms", "first-harmonic", "full-swing"])
def test_background_dilutes(checks: Checks, definition: FractionDefinition) -> None:
    """A share f of unpulsed counts: a fraction of the source falls by 1 - f."""
    source = np.array([1.0, 0.2, 0.0])
    mixed = source.copy()
    mixed[0] /= 1.0 - 0.25
    checks.close(
        "a quarter of unpulsed counts leaves three quarters of the fraction",
        pulsed_fraction(mixed, definition) / pulsed_fraction(source, definition), 0.75,
        relative=1e-6, at=definition, source="definitions in use", kind="common practice",
    )  # fmt: skip
