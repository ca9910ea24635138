"""The posterior of an ensemble sampler beside the profile likelihood and the Fisher bound.

Sampler: emcee 3.1, Foreman-Mackey et al. 2013, PASP 125, 306, with moves of differential
evolution, snooker, independent draws and, for one spot, the exchange of inclination and
colatitude. The data are expected counts. Mass and radius have the flat priors of no width that
`data_sigma` has, unless a prior is stated; every number below is of the radius.

EXPTIME_SAMPLER_LENGTH multiplies the steps of every chain.
"""

from __future__ import annotations

import math

import emcee
import numpy as np
import pytest

from exptime.instrument.records import BackgroundKnowledge
from tests.external.recording import Checks
from tests.external.sampling import (
    ENSEMBLES,
    Case,
    Density,
    Posterior,
    correlation_steps,
    information_at,
    length,
    sample,
    setting_for,
    split_r_hat,
)

pytestmark = pytest.mark.external

SAMPLER = f"emcee {emcee.__version__}: Foreman-Mackey et al. 2013, PASP 125, 306"

STAR = """
name: Invented
spin_frequency: {spin} Hz
column_density: 2e20 cm-2
distance: {distance}
inclination: {seen} deg
mass: {mass}
radius: 12 km
hot_spots:
"""
SPOT = (
    "  - {{colatitude: {0} deg, longitude: {1} deg, angular_radius: {2} deg, "
    "temperature: {3} keV}}\n"
)
HELD = "{value: 300 pc, uncertainty: 0}"

FAST = Case(
    text=STAR.format(spin=500, distance=HELD, seen=40, mass="1.4 Msun")
    + SPOT.format(75, 0, 10, 0.15),
    counts=1e6,
)
TWO = Case(
    text=STAR.format(
        spin=287,
        distance="{value: 300 pc, uncertainty: 15 pc}",
        seen=68,
        mass="{value: 1.5 Msun, uncertainty: 0.06 Msun}",
    )
    + SPOT.format(62, 0, 6, 0.14)
    + SPOT.format(125, 170, 9, 0.13),
    counts=1e6,
    knowledge=BackgroundKnowledge(kind="fraction", fraction=0.1),
    area_uncertainty=0.03,
)
FEW = Case(
    text=STAR.format(
        spin=287, distance=HELD, seen=57, mass="{value: 1.4 Msun, uncertainty: 0.05 Msun}"
    )
    + SPOT.format(70, 0, 10, 0.15),
    counts=5e3,
)
FOLDED = Case(
    text=STAR.format(spin=500, distance=HELD, seen=57, mass="1.4 Msun")
    + SPOT.format(86, 0, 10, 0.15),
    counts=8e5,
)


def described(name: str, found: Posterior) -> str:
    return (
        f"\n{name}: sampler {found.sigma:.3f} +- {found.sigma * found.error:.3f} km (half-width "
        f"{found.half_width:.3f}, upper half over lower {found.lopsided:.2f}, mean - truth "
        f"{found.shift:+.3f}), profile {found.profile:.3f} ({found.profile_lopsided:.2f}), "
        f"with hard limits {found.bounded_profile:.3f}, bound {found.bound:.3f} km; "
        f"at 95 % sampler {found.half_width_95:.3f}, profile {found.profile_95:.3f}, bound "
        f"{1.96 * found.bound:.3f} km; {ENSEMBLES} ensembles of {found.steps} steps, "
        f"autocorrelation {found.correlation_steps:.1f} steps, split R-hat {found.r_hat:.3f}, "
        f"exchanged {found.exchanged:.2f}; CPU {found.sampler_s:.0f} s for {found.evaluations} "
        f"likelihoods against {found.forecast_s:.2f} s: {found.sampler_s / found.forecast_s:.0f}"
    )


