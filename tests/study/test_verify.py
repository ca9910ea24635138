"""Whole verifications: the same for any number of processes, resumable, and true."""

from __future__ import annotations

import json
import math
from collections.abc import Callable
from dataclasses import replace
from functools import partial
from unittest import mock

import numpy as np
import pytest

from exptime.errors import InputError
from exptime.instrument.reader import read_instrument
from exptime.interstellar.absorption import load_absorption
from exptime.observation.instrument_response import instrument_response
from exptime.parallel import workers
from exptime.progress import silent
from exptime.study import simulate
from exptime.study.case import Question
from exptime.study.geometries import known_geometry
from exptime.study.refits import NORMAL_SHARE
from exptime.study.setting import hard_limits, setting_of
from exptime.study.verdict import verdict_of
from exptime.study.verify import Plan, fingerprint, make_verification
from exptime.study.verify_records import Simulations, Verification
from exptime.target.records import Target
from tests.study.cases import DRAWN, KNOWN, draws_of, forecast_of, instrument_of, target_of

HELD_SPOT = (
    "[{colatitude: {value: 70 deg, uncertainty: 0 deg}, longitude: {value: 0 deg, uncertainty: "
    "0 deg}, angular_radius: {value: 12 deg, uncertainty: 0 deg}, temperature: {value: 0.12 keV, "
    "uncertainty: 0 keV}}]"
)
HELD = {
    **KNOWN,
    "column_density": "{value: 2e20 cm-2, uncertainty: 0 cm-2}",
    "distance": "{value: 300 pc, uncertainty: 0 pc}",
    "inclination": "{value: 60 deg, uncertainty: 0 deg}",
    "hot_spots": HELD_SPOT,
}
"""Only mass, radius and the area factor are free: the likelihood is nearly Gaussian."""


def verify(target: Target, exposure_s: float = 1e6, **options: object) -> Verification:
    """Verify with the small instrument."""
    simulations = int(options.pop("simulations", 0))  # type: ignore[call-overload]
    plan = Plan(exposure_s=exposure_s, simulations=simulations, draws=draws_of())
    return make_verification(
        target, instrument_of(), plan, read_instrument=read_instrument, **options
    )  # type: ignore[arg-type]


@pytest.fixture(scope="module")
def held() -> Verification:
    """Return the verification of the nearly Gaussian case with six refits."""
    return verify(target_of(HELD), simulations=6)


def test_a_nearly_gaussian_case_holds(held: Verification) -> None:
    """Profiles of all three quantities give the bound back to a thousandth."""
    (geometry,) = held.geometries
    assert (geometry.label, geometry.verdict, geometry.humps) == ("the geometry given", "holds", ())
    assert [profile.quantity for profile in geometry.profiles] == ["radius", "mass", "compactness"]
    for profile in geometry.profiles:
        assert profile.ratio == pytest.approx(1.0, abs=1e-3)


def test_the_bound_is_that_of_the_forecast(held: Verification) -> None:
    """The same numbers as `forecast` calls data_sigma."""
    forecast = forecast_of(target_of(HELD), (1e6,))
    for profile in held.geometries[0].profiles:
        sigma = forecast.curve(profile.quantity).data_sigma.p50[0]
        assert profile.bound == pytest.approx(sigma, rel=1e-6)


def test_limits_that_bind_nowhere_change_nothing(held: Verification) -> None:
    """The profile within them is the same object of numbers."""
    (geometry,) = held.geometries
    for free, limited in zip(geometry.profiles, geometry.bounded_profiles, strict=True):
        assert free.intervals == limited.intervals


def _same(first: Verification, second: Verification) -> bool:
    (one,), (two,) = first.geometries, second.geometries
    return (
        one.simulations == two.simulations
        and (one.verdict, one.reason, one.humps) == (two.verdict, two.reason, two.humps)
        and [profile.intervals for profile in one.profiles]
        == [profile.intervals for profile in two.profiles]
    )


