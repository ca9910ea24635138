"""Information in a sinusoid, in closed form.

Source: the expected Fisher matrix of Poisson counts (Cramér 1946, Mathematical Methods of
Statistics; Rao 1945, Bull. Calcutta Math. Soc. 37, 81) worked out for the rate 1 + A cos(phi -
phi0) with N counts: F_AA = N (1/sqrt(1 - A²) - 1)/A², F_pp = N (1 - sqrt(1 - A²)), F_Ap = 0.
"""

from __future__ import annotations

import math

import numpy as np
import pytest

from exptime.arrays import Floats
from exptime.information.matrix import background_levels, information_per_second
from exptime.instrument.records import BackgroundKnowledge
from tests.external.recording import Checks

pytestmark = pytest.mark.external

PHASE = 2.0 * np.pi * (np.arange(256) + 0.5) / 256
CRAMER = "Cramér 1946; Rao 1945: expected Fisher matrix of Poisson counts, closed form"
KNOWN = BackgroundKnowledge(kind="known")


def matrix(
    amplitude: float, counts: float, background: float = 0.0, knowledge: BackgroundKnowledge = KNOWN
) -> Floats:
    """Information on amplitude, phase and logarithm of the rate at one second's exposure."""
    source = counts * (1.0 + amplitude * np.cos(PHASE - 0.4))[:, None]
    derivatives = np.stack(
        [
            counts * np.cos(PHASE - 0.4)[:, None],
            counts * amplitude * np.sin(PHASE - 0.4)[:, None],
            source,
        ]
    )
    rate = np.array([background])
    levels = background_levels(knowledge, rate, np.array([1.0, 1.2]))
    return np.asarray(information_per_second(source, derivatives, rate, levels).at(np.ones(1))[0])


@pytest.mark.parametrize(
    ("amplitude", "of_amplitude", "of_phase"),
    [
        (0.1, 0.50378153, 0.00501256),
        (0.3, 0.53649819, 0.04606080),
        (0.6, 0.69444444, 0.20000000),
    ],
)
def test_elements_of_a_sinusoid(
    checks: Checks, amplitude: float, of_amplitude: float, of_phase: float
) -> None:
    """Per count, to the eight decimals worked out and to 1e-12 of the formulas."""
    counts = 12345.0
    information = matrix(amplitude, counts) / counts
    root = math.sqrt(1.0 - amplitude**2)
    checks.close(
        "1 + A cos(phase): information per count, eight decimals",
        [information[0, 0], information[1, 1]], [of_amplitude, of_phase], absolute=5e-9,
        at=[f"F_AA, A = {amplitude:g}", f"F_phi phi, A = {amplitude:g}"],
        source=CRAMER, kind="computed independently",
    )  # fmt: skip
    checks.close(
        "1 + A cos(phase): information per count, closed form",
        [information[0, 0], information[1, 1]],
        [(1.0 / root - 1.0) / amplitude**2, 1.0 - root], relative=1e-12,
        source=CRAMER, kind="computed independently",
    )  # fmt: skip
    assert information[0, 1] == pytest.approx(0.0, abs=1e-13)
    assert information[2, 2] == pytest.approx(1.0, rel=1e-12)


def test_weak_modulation_has_the_textbook_errors(checks: Checks) -> None:
    """sigma_A -> sqrt(2/N) and sigma_phi -> sqrt(2/N)/A."""
    information = matrix(1e-3, 1e6)
    checks.close(
        "weak modulation: sqrt(2/N) in amplitude, sqrt(2/N)/A in phase",
        [information[0, 0] ** -0.5, information[1, 1] ** -0.5],
        [math.sqrt(2e-6), math.sqrt(2e-6) / 1e-3], relative=1e-6, at=["amplitude", "phase"],
        source="textbook limit of the same", kind="computed independently",
    )  # fmt: skip


@pytest.mark.parametrize("share", [0.25, 3.0])
def test_a_known_background_dilutes_as_a_smaller_amplitude(checks: Checks, share: float) -> None:
    """N counts of A with b N of background hold the phase as (1 + b) N counts of A/(1 + b)."""
    amplitude, counts = 0.6, 1e5
    diluted = amplitude / (1.0 + share)
    total = counts * (1.0 + share)
    information = matrix(amplitude, counts, background=share * counts)
    checks.close(
        "known background: the phase information of a diluted amplitude", information[1, 1],
        total * (1.0 - math.sqrt(1.0 - diluted**2)), relative=1e-12,
        at=f"{share:g} background counts for each of the source's", source=CRAMER,
        kind="computed independently",
    )  # fmt: skip


@pytest.mark.parametrize("sigma", [0.003, 0.05, 1.0])
def test_schur_complement_of_one_level(checks: Checks, sigma: float) -> None:
    """F_ij - G_i G_j/(sum 1/m + 1/s²), with the sums of one channel in closed form.

    With x = A/(1 + b) and R = sqrt(1 - x²): sum over bins of 1/m is n²/(N (1 + b) R) for n bins,
    and the rate's own derivative has G = n (1 - b/((1 + b) R)) in counts of one bin.
    """
    amplitude, counts, share = 0.5, 2e4, 0.7
    background = share * counts
    knowledge = BackgroundKnowledge(kind="scale", fraction=sigma)
    free = matrix(amplitude, counts, background, knowledge)
    known = matrix(amplitude, counts, background)
    root = math.sqrt(1.0 - (amplitude / (1.0 + share)) ** 2)
    level = background**2 / (counts * (1.0 + share) * root)
    of_rate = background * (1.0 - share / ((1.0 + share) * root))
    of_amplitude = background * (1.0 - 1.0 / root) / amplitude
    loss = np.array([of_amplitude, 0.0, of_rate])
    expected = known - np.outer(loss, loss) / (level + sigma**-2)
    largest = np.abs(known).max()
    checks.close(
        "unknown background level: Schur complement over the largest element", free / largest,
        expected / largest, absolute=1e-10, at=f"level known to {sigma:g}",
        source="block elimination, sums in closed form", kind="computed independently",
    )  # fmt: skip
    assert free[1, 1] == pytest.approx(known[1, 1], rel=1e-12)