@pytest.mark.parametrize("case", [FAST, TWO], ids=["one spot", "two spots"])
def test_sampled_density_has_the_curvature_of_the_bound(checks: Checks, case: Case) -> None:
    """Its own curvature has the forecast's sigma, and it falls as that says.

    At 0.003 sigma, to one part in fifty: on the straight line the ridge is left soon, and at one
    sigma the fall is many times that of a Gaussian. Both sides are averaged. Sampler and bound
    are tied together here, levels of the background included.
    """
    setting, bound, *_ = setting_for(case)
    density, share = Density(setting), 0.003
    matrix = information_at(density, density.truth)
    scale = 1.0 / np.sqrt(np.diagonal(matrix))
    inverse = np.linalg.inv(matrix * np.outer(scale, scale)) * np.outer(scale, scale)
    column = density.radius_column
    sigma = math.sqrt(inverse[column, column])
    at = f"{len(density.colatitudes)} spots"
    checks.close(
        "sampled density: sigma(radius) of its curvature over the forecast's", sigma / bound, 1.0,
        relative=1e-6, at=at, source="information in other coordinates, by other code",
        kind="computed independently",
    )  # fmt: skip
    center, fall = density.straight(density.truth), 0.0
    for sign in (-1.0, 1.0):
        point = center + sign * share * inverse[:, column] / sigma
        cosine = density.vector(point)[0][density.inclination]
        # The measure of cos(i) is no part of the bound's matrix.
        measure = 0.5 * math.log(
            (1.0 - cosine**2) / (1.0 - density.truth[density.inclination] ** 2)
        )
        fall -= 0.5 * (density(point) - measure)
    checks.close(
        "sampled density along the ridge: fall at 0.003 sigma", fall, 0.5 * share**2,
        relative=0.02, at=at, kind="computed independently",
        source="likelihood of the sampler, levels integrated by Laplace's method",
    )  # fmt: skip


@pytest.mark.parametrize("case", [FAST, TWO], ids=["one spot", "two spots"])
def test_straight_coordinates_lead_back(case: Case) -> None:
    """Vector to coordinates and back, their derivatives, and the exchange of a single spot."""
    density = Density(setting_for(case)[0])
    center = density.straight(density.truth)
    np.testing.assert_allclose(density.vector(center)[0], density.truth, rtol=1e-12)
    step = 1e-4 / np.sqrt(np.diagonal(information_at(density, density.truth)))
    quotient = (density.vector(center + step)[0] - density.vector(center - step)[0]) / 2.0
    expected = density.jacobian(density.truth)[:, density.free] @ step
    np.testing.assert_allclose(quotient, expected, rtol=1e-6, atol=1e-9 * np.abs(expected).max())
    if density.is_single:
        there = density.vector(density.exchanged(center))[0]
        cosine = math.cos(density.truth[density.colatitudes[0]])
        assert there[density.inclination] == pytest.approx(cosine, rel=1e-12)
        twice = density.exchanged(density.exchanged(center))
        np.testing.assert_array_equal(twice, center)


def test_split_r_hat_tells_mixed_from_unmixed_chains() -> None:
    """One for draws of one distribution, above 1.1 where an ensemble stands half a sigma off."""
    random = np.random.default_rng(3)
    chains = random.standard_normal((4, 400, 8))
    assert split_r_hat(chains) == pytest.approx(1.0, abs=2e-3)
    chains[0] += 1.0
    assert split_r_hat(chains) > 1.05


@pytest.mark.parametrize("memory", [0.0, 0.5, 0.9])
def test_autocorrelation_time_of_a_known_process(memory: float) -> None:
    """(1 + a)/(1 - a) for x' = a x + noise; to 10 per cent in 20 walkers of 4000 steps."""
    random = np.random.default_rng(8)
    values = np.zeros((4000, 20))
    for step in range(1, len(values)):
        values[step] = memory * values[step - 1] + random.standard_normal(20)
    expected = (1.0 + memory) / (1.0 - memory)
    assert correlation_steps(values) == pytest.approx(expected, rel=0.1)


def test_limits_are_hard() -> None:
    """No density where the column is negative or the star is seen from below."""
    setting, *_ = setting_for(FEW)
    density = Density(setting)
    for name, value in (("column_density", -1e18), ("cos_inclination", -0.1)):
        vector = setting.truth.copy()
        vector[setting.model.names.index(name)] = value
        assert density(density.straight(vector)) == -math.inf


