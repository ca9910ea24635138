"""What a verification found, as ready words, the same for text and for pages."""

from __future__ import annotations

import math
from typing import Final

from exptime.information.precision import Quantity
from exptime.report.digits import decimals_of_uncertainty, duration, significant
from exptime.report.tables import Facts, Table
from exptime.report.words import UNITS, printable
from exptime.study.profile import Interval, Profile
from exptime.study.verify_records import CheckedGeometry, Scatter, Verdict, Verification

CLAIMS: Final[dict[Verdict, str]] = {
    "holds": "the bound holds",
    "optimistic": "the bound is optimistic",
    "pessimistic": "the bound is pessimistic",
    "multimodal": "the answer is multimodal",
    "prior-limited": "the answer is prior-limited",
}
OPEN: Final = "open"


def verdict_sentence(verification: Verification) -> str:
    """Return the verdict over all geometries in one sentence."""
    places: dict[Verdict, list[str]] = {}
    for geometry in verification.geometries:
        places.setdefault(geometry.verdict, []).append(geometry.label)
    claims = "; ".join(f"{CLAIMS[word]} at {_joined(labels)}" for word, labels in places.items())
    return f"After {duration(verification.exposure_s)} {claims}."


def reasons(verification: Verification) -> tuple[str, ...]:
    """Return why, in one sentence for each geometry."""
    return tuple(
        geometry.reason
        if len(verification.geometries) == 1
        else f"{_capital(geometry.label)}: {geometry.reason}"
        for geometry in verification.geometries
    )


def profile_tables(geometry: CheckedGeometry) -> tuple[Table, ...]:
    """Return intervals of the profile likelihood, without and with hard limits."""
    place = _capital(geometry.label)
    return tuple(
        Table(
            caption=f"{place}: {kind}",
            header=("quantity", "value", "bound", "68 %", "95 %", "ratio"),
            rows=tuple(_profile_row(profile) for profile in profiles),
        )
        for kind, profiles in (
            ("profile likelihood", geometry.profiles),
            ("profile likelihood within hard limits", geometry.bounded_profiles),
        )
    )


def refits_table(geometry: CheckedGeometry) -> Table | None:
    """Return scatter, bias and coverage of refits; None where there were none."""
    simulations = geometry.simulations
    if simulations is None or not simulations.scatter:
        return None
    return Table(
        caption=f"{_capital(geometry.label)}: {simulations.converged} refits of simulated "
        "observations",
        header=("quantity", "bound", "scatter", "ratio", "bias", "coverage"),
        rows=tuple(_scatter_row(item) for item in simulations.scatter if item.bound > 0.0),
    )


def geometry_facts(geometry: CheckedGeometry) -> Facts:
    """Return where a geometry is and what was found about it besides the tables."""
    star = geometry.star
    spots = "; ".join(
        f"spot at colatitude {_degrees(spot.colatitude)}, longitude {_degrees(spot.longitude)}, "
        f"angular radius {_degrees(spot.angular_radius)}, kT {spot.temperature_kev:.3g} keV"
        for spot in geometry.spots
    )
    inclination = math.acos(min(1.0, max(-1.0, star.cos_inclination)))
    facts = [
        (
            "star",
            f"{significant(star.mass_msun, 3)} Msun, {significant(star.radius_km, 3)} km, "
            f"inclination {_degrees(inclination)}; {spots}",
        ),
        ("other solutions", _humps(geometry)),
    ]
    simulations = geometry.simulations
    if simulations is not None:
        facts.append(("refits that converged", f"{simulations.converged} of {simulations.asked}"))
        facts.append(("refits that ended elsewhere", _elsewhere(geometry)))
    return tuple(facts)


def run_facts(verification: Verification) -> Facts:
    """Return what is needed to make the same numbers again."""
    file = verification.file
    return (
        ("target file", "standard input" if file == "-" else printable(file)),
        ("exposure", duration(verification.exposure_s)),
        ("seed", str(verification.seed)),
        *((printable(name), printable(text)) for name, text in verification.versions.items()),
    )


