"""What a forecast may get wrong, and the works that it rests on."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

from exptime.report.digits import percent, significant
from exptime.study.records import Forecast


@dataclass(frozen=True, slots=True, kw_only=True)
class Reference:
    """A published work.

    Parameters
    ----------
    words : str
        Authors, year, journal.
    serves : str
        What it is used for here.
    link : str
        Where it is found; empty where no link is known.
    """

    words: str
    serves: str
    link: str = ""


REFERENCES: Final = (
    Reference(
        words="Pechenick, Ftaclas & Cohen 1983, ApJ 274, 846",
        serves="light bending around a neutron star",
        link="https://ui.adsabs.harvard.edu/abs/1983ApJ...274..846P",
    ),
    Reference(
        words="Poutanen & Beloborodov 2006, MNRAS 373, 836",
        serves="pulses of spinning stars: Doppler shift, aberration, delays",
        link="https://ui.adsabs.harvard.edu/abs/2006MNRAS.373..836P",
    ),
    Reference(
        words="Morsink, Leahy, Cadeau & Braga 2007, ApJ 663, 1244",
        serves="oblate star in the Schwarzschild metric",
        link="https://arxiv.org/abs/astro-ph/0703123",
    ),
    Reference(
        words="AlGendy & Morsink 2014, ApJ 791, 78",
        serves="shape of the surface",
        link="https://arxiv.org/abs/1404.0609",
    ),
    Reference(
        words="Jakab & Morsink 2025",
        serves="limit of that approximation",
        link="https://arxiv.org/abs/2507.02234",
    ),
    Reference(
        words="Wilms, Allen & McCray 2000, ApJ 542, 914",
        serves="abundances of the absorbing gas",
        link="https://arxiv.org/abs/astro-ph/0008425",
    ),
    Reference(
        words="Yan, Sadeghpour & Dalgarno 1998, ApJ 496, 1044",
        serves="absorption by helium",
        link="https://ui.adsabs.harvard.edu/abs/1998ApJ...496.1044Y",
    ),
    Reference(
        words="Rao 1945, Bull. Calcutta Math. Soc. 37, 81; Cramér 1946, Mathematical Methods of "
        "Statistics",
        serves="the bound on every precision",
    ),
    Reference(
        words="Vallisneri 2008, PRD 77, 042001",
        serves="where Fisher information misleads",
        link="https://arxiv.org/abs/gr-qc/0703086",
    ),
)

_OTHER_ABUNDANCES: Final = Reference(
    words="Anders & Ebihara 1982, Geochim. Cosmochim. Acta 46, 2363",
    serves="abundances of the absorbing gas",
)


def references(forecast: Forecast) -> tuple[Reference, ...]:
    """Return the works that this forecast rests on."""
    if forecast.target.abundances == "interstellar":
        return REFERENCES
    return tuple(_OTHER_ABUNDANCES if "abundances" in each.serves else each for each in REFERENCES)


def limits(forecast: Forecast) -> tuple[str, ...]:
    """Return what could be wrong with a forecast of this kind."""
    figure = forecast.target.figure
    sentences = [
        "A Cramér-Rao bound is the best that unbiased fitting can do: optimistic at few counts, "
        "and blind to a second solution elsewhere.",
        "Inclination and colatitude of a spot can be exchanged with little change of the pulse. "
        "The bound sees only the neighbourhood of one solution; where the two meet it can also "
        "be pessimistic, because the ridge of good fits is folded there.",
        "Spots are circular and of one temperature each. Other outlines and temperature "
        "gradients add parameters, and cost precision.",
        "The surface radiates by the law assumed here. A real atmosphere beams its light "
        "differently, which moves pulsed fractions and the geometries that reproduce them.",
    ]
    if figure == "oblate":
        sentences.append(
            "An oblate surface in a Schwarzschild metric leaves out frame dragging and the "
            "quadrupole; its usual redshift is off by a phase-constant flux factor below 1 per "
            "cent for known spins (Jakab & Morsink 2025, arXiv:2507.02234)."
        )
    else:
        sentences.append(
            "The star is taken as a sphere, though rotation flattens it; above some 300 Hz that "
            "moves the pulse."
        )
    sentences += [
        "Absorption is by neutral atoms of one set of abundances, without molecules, grains or "
        "ions.",
        "The effective area is known up to one grey factor at most; errors that depend on energy "
        "are left out, and so is dead time.",
    ]
    if not forecast.is_geometry_known:
        sentences.append(
            "Shares are over the geometries drawn here; another prior on spots gives other "
            "shares. A measured shape of the pulse narrows them most."
        )
    return tuple(sentences)


def method(forecast: Forecast) -> tuple[str, ...]:
    """Return how the numbers were made, and how sure they are of themselves."""
    numerics = forecast.numerics
    sentences = [
        "Expected counts in phase bins and energy channels, with their derivatives, give the "
        "Fisher information of every parameter; background levels are eliminated in closed form "
        "and priors added.",
        "One sigma is the root of the diagonal of the inverse. data sigma leaves out the flat "
        "priors on mass and radius; sigma holds every prior. Prior-limited is a quantity of which "
        "the data and all else say less than its own prior does.",
        f"Doubling every resolution changes sigma(radius) by "
        f"{percent(numerics.resolution_change)} per cent at the median geometry; the scaled "
        f"information matrix has condition number {significant(numerics.condition, 2)} there.",
    ]
    if numerics.floored_share > 0.0:
        sentences.append(
            f"In {percent(numerics.floored_share)} per cent of its cells the source is eclipsed "
            "and carries no information."
        )
    if forecast.is_geometry_known:
        sentences.append("The geometry was given, so that there is no spread over geometries.")
    else:
        sentences.append(
            f"{len(forecast.geometries)} geometries were drawn from {forecast.candidates} "
            f"candidates with seed {forecast.seed}; weighted as the measurements tell, they are "
            f"worth {significant(forecast.effective_geometries, 2)}. The median of data "
            f"sigma(radius) has a Monte-Carlo error of {percent(numerics.quantile_error)} per "
            "cent."
        )
        sentences.append(_hidden(forecast.hidden_spots))
    return tuple(sentences)


def _hidden(count: int) -> str:
    if count == 0:
        return "No spot of any geometry stays out of sight."
    spots = "One spot" if count == 1 else f"{count} spots"
    never = "never shows" if count == 1 else "never show"
    return f"{spots} over all geometries {never}; they are kept and counted, and tell nothing."
