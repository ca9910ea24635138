"""The verdict on a Fisher bound, in one word and one sentence."""

from __future__ import annotations

import math
from collections.abc import Sequence

from exptime.study.profile import Profile
from exptime.study.verify_records import Hump, Scatter, Simulations, Verdict

NORMAL_SHARE = 0.6827
_TOLERATED = 0.15
_TOLERATED_SIDE = 0.30
_MANY_ELSEWHERE = 0.05
_SIGMAS = 3.0
_MOST_OF = 0.95
_GRAVEST_FIRST: tuple[Verdict, ...] = (
    *("multimodal", "optimistic", "prior-limited", "pessimistic", "holds"),
)


def verdict_of(
    profiles: Sequence[Profile],
    humps: Sequence[Hump],
    simulations: Simulations | None,
    is_prior_limited: bool,
) -> tuple[Verdict, str]:
    """Judge the bound on the radius, or on the mass where the radius is held fixed.

    Parameters
    ----------
    profiles : sequence of Profile
        With Gaussian-counted priors; the first is judged.
    humps : sequence of Hump
        Other maxima that the data allow.
    simulations : Simulations or None
        Refits, if there were any.
    is_prior_limited : bool
        Whether that quantity is prior-limited.

    Returns
    -------
    tuple of str
        The word, and the reason in a sentence.

    Notes
    -----
    A bound holds when profile and scatter agree with it to 15 per cent, or, for the scatter of
    few refits, to three of their own standard errors; when the coverage is not short of 68 per
    cent by three of its standard errors; and when each side of the profile's interval agrees
    with the bound to 30 per cent.
    """
    profile = profiles[0]
    if is_prior_limited:
        return "prior-limited", (
            f"The {profile.quantity} is prior-limited: what was known beforehand says more than "
            "the data, and the bound is no measurement."
        )
    other = _other_solution(profile, humps, simulations)
    if other is not None:
        return "multimodal", other
    scatter = _scatter_of(profile, simulations)
    ratios = [("the profile likelihood", profile.ratio, _TOLERATED)]
    if scatter is not None and simulations is not None and simulations.converged:
        allowed = max(_TOLERATED, _SIGMAS / math.sqrt(2.0 * simulations.converged))
        ratios.append((f"{simulations.converged} refits", scatter.ratio, allowed))
    for witness, ratio, allowed in ratios:
        if not math.isfinite(ratio) or ratio > 1.0 + allowed:
            size = f"by a factor {ratio:.2f}" if math.isfinite(ratio) else "without limit"
            return "optimistic", f"The bound is optimistic {size}, by {witness}."
        if ratio < 1.0 - allowed:
            return "pessimistic", (
                f"The bound is pessimistic: {ratio:.2f} of it by {witness}, because limits or a "
                "fold of the ridge cut the range of fits."
            )
    if scatter is not None and scatter.coverage < NORMAL_SHARE - _SIGMAS * scatter.coverage_error:
        return "optimistic", (
            f"The bound is optimistic: the interval it gives holds the truth in only "
            f"{100.0 * scatter.coverage:.0f} per cent of the refits, not in 68."
        )
    lopsided = _lopsided(profile)
    if lopsided is not None:
        return lopsided
    found = ", ".join(f"{ratio:.2f} of it by {witness}" for witness, ratio, _ in ratios)
    return "holds", f"The bound holds: {found}.{_unconverged(simulations)}"


def _unconverged(simulations: Simulations | None) -> str:
    if simulations is None or simulations.converged >= _MOST_OF * simulations.asked:
        return ""
    lost = simulations.asked - simulations.converged
    return f" But {lost} of {simulations.asked} refits did not converge and are left out."


def overall(words: Sequence[Verdict]) -> Verdict:
    """Return the verdict over several geometries: the gravest of theirs."""
    return next(word for word in _GRAVEST_FIRST if word in words)


def _other_solution(
    profile: Profile, humps: Sequence[Hump], simulations: Simulations | None
) -> str | None:
    away = [hump for hump in humps if abs(_value(hump, profile) - profile.truth) > profile.bound]
    if away:
        hump = away[0]
        return (
            f"Another solution fits the expected data as well (deviance {hump.rise:.2g} above the "
            f"first) at {hump.radius_km:.2f} km, inclination "
            f"{math.degrees(hump.inclination):.0f} deg: the bound sees only one of them."
        )
    if simulations is not None and simulations.converged:
        share = simulations.elsewhere / simulations.converged
        if share > _MANY_ELSEWHERE:
            return (
                f"{100 * share:.0f} per cent of {simulations.converged} refits ended at another "
                "solution: the bound sees only one of them."
            )
    return None


def _lopsided(profile: Profile) -> tuple[Verdict, str] | None:
    """Return the verdict on an interval of which one side is far from the bound."""
    interval = profile.intervals[0]
    sides = {
        "below": (profile.truth - interval.lower) / profile.bound,
        "above": (interval.upper - profile.truth) / profile.bound,
    }
    where = max(sides, key=lambda side: sides[side])
    if sides[where] > 1.0 + _TOLERATED_SIDE:
        return "optimistic", (
            f"The bound is optimistic by a factor {sides[where]:.2f} {where} the truth, by the "
            f"profile likelihood: its interval is lopsided, {sides['below']:.2f} of the bound "
            f"below and {sides['above']:.2f} above."
        )
    where = min(sides, key=lambda side: sides[side])
    if sides[where] < 1.0 - _TOLERATED_SIDE:
        return "pessimistic", (
            f"The bound is pessimistic {where} the truth, where the profile likelihood gives "
            f"{sides[where]:.2f} of it: limits or a fold of the ridge cut the range of fits."
        )
    return None


def _value(hump: Hump, profile: Profile) -> float:
    return hump.mass_msun if profile.quantity == "mass" else hump.radius_km


def _scatter_of(profile: Profile, simulations: Simulations | None) -> Scatter | None:
    if simulations is None:
        return None
    return next((item for item in simulations.scatter if item.quantity == profile.quantity), None)
