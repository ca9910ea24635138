"""The one place that decides with how many digits a number is shown."""

from __future__ import annotations

import math
from decimal import ROUND_HALF_EVEN, Decimal
from typing import Final

UNCONSTRAINED: Final = "unconstrained"
UNKNOWN: Final = "not known"
NOT_REACHED: Final = "not reached"

_HOPELESS: Final = 10.0
_SUPERSCRIPTS: Final = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")
_TIME_UNITS: Final = ((1e6, "Ms"), (1e3, "ks"), (1.0, "s"))
_FINE_STEP_S: Final = 5e3
_COARSE_STEP_S: Final = 1e4
_COARSE_FROM_S: Final = 5e5


def decimals_of_uncertainty(sigma: float) -> int:
    """Return the decimal places to which an uncertainty, and its value, are rounded.

    Parameters
    ----------
    sigma : float
        Finite and above zero.

    Returns
    -------
    int
        Negative where tens or more are rounded away.

    Notes
    -----
    With the three leading digits of the uncertainty between 100 and 354 it keeps two digits,
    between 355 and 949 one, and above it becomes 1000 and keeps two: the rounding rule of the
    Particle Data Group, Review of Particle Physics, Introduction.
    """
    mantissa, exponent = f"{sigma:.2e}".split("e")
    leading = round(100 * float(mantissa))
    return 1 - int(exponent) if leading <= 354 else -int(exponent)


def value_with_uncertainty(value: float, sigma: float) -> str:
    """Return a value and its uncertainty, such as ``"12.13 ± 0.29"``.

    Parameters
    ----------
    value, sigma : float
        In the same unit. A sigma of zero says that the value is fixed.
    """
    if math.isnan(value) or math.isnan(sigma):
        return UNKNOWN
    if is_hopeless(sigma, value):
        return f"{significant(value, 3)} ({UNCONSTRAINED})"
    if sigma <= 0.0:
        return f"{significant(value, 3)} (fixed)"
    places = decimals_of_uncertainty(sigma)
    return f"{_to_places(value, places)} ± {_to_places(sigma, places)}"


def is_hopeless(sigma: float, value: float) -> bool:
    """Say whether an uncertainty is infinite or beyond ten times the value."""
    return not math.isfinite(sigma) or (value != 0.0 and sigma > _HOPELESS * abs(value))


def uncertainty(sigma: float, value: float) -> str:
    """Return an uncertainty that is itself the thing of interest, with two digits.

    Parameters
    ----------
    sigma, value : float
        Uncertainty and the value it belongs to, in the same unit.
    """
    if math.isnan(sigma):
        return UNKNOWN
    return UNCONSTRAINED if is_hopeless(sigma, value) else significant(sigma, 2)


def precision(sigma: float, value: float) -> str:
    """Return an uncertainty relative to its value, such as ``"3.4 %"``."""
    if math.isnan(sigma) or math.isnan(value) or value == 0.0:
        return UNKNOWN
    return (
        UNCONSTRAINED
        if is_hopeless(sigma, value)
        else f"{significant(100.0 * sigma / abs(value), 2)} %"
    )


def percent(fraction: float, digits: int = 2) -> str:
    """Return a hundred times a fraction, without a sign of per cent; 5 of 0.05."""
    text = significant(100.0 * fraction, digits)
    return text.rstrip("0").rstrip(".") if "." in text else text


def share(fraction: float) -> str:
    """Return a share of the geometries in words, never rounded to all or none by mistake."""
    if math.isnan(fraction):
        return UNKNOWN
    if fraction <= 0.0:
        return "none"
    if fraction >= 1.0 - 1e-9:
        return "all"
    if fraction < 0.01:
        return "less than 1 per cent"
    return "more than 99 per cent" if fraction > 0.99 else f"{100.0 * fraction:.0f} per cent"


def share_number(fraction: float) -> str:
    """Return the same for a narrow column, such as ``"46 %"``."""
    words = share(fraction)
    return {"none": "0 %", "all": "100 %", "less than 1 per cent": "< 1 %"}.get(
        words, words.replace("more than ", "> ").replace(" per cent", " %")
    )


def duration(seconds: float, digits: int = 3) -> str:
    """Return a time with its natural unit, such as ``"1.2 Ms"``.

    Parameters
    ----------
    seconds : float
        Infinite where a goal is not reached.
    digits : int
        Significant digits, to the nearest.
    """
    if math.isnan(seconds):
        return UNKNOWN
    if math.isinf(seconds):
        return NOT_REACHED
    if seconds <= 0.0:
        return "0 s"
    return _with_time_unit(float(f"{seconds:.{digits - 1}e}"))


def requested_time(seconds: float) -> str:
    """Return a time as it is asked for: up to whole 5 ks, beyond 500 ks to whole 10 ks."""
    if not math.isfinite(seconds):
        return duration(seconds)
    step = _FINE_STEP_S if seconds <= _COARSE_FROM_S else _COARSE_STEP_S
    # A hair above a step is the rounding of a product, not a need for another step.
    return _with_time_unit(step * max(1, math.ceil(seconds / step - 1e-9)))


def significant(number: float, digits: int) -> str:
    """Return a number with so many digits, in powers of ten where it is very large or small."""
    if math.isnan(number):
        return UNKNOWN
    if math.isinf(number):
        return "infinite" if number > 0 else "minus infinite"
    if number == 0.0:
        return "0"
    mantissa, exponent_text = f"{number:.{digits - 1}e}".split("e")
    exponent = int(exponent_text)
    if -4 <= exponent < 5:
        places = digits - 1 - exponent
        return _to_places(float(f"{mantissa}e{exponent}"), places)
    return f"{mantissa} × 10{str(exponent).translate(_SUPERSCRIPTS)}"


def _to_places(number: float, places: int) -> str:
    """Round half to even at a decimal place, counted left of the point where negative."""
    rounded = Decimal(repr(number)).quantize(Decimal(1).scaleb(-places), ROUND_HALF_EVEN)
    return f"{rounded:f}"


def _with_time_unit(seconds: float) -> str:
    for size, unit in _TIME_UNITS:
        if seconds >= size:
            return f"{Decimal(repr(float(f'{seconds / size:.10g}'))).normalize():f} {unit}"
    return f"{significant(seconds, 2)} s"