def converged(name: str, case: Case, capsys: pytest.CaptureFixture[str]) -> Posterior:
    """Sample a case, tell what came out, and assert that the chains have converged."""
    found = sample(case, burn=40, steps=length(160))
    with capsys.disabled():
        print(described(name, found))
    # Halves of independent ensembles, begun wider than the posterior, agree in every coordinate;
    # the ensembles' sigmas scatter no more than their autocorrelation says (twice the error of
    # all four, of which the scatter of four is known to 40 per cent); that error is some per cent.
    assert found.r_hat < 1.03
    assert ENSEMBLES * found.steps > 10.0 * found.correlation_steps
    assert found.ensemble_scatter < 2.5 * 2.0 * found.error
    assert found.error < 0.05
    return found


def record(checks: Checks, name: str, found: Posterior, of_bound: float, of_profile: float) -> None:
    """Compare a sampled width with bound and profile, to a tolerance that the case allows."""
    common = "same likelihood and priors; the posterior weighs volume, the profile heights"
    checks.close(
        "sigma(radius) of the forecast against a sampled posterior (km)", found.bound,
        found.sigma, relative=of_bound, at=name, source=SAMPLER, kind="computed independently",
        note=common,
    )  # fmt: skip
    checks.close(
        "half-width of the profile likelihood against that of a sampled posterior (km)",
        found.profile, found.half_width, relative=of_profile, at=name, source=SAMPLER,
        kind="computed independently", note=common,
    )  # fmt: skip
    checks.between(
        "CPU seconds of the sampler over those of the forecast",
        found.sampler_s / found.forecast_s, 100.0, math.inf, at=name, source=SAMPLER,
        kind="computed independently",
    )  # fmt: skip


@pytest.mark.slow
def test_posterior_of_two_spots_with_a_mass_prior(
    checks: Checks, capsys: pytest.CaptureFixture[str]
) -> None:
    """The bound holds as a standard deviation: 12 per cent, with 3 of the sampler's own error.

    The interval is lopsided all the same, and the mean lies a fifth of a sigma above the truth.
    """
    name = "two spots, mass prior, 1e6 counts"
    found = converged(name, TWO, capsys)
    record(checks, name, found, 0.12, of_profile=0.25)
    assert abs(found.shift) < 0.35 * found.bound


@pytest.mark.slow
def test_posterior_of_one_spot_on_a_fast_star(
    checks: Checks, capsys: pytest.CaptureFixture[str]
) -> None:
    """The bound is pessimistic by a sixth: the ridge bends, and most volume lies near its middle.

    The profile knows nothing of volume and agrees with the bound to 2 per cent.
    """
    name = "one spot, 500 Hz, 1e6 counts"
    found = converged(name, FAST, capsys)
    record(checks, name, found, 0.25, of_profile=0.20)
    assert found.profile == pytest.approx(found.bound, rel=0.05)
    assert found.sigma < found.bound


@pytest.mark.slow
def test_posterior_at_few_counts_is_lopsided(
    checks: Checks, capsys: pytest.CaptureFixture[str]
) -> None:
    """The bound fails: symmetric, where the profile reaches half as far again at 95 per cent.

    The posterior, which weighs volume, is lopsided too, but narrower than the bound: at so few
    counts the three do not say the same.
    """
    name = "one spot, 287 Hz, 5e3 counts"
    found = converged(name, FEW, capsys)
    record(checks, name, found, 0.25, of_profile=0.45)
    checks.between(
        "few counts: half-width of the profile at 95 % over 1.96 sigma of the bound",
        found.profile_95 / (1.96 * found.bound), 1.2, 2.5, theirs="1 if the bound held",
        source="profile likelihood of the same model", kind="computed independently",
    )  # fmt: skip
    assert found.lopsided > 1.1
    assert found.profile_lopsided > 1.3


@pytest.mark.slow
def test_posterior_of_a_folded_ridge_is_narrower(
    checks: Checks, capsys: pytest.CaptureFixture[str]
) -> None:
    """Spot at 86 degrees seen from 57, 500 Hz, 8e5 counts, eight free parameters.

    The radius cannot go below its value where the ridge folds, at equal angles: the bound is
    pessimistic, and the mean lies below the truth.
    """
    name = "one spot at 86° seen from 57°, 500 Hz, 8e5 counts"
    found = converged(name, FOLDED, capsys)
    record(checks, name, found, 0.40, of_profile=0.30)
    assert found.sigma < 0.95 * found.bound
    assert found.shift < 0.0
    assert 0.0 < found.exchanged < 0.5