def procedure(verification: Verification) -> tuple[str, ...]:
    """Return how the verdict was reached."""
    sentences = [
        "The expected data are fitted anew with a quantity held at a step away from the truth; "
        "everything else follows, so that the curve goes along the ridge of good fits. The 68 and "
        "95 per cent intervals end where the deviance has risen by 1 and by 3.84; the ratio is "
        "half the width of the first over the bound. Priors are those of data sigma.",
        "Hard limits keep angles in range and column and background from going negative. The star "
        "stays inside the model with and without them.",
        "Other solutions are searched from other geometries that fit, with inclination and "
        "colatitude exchanged and with spots mirrored about the equator; one counts if its "
        "deviance is less than 3.84 above the first.",
    ]
    if any(geometry.simulations is not None for geometry in verification.geometries):
        sentences.append(
            "Simulated observations are Poisson counts; the centre of every prior is drawn about "
            "the truth with its own width each time. Each is refitted from a perturbed start. The "
            "coverage is the share of refits within one bound of the truth, 68.3 per cent where "
            "the bound holds."
        )
    sentences.append(
        "A bound holds here when profile and scatter agree with it to 15 per cent (few refits: to "
        "three standard errors), each side of the interval to 30, and the coverage is not short of "
        "68 per cent by three standard errors: common practice, no law."
    )
    if len(verification.geometries) > 1:
        sentences.append(
            "The geometries are those whose error in radius is at the median and at the 16 and 84 "
            "per cent points: the tails decide a request."
        )
    return tuple(sentences)


def _profile_row(profile: Profile) -> tuple[str, ...]:
    first, second = (_interval(each, profile) for each in profile.intervals)
    ratio = significant(profile.ratio, 3) if math.isfinite(profile.ratio) else OPEN
    value = _placed(profile.truth, profile.bound)
    return (_named(profile.quantity), value, significant(profile.bound, 2), first, second, ratio)


def _interval(interval: Interval, profile: Profile) -> str:
    ends = ((profile.truth - interval.lower, "−"), (interval.upper - profile.truth, "+"))
    return " ".join(
        f"{sign}{_placed(size, profile.bound)}" if math.isfinite(size) else OPEN
        for size, sign in ends
    )


def _scatter_row(scatter: Scatter) -> tuple[str, ...]:
    bias = _placed(abs(scatter.bias), scatter.bound)
    return (
        _named(scatter.quantity),
        significant(scatter.bound, 2),
        significant(scatter.deviation, 2),
        significant(scatter.ratio, 3),
        f"{'−' if scatter.bias < 0.0 else '+'}{bias}",
        f"{100.0 * scatter.coverage:.1f} ± {100.0 * scatter.coverage_error:.1f} %",
    )


def _humps(geometry: CheckedGeometry) -> str:
    if not geometry.humps:
        return "none found"
    return "; ".join(
        f"{significant(hump.radius_km, 4)} km, {significant(hump.mass_msun, 3)} Msun, inclination "
        f"{_degrees(hump.inclination)} (deviance {significant(hump.rise, 2)} above)"
        for hump in geometry.humps
    )


def _elsewhere(geometry: CheckedGeometry) -> str:
    simulations = geometry.simulations
    if simulations is None or not simulations.elsewhere:
        return "none"
    low, middle, high = simulations.elsewhere_radius_km
    return (
        f"{simulations.elsewhere}, at {significant(middle, 4)} km "
        f"({significant(low, 4)}–{significant(high, 4)} km)"
    )


def _named(quantity: Quantity) -> str:
    return f"{quantity} ({UNITS[quantity]})" if UNITS[quantity] else quantity


def _placed(number: float, bound: float) -> str:
    """Return a number to the digits that an uncertainty deserves, and one more."""
    return f"{number:.{max(0, 1 + decimals_of_uncertainty(bound))}f}"


def _degrees(angle: float) -> str:
    return f"{math.degrees(angle):.1f} deg"


def _capital(text: str) -> str:
    return text[:1].upper() + text[1:]


def _joined(labels: list[str]) -> str:
    return labels[0] if len(labels) == 1 else f"{', '.join(labels[:-1])} and {labels[-1]}"