def test_two_processes_give_the_same_bits(held: Verification) -> None:
    """Nothing knows where it was made; the progress told on the way only grows, to the whole."""
    told: list[float] = []
    again = verify(
        target_of(HELD), simulations=6, jobs=2,
        progress=lambda done, total: told.append(done / total),
    )  # fmt: skip
    assert _same(held, again)
    assert told == sorted(told)
    assert told[-1] == 1.0


@pytest.fixture(scope="module")
def refitted() -> Callable[..., Simulations]:
    """Return what simulates six observations of the nearly Gaussian case."""
    target, instrument = target_of(HELD), instrument_of()
    question = Question(
        target=target,
        instrument=instrument,
        response=instrument_response(instrument, load_absorption()),
        exposures_s=np.array([1e6]),
        goals=(),
    )
    setting, experiment, covariance = setting_of(question, known_geometry(target), 1e6)
    limits = hard_limits(setting.model.names)
    with workers(1) as team:
        start = partial(
            simulate.simulate, 6, 1, "given", setting, experiment, covariance, limits, team
        )
    return partial(start, progress=silent)


def test_an_interrupted_run_goes_on_where_it_was(refitted: Callable[..., Simulations]) -> None:
    """Two refits kept before a stop and four after it are the six of a run in one go."""
    ledger: dict[str, list[float]] = {}

    def stop(_: dict[str, list[float]]) -> None:
        raise KeyboardInterrupt

    with mock.patch.object(simulate, "_BLOCK", 2):
        with pytest.raises(KeyboardInterrupt):
            refitted(ledger=ledger, keep=stop)
        assert len(ledger) == 2
        kept = json.loads(json.dumps(ledger))
        resumed = refitted(ledger=kept, keep=None)
    assert len(kept) == 6
    assert resumed == refitted(ledger={}, keep=None)


def test_kept_refits_are_not_done_again(refitted: Callable[..., Simulations]) -> None:
    """A full ledger needs no work, and what it says is believed."""
    ledger: dict[str, list[float]] = {}
    first = refitted(ledger=ledger, keep=None)
    with mock.patch.object(simulate, "refit_one", side_effect=AssertionError):
        assert refitted(ledger=ledger, keep=None) == first


def test_the_fingerprint_knows_what_changes_refits() -> None:
    """Target, instrument, exposure, seed do; number of simulations, path and comments do not."""
    target, instrument = target_of(HELD), instrument_of()
    plan = Plan(exposure_s=1e6, simulations=4, draws=draws_of())
    mark = fingerprint(target, instrument, plan)
    same = [
        fingerprint(target_of(HELD), instrument_of(), replace(plan, simulations=400)),
        fingerprint(replace(target, file="elsewhere.yaml", entries=()), instrument, plan),
    ]
    others = [
        fingerprint(target_of(HELD, spin_frequency="301 Hz"), instrument, plan),
        fingerprint(target, instrument_of(background_per_s=0.1001), plan),
        fingerprint(target, instrument, replace(plan, exposure_s=1.001e6)),
        fingerprint(target, instrument, replace(plan, draws=draws_of(seed=2))),
    ]
    assert set(same) == {mark}
    assert len({mark, *others}) == 5


def test_both_held_fixed_is_refused() -> None:
    """There is nothing to verify, which is said before any work."""
    fixed = target_of(
        HELD, mass="{value: 1.4 Msun, uncertainty: 0 Msun}",
        radius="{value: 12 km, uncertainty: 0 km}",
    )  # fmt: skip
    with pytest.raises(InputError, match="no precision to verify"):
        verify(fixed)


def test_a_fixed_radius_leaves_mass_and_compactness() -> None:
    """They then are the same but for scale, and so are their ratios."""
    target = target_of(HELD, radius="{value: 12 km, uncertainty: 0 km}")
    (geometry,) = verify(target).geometries
    mass, compactness = geometry.profiles
    assert (mass.quantity, compactness.quantity) == ("mass", "compactness")
    assert compactness.ratio == pytest.approx(mass.ratio, rel=1e-4)
    assert mass.ratio == pytest.approx(1.0, abs=1e-3)


