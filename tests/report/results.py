"""Results built by hand, one for every state that a report has to word."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np

from exptime.arrays import Floats
from exptime.information.precision import Quantity as QuantityName
from exptime.instrument.records import (
    BackgroundKnowledge,
    EffectiveArea,
    Instrument,
    Redistribution,
)
from exptime.star.records import HotSpot, Star
from exptime.study.pulse_records import Counts, Pulse
from exptime.study.records import (
    ExpectedData,
    Forecast,
    GeometryResult,
    Goal,
    GoalResult,
    Numerics,
    QuantityCurve,
    ReachedFraction,
    Spread,
)
from exptime.target.records import Entry, Measured, Target

EXPOSURES_S = np.geomspace(1e5, 1e6, 5)
EDGES_KEV = np.linspace(0.3, 3.0, 28)
BINS = 32
RADIUS_KM, MASS_MSUN = 12.0, 1.5
COMPACTNESS = 1.476625 * MASS_MSUN / RADIUS_KM
SIGMAS_AT_1MS_KM = np.geomspace(0.15, 3.0, 50)
"""Of the radius, for fifty geometries of equal weight."""

PER_MEGASECOND = np.sqrt(1e6 / EXPOSURES_S)
EVIL = (
    "<b>A</b> [red]x[/red] {{ 1 }} & \u202egnorts\u202c \u05d0\u05d1\u05d2 \x1b[31m" + "long" * 40
)


def spread(p16: Floats | float, p50: Floats | float, p84: Floats | float) -> Spread:
    return Spread(p16=np.asarray(p16), p50=np.asarray(p50), p84=np.asarray(p84))


def curve(fiducial: float, relative: tuple[float, float, float], prior: float) -> QuantityCurve:
    """Return a curve of these relative precisions at 1 Ms, falling as the root of exposure."""
    low, middle, high = (fiducial * each * PER_MEGASECOND for each in relative)
    return QuantityCurve(
        fiducial=fiducial,
        sigma=spread(*(1.0 / np.sqrt(x**-2 + prior**-2) for x in (low, middle, high))),
        data_sigma=spread(low, middle, high),
        prior_sigma=prior,
        is_prior_limited=tuple(bool(each) for each in middle > prior),
    )


def goal_result(
    quantity: QuantityName, precision: float, required_s: Floats, quantiles: tuple[float, ...]
) -> GoalResult:
    reached = np.array([np.mean(required_s <= time) for time in EXPOSURES_S])
    return GoalResult(
        goal=Goal(quantity=quantity, precision=precision),
        exposure_s=spread(*quantiles),
        required_s=required_s,
        fraction_at_exposure=reached,
        fraction_reached=float(reached[-1]),
    )


def instrument() -> Instrument:
    return Instrument(
        id="invented-array",
        name="Invented array",
        area=EffectiveArea(
            energies_kev=np.array([0.2, 4.0]), area_cm2=np.array([900.0, 900.0]), source="by hand"
        ),
        redistribution=Redistribution(),
        channel_edges_kev=EDGES_KEV,
        background_per_s=np.full(27, 0.002),
        background_knowledge=BackgroundKnowledge(kind="fraction", fraction=0.1),
    )


def target(name: str = "Candidate A") -> Target:
    return Target(
        name=name,
        file="candidate.yaml",
        spin_hz=317.0,
        column_density=Measured(value=1e20),
        distance=Measured(value=260.0, uncertainty=12.0),
        entries=(
            Entry(key="name", text=name, line=1),
            Entry(key="spin_frequency", text="317 Hz", line=2),
            Entry(key="flux.value", text="2.2e-13 erg s-1 cm-2", line=3),
        ),
    )


def expected(background_per_s: float = 0.002) -> ExpectedData:
    phase = (np.arange(BINS) + 0.5) / BINS
    middle = 0.5 * (EDGES_KEV[1:] + EDGES_KEV[:-1])
    spectrum = 0.3 * middle**2 * np.exp(-middle / 0.25)
    depth = 0.6 - 0.1 * middle
    pulse = 1.0 + depth * np.cos(2.0 * np.pi * phase)[:, None]
    return ExpectedData(
        phase=phase,
        channel_edges_kev=EDGES_KEV,
        source_per_s=pulse * spectrum,
        background_per_s=np.full(27, background_per_s),
    )


def geometry(sigma_km: float, weight: float) -> GeometryResult:
    return GeometryResult(
        star=Star(mass_msun=MASS_MSUN, radius_km=RADIUS_KM, spin_hz=317.0, cos_inclination=0.5),
        spots=(
            HotSpot(colatitude=1.2, longitude=0.0, angular_radius=0.12, temperature_kev=0.1),
            HotSpot(colatitude=2.0, longitude=3.3, angular_radius=0.2, temperature_kev=0.1),
        ),
        weight=weight,
        data_sigma_radius_km=sigma_km * PER_MEGASECOND,
    )


def required_s(sigmas_km: Floats, precision: float) -> Floats:
    """Exposure after which an error falling as its root reaches a precision of the radius."""
    required = 1e6 * (sigmas_km / (precision * RADIUS_KM)) ** 2
    return np.where(required <= 1e8, required, math.inf)


def normal() -> Forecast:
    """Return a forecast over fifty geometries: 5 per cent in radius by 0.165/1.25/9.44 Ms."""
    sigmas = SIGMAS_AT_1MS_KM
    need = required_s(sigmas, 0.05)
    low, middle, high = np.quantile(sigmas, [0.16, 0.5, 0.84]) / RADIUS_KM
    return Forecast(
        target=target(),
        instruments=(instrument(),),
        exposures_s=EXPOSURES_S,
        mass=curve(MASS_MSUN, (0.04, 0.08, 0.3), 0.433),
        radius=curve(RADIUS_KM, (low, middle, high), 2.02),
        compactness=curve(COMPACTNESS, (0.02, 0.03, 0.12), 0.03),
        correlation_mass_radius=spread(0.3, 0.71, 0.93),
        goals=(
            goal_result("radius", 0.05, need, (1.65e5, 1.249e6, 9.44e6)),
            goal_result("compactness", 0.1, need / 30.0, (5.5e3, 4.163e4, 3.147e5)),
        ),
        margin=0.0,
        geometries=tuple(geometry(float(sigma), 0.02) for sigma in sigmas),
        is_geometry_known=False,
        candidates=1280,
        effective_geometries=50.0,
        hidden_spots=0,
        pulsed_fractions=(
            ReachedFraction(
                label="peak-to-trough, 0.3-1.5 keV",
                asked=0.6,
                uncertainty=0.05,
                reached=spread(0.55, 0.6, 0.65),
            ),
        ),
        median_index=25,
        expected=expected(),
        covariance_mass_radius=np.array(
            [
                [
                    [0.06**2 / factor, 0.7 * 0.06 * 0.6 / factor],
                    [0.7 * 0.06 * 0.6 / factor, 0.6**2 / factor],
                ]
                for factor in EXPOSURES_S / 1e6
            ]
        ),
        source_per_s=float(expected().source_per_s.mean(axis=0).sum()),
        background_per_s=27 * 0.002,
        numerics=Numerics(resolution_change=6.7e-5, condition=1.17e6, quantile_error=0.1),
        seed=1,
        versions={"exptime": "0.1.0", "numpy": "2.4.6", "python": "3.11.7"},
        assumptions=("The radius was not given: a flat prior from 9 to 16 km.",),
        warnings=(),
    )


def with_margin() -> Forecast:
    return replace(normal(), margin=0.15)


def without_goals() -> Forecast:
    return replace(normal(), goals=())


def known_geometry() -> Forecast:
    """Return a forecast at one geometry: 5 per cent in radius by 694.4 ks."""
    base = normal()
    need = np.array([1e6 * (0.5 / 0.6) ** 2])
    return replace(
        base,
        radius=curve(RADIUS_KM, (0.5 / 12,) * 3, 2.02),
        mass=curve(MASS_MSUN, (0.06,) * 3, 0.433),
        compactness=curve(COMPACTNESS, (0.03,) * 3, 0.03),
        correlation_mass_radius=spread(0.7, 0.7, 0.7),
        goals=(goal_result("radius", 0.05, need, (float(need[0]),) * 3),),
        geometries=(geometry(0.5, 1.0),),
        is_geometry_known=True,
        candidates=0,
        effective_geometries=1.0,
        pulsed_fractions=(),
        median_index=0,
        numerics=replace(base.numerics, quantile_error=0.0),
    )


def unconstrained() -> Forecast:
    """Return a forecast in which nothing is learned of the radius."""
    base = normal()
    infinite = np.full(5, math.inf)
    nothing = replace(
        base.radius,
        data_sigma=spread(infinite, infinite, infinite),
        sigma=spread(*(np.full(5, 2.0),) * 3),
        is_prior_limited=(True,) * 5,
    )
    return replace(
        base,
        radius=nothing,
        correlation_mass_radius=spread(math.nan, math.nan, math.nan),
        goals=(goal_result("radius", 0.05, np.full(50, math.inf), (math.inf,) * 3),),
        geometries=tuple(replace(each, data_sigma_radius_km=infinite) for each in base.geometries),
        covariance_mass_radius=np.full((5, 2, 2), math.inf),
        numerics=replace(base.numerics, condition=math.inf, quantile_error=math.nan),
        warnings=("For 100 per cent of the geometries the data leave the radius unconstrained.",),
    )


def prior_limited() -> Forecast:
    """Return a forecast whose goal in mass is met by what radio timing said before."""
    base = normal()
    return replace(
        base,
        target=replace(base.target, mass=Measured(value=1.5, uncertainty=0.06)),
        mass=replace(curve(MASS_MSUN, (0.03, 0.038, 0.039), 0.06), is_prior_limited=(True,) * 5),
        goals=(
            goal_result("mass", 0.1, np.zeros(50), (0.0, 0.0, 0.0)),
            goal_result("mass", 0.038, np.full(50, 2e5), (2e5, 2e5, 2e5)),
        ),
    )


def partly_beforehand() -> Forecast:
    """Return a forecast in which six in ten geometries meet the goal by what is known."""
    base = normal()
    need = np.where(np.arange(50) < 30, 0.0, 4e5)
    return replace(base, goals=(goal_result("radius", 0.2, need, (0.0, 0.0, 4e5)),))


def partly_reached() -> Forecast:
    """Return a forecast in which only a third of the geometries ever reach the goal."""
    base = normal()
    need = np.where(np.arange(50) < 16, 4e5, math.inf)
    return replace(base, goals=(goal_result("radius", 0.02, need, (4e5, math.inf, math.inf)),))


def hidden_spots() -> Forecast:
    return replace(
        normal(),
        hidden_spots=7,
        effective_geometries=31.4,
        warnings=("The quantiles rest on 31 effective geometries, fewer than 50.",),
    )


def evil_names() -> Forecast:
    base = normal()
    return replace(
        base,
        target=target(EVIL),
        instruments=(replace(instrument(), id=EVIL, name=EVIL),),
        assumptions=(EVIL,),
        warnings=(EVIL,),
    )


def one_exposure() -> Forecast:
    """Return a forecast at 1 Ms alone."""
    base = normal()

    def last(curve: QuantityCurve) -> QuantityCurve:
        def cut(one: Spread) -> Spread:
            return spread(one.p16[-1:], one.p50[-1:], one.p84[-1:])

        return replace(
            curve,
            sigma=cut(curve.sigma),
            data_sigma=cut(curve.data_sigma),
            is_prior_limited=curve.is_prior_limited[-1:],
        )

    return replace(
        base,
        exposures_s=EXPOSURES_S[-1:],
        mass=last(base.mass),
        radius=last(base.radius),
        compactness=last(base.compactness),
        covariance_mass_radius=base.covariance_mass_radius[-1:],
        geometries=tuple(
            replace(each, data_sigma_radius_km=each.data_sigma_radius_km[-1:])
            for each in base.geometries
        ),
        goals=tuple(
            replace(each, fraction_at_exposure=each.fraction_at_exposure[-1:])
            for each in base.goals
        ),
    )


STATES = {
    "normal": normal,
    "margin": with_margin,
    "no-goal": without_goals,
    "known": known_geometry,
    "unconstrained": unconstrained,
    "prior-limited": prior_limited,
    "partly-reached": partly_reached,
    "partly-beforehand": partly_beforehand,
    "hidden-spots": hidden_spots,
    "evil-names": evil_names,
    "one-exposure": one_exposure,
}


def pulse(name: str = "Candidate A", energies: int = 3) -> Pulse:
    phase = (np.arange(16) + 0.5) / 16
    return Pulse(
        phase=phase,
        energies_kev=np.linspace(0.3, 2.0, energies),
        photon_flux=1e-4 * (1.0 + 0.5 * np.cos(2 * np.pi * phase))[:, None] * np.ones(energies),
        target=name,
        notes=("The pulse is that of the median geometry.",),
    )


def counts(name: str = "Candidate A") -> Counts:
    data = expected()
    return Counts(
        phase=data.phase,
        channel_edges_kev=EDGES_KEV,
        source_counts=1e5 / BINS * data.source_per_s,
        background_counts=np.tile(1e5 / BINS * data.background_per_s, (BINS, 1)),
        exposure_s=1e5,
        target=name,
        instrument=name,
        notes=(),
    )
