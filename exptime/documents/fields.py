"""The declarative table of a document's keys: what may stand where, and what it means.

One table serves the reader (`exptime.documents.field_reader`), the list of keys in the README
(`exptime.documents.listing`) and the comments of starter files.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import Final, Literal

Kind = Literal[
    "text", "choice", "boolean", "integer", "quantity", "uncertainty", "range", "mapping"
]

_SHOWN: Final = {"rad": ("deg", 180.0 / math.pi)}
"""Units that people do not write, and what they write instead."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Field:
    """One key of a document.

    Parameters
    ----------
    key : str
        The key.
    kind : Kind
        What stands there. ``"uncertainty"`` is a quantity in the unit of the sibling key
        ``value``, or a percentage of it; ``"range"`` is two numbers and a unit.
    meaning : str
        What it means, for the list of keys.
    example : str
        What a good value looks like.
    unit : str
        Unit inside the program; empty for a plain number.
    minimum, maximum : float
        Allowed range in that unit.
    excludes_minimum : bool
        The minimum itself is not allowed.
    reason : str
        Why the range is what it is, a sentence.
    is_required : bool
        Absence is a fault.
    default : str
        What happens when it is absent, for the list of keys.
    assumption : str
        The sentence that reports print when it is absent; empty for none.
    choices : tuple of str
        Allowed words of a choice.
    fields : tuple of Field
        Keys of a mapping.
    scalar_key : str
        Key for which a bare scalar stands in place of a mapping; empty if it may not.
    many : {"one", "list", "one or list"}
        Whether one mapping, a list of them, or either stands here.
    is_temperature : bool
        A temperature in kelvin is taken too.
    """

    key: str
    kind: Kind
    meaning: str
    example: str = ""
    unit: str = ""
    minimum: float = -math.inf
    maximum: float = math.inf
    excludes_minimum: bool = False
    reason: str = ""
    is_required: bool = False
    default: str = ""
    assumption: str = ""
    choices: tuple[str, ...] = ()
    fields: tuple[Field, ...] = ()
    scalar_key: str = ""
    many: Literal["one", "list", "one or list"] = "one"
    is_temperature: bool = False

    def allows(self, value: float) -> bool:
        """Say whether a number lies in the allowed range (false for NaN)."""
        if self.excludes_minimum and value == self.minimum:
            return False
        return self.minimum <= value <= self.maximum

    @property
    def bounds(self) -> str:
        """The allowed range in words, in the unit that people write."""
        unit, factor = _SHOWN.get(self.unit, (self.unit, 1.0))
        unit = f" {unit}" if unit else ""
        lower, upper = f"{self.minimum * factor:.6g}", f"{self.maximum * factor:.6g}"
        if math.isinf(self.minimum) and math.isinf(self.maximum):
            return ""
        if math.isinf(self.maximum):
            return f"{'above' if self.excludes_minimum else 'at least'} {lower}{unit}"
        if math.isinf(self.minimum):
            return f"at most {upper}{unit}"
        if self.excludes_minimum:
            return f"above {lower}, up to {upper}{unit}"
        return f"{lower} to {upper}{unit}"


def uncertainty(*, may_be_zero: bool = True, meaning: str = "", default: str = "") -> Field:
    """Return the field of an uncertainty beside a value.

    Parameters
    ----------
    may_be_zero : bool
        Zero, which holds a parameter fixed, is allowed.
    meaning, default : str
        As in `Field`; usual sentences when empty.
    """
    usual = "One standard deviation, with a unit or in per cent of the value"
    return Field(
        key="uncertainty",
        kind="uncertainty",
        meaning=meaning or (f"{usual}; 0 holds it fixed" if may_be_zero else usual),
        example="5 %",
        minimum=0.0,
        excludes_minimum=not may_be_zero,
        default=default,
    )


def measured(
    key: str,
    unit: str,
    meaning: str,
    *,
    example: str,
    minimum: float = -math.inf,
    maximum: float = math.inf,
    excludes_minimum: bool = False,
    reason: str = "",
    is_required: bool = False,
    is_temperature: bool = False,
    default: str = "",
    assumption: str = "",
    with_uncertainty: Field | None = None,
    more: tuple[Field, ...] = (),
    many: Literal["one", "list", "one or list"] = "one",
) -> Field:
    """Return a field that is a scalar, or a mapping of value, uncertainty and more.

    Parameters
    ----------
    key, unit, meaning, example, minimum, maximum, excludes_minimum, reason, is_required,
    is_temperature, default, assumption, many
        As in `Field`.
    with_uncertainty : Field, optional
        Field of the uncertainty; by default one that may be zero.
    more : tuple of Field
        Further keys of the mapping.
    """
    value = Field(
        key="value",
        kind="quantity",
        meaning="The value; a bare scalar in place of the braces stands for it",
        example=example,
        unit=unit,
        minimum=minimum,
        maximum=maximum,
        excludes_minimum=excludes_minimum,
        reason=reason,
        is_required=True,
        is_temperature=is_temperature,
    )
    spread = with_uncertainty or uncertainty()
    return Field(
        key=key,
        kind="mapping",
        meaning=meaning,
        example=example,
        is_required=is_required,
        default=default,
        assumption=assumption,
        fields=(value, replace(spread, unit=unit, is_temperature=is_temperature), *more),
        scalar_key="value",
        many=many,
    )