@pytest.mark.slow
def test_a_bound_declared_not_to_hold_does_not() -> None:
    """One spot at 70 degrees seen from 66: inclination and colatitude exchange close by.

    The profile alone gives the verdict; 120 refits, which it has not seen, fall short of 68 per
    cent by more than three binomial standard errors.
    """
    spot = "{colatitude: 70 deg, longitude: 0 deg, angular_radius: 12 deg, temperature: 0.12 keV}"
    target = target_of(KNOWN, spin_frequency="500 Hz", inclination="66 deg", hot_spots=f"[{spot}]")
    (geometry,) = verify(target, 1e5, simulations=120, jobs=2).geometries
    simulations = geometry.simulations
    print(geometry.verdict, geometry.reason, simulations)
    word, _ = verdict_of(geometry.profiles, geometry.humps, None, geometry.is_prior_limited)
    assert (word, geometry.verdict) == ("optimistic", "optimistic")
    assert simulations is not None
    radius = next(item for item in simulations.scatter if item.quantity == "radius")
    assert radius.coverage < NORMAL_SHARE - 3.0 * radius.coverage_error


@pytest.mark.slow
def test_profile_and_refits_agree_above_a_fold() -> None:
    """One spot at 86 degrees seen from 57 at 500 Hz, 8e5 counts: the fold is 1.5 sigma below.

    Profile and refits witness the bound independently. The fold cuts the 95 per cent interval
    below the truth, and some refits run over it to the solution with the angles exchanged.
    """
    spot = "{colatitude: 86 deg, longitude: 0 deg, angular_radius: 10 deg, temperature: 0.14 keV}"
    target = target_of(
        KNOWN, spin_frequency="500 Hz", inclination="57 deg", radius="12 km", mass="1.4 Msun",
        column_density="{value: 1e20 cm-2, uncertainty: 0 cm-2}",
        distance="{value: 300 pc, uncertainty: 10 pc}", hot_spots=f"[{spot}]",
    )  # fmt: skip
    plan = Plan(exposure_s=1.65e5, simulations=60, draws=draws_of())
    instrument = read_instrument("soft-concentrator")
    (geometry,) = make_verification(
        target, instrument, plan, jobs=2, read_instrument=read_instrument
    ).geometries
    print(geometry.verdict, geometry.reason, geometry.simulations)
    profile, simulations = geometry.profiles[0], geometry.simulations
    assert simulations is not None
    scatter = next(item for item in simulations.scatter if item.quantity == "radius")
    # Three standard errors of a standard deviation of so many refits.
    assert scatter.ratio == pytest.approx(profile.ratio, abs=3.0 / math.sqrt(2.0 * 59))
    wide = profile.intervals[1]
    assert profile.truth - wide.lower < 0.9 * (wide.upper - profile.truth)
    assert simulations.elsewhere > 0


@pytest.mark.slow
def test_drawn_geometries_are_verified_at_median_and_tails() -> None:
    """Up to three of them, each with its own verdict."""
    verification = verify(target_of(DRAWN), 1e6, jobs=2)
    labels = [geometry.label for geometry in verification.geometries]
    assert labels[0] == "the median geometry"
    assert 1 <= len(labels) <= 3
    print([(each.label, each.verdict, each.reason) for each in verification.geometries])


@pytest.mark.slow
def test_coverage_is_68_per_cent_where_the_bound_is_declared_valid() -> None:
    """Four hundred refits of one spot with a measured inclination, every parameter free."""
    (geometry,) = verify(target_of(KNOWN), simulations=400, jobs=2).geometries
    simulations = geometry.simulations
    print(geometry.verdict, geometry.reason, simulations)
    assert geometry.verdict == "holds", geometry.reason
    assert simulations is not None
    # One in fifty may fail, and is counted.
    assert simulations.converged >= 392
    for scatter in simulations.scatter:
        assert abs(scatter.coverage - NORMAL_SHARE) < 3.0 * scatter.coverage_error, scatter
        assert np.isfinite(scatter.bias)
        assert scatter.ratio == pytest.approx(1.0, abs=0.15 + 3.0 / math.sqrt(800.0))
