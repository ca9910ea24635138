"""Comparisons with the outside: asserted, and kept for the page of all of them."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import asdict, dataclass, field
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike

Kind = Literal["published", "computed independently", "common practice", "from memory"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Record:
    """One compared number.

    Parameters
    ----------
    topic, check, at : str
        Group, statement, and which of its points.
    source, kind : str
        Where the other value is from, and of what sort it is.
    ours, theirs, difference, tolerance : str
        As printed.
    strain : float
        Difference over tolerance.
    points : int
        Numbers compared under this label; this is the worst of them.
    note : str
        What a reader should know of the other value.
    """

    topic: str
    check: str
    at: str
    source: str
    kind: Kind
    ours: str
    theirs: str
    difference: str
    tolerance: str
    strain: float
    points: int = 1
    note: str = ""


@dataclass(slots=True)
class Checks:
    """What one module compares.

    Parameters
    ----------
    topic : str
        Title of the group.
    records : dict
        The worst point under each check and label.
    """

    topic: str
    records: dict[tuple[str, str], Record] = field(default_factory=dict)

    def close(
        self,
        check: str,
        ours: ArrayLike,
        theirs: ArrayLike,
        *,
        source: str,
        kind: Kind,
        relative: float = 0.0,
        absolute: float = 0.0,
        at: str | Sequence[str] = "",
        note: str = "",
    ) -> None:
        """Assert that numbers differ by no more than a tolerance.

        Parameters
        ----------
        check : str
            The statement; written out, so that the page's completeness can be seen.
        ours, theirs : array_like
            Numbers that broadcast.
        source, kind : str
            Of theirs.
        relative, absolute : float
            Allowed difference: the larger of `relative` times theirs and `absolute`.
        at : str or sequence of str
            Label of the point, or of each point.
        note : str
            Printed beside.
        """
        pair = np.broadcast_arrays(np.asarray(ours, float), np.asarray(theirs, float))
        here, there = (np.ravel(values) for values in pair)
        assert len(here) > 0, f"{check}: nothing is compared"
        labels = [at] * len(here) if isinstance(at, str) else list(at)
        allowed = np.maximum(relative * np.abs(there), absolute)
        difference = here - there
        assert np.all(np.isfinite(difference)), f"{check}: {here} against {there}"
        strain = np.abs(difference) / allowed
        for index, label in enumerate(labels):
            is_relative = relative * abs(there[index]) >= absolute
            unit = abs(there[index]) if is_relative else 1.0
            self._keep(
                Record(
                    topic=self.topic,
                    check=check,
                    at=label,
                    source=source,
                    kind=kind,
                    ours=_digits(here[index], allowed[index]),
                    theirs=_digits(there[index], allowed[index]),
                    difference=_size(difference[index] / unit, is_relative),
                    tolerance=_size(allowed[index] / unit, is_relative),
                    strain=float(strain[index]),
                    note=note,
                )
            )
        worst = int(np.argmax(strain))
        assert strain[worst] <= 1.0, (
            f"{check} {labels[worst]}: {here[worst]!r} against {there[worst]!r}, "
            f"differs by {difference[worst]:.3g}, allowed {allowed[worst]:.3g}"
        )

    def between(
        self,
        check: str,
        ours: float,
        low: float,
        high: float,
        *,
        source: str,
        kind: Kind,
        theirs: str = "",
        at: str = "",
        note: str = "",
    ) -> None:
        """Assert that a number lies in a range; `theirs` is the statement behind the range."""
        bound = f"{low:.4g} to {high:.4g}"
        if math.isinf(high):
            bound = f"above {low:.4g}"
        elif math.isinf(low):
            bound = f"below {high:.4g}"
        middle, half = 0.5 * (low + high), 0.5 * (high - low)
        self._keep(
            Record(
                topic=self.topic,
                check=check,
                at=at,
                source=source,
                kind=kind,
                ours="infinite" if math.isinf(ours) else f"{ours:.4g}",
                theirs=theirs or bound,
                difference="inside",
                tolerance=bound,
                strain=abs(ours - middle) / half if math.isfinite(half) else 0.0,
                note=note,
            )
        )
        assert low <= ours <= high, f"{check} {at}: {ours!r} is not {bound}"

    def _keep(self, record: Record) -> None:
        key = (record.check, record.at)
        before = self.records.get(key)
        worst = record if before is None or record.strain > before.strain else before
        points = 1 if before is None else before.points + 1
        self.records[key] = Record(**{**asdict(worst), "points": points})


def _digits(value: float, allowed: float) -> str:
    """Print a value two places beyond what is allowed, 16 digits at most."""
    if value == 0.0:
        return "0"
    wanted = math.floor(math.log10(abs(value))) - math.floor(math.log10(allowed)) + 2
    return f"{value:.{min(max(wanted, 2), 16)}g}"


def _size(value: float, is_relative: bool) -> str:
    if not is_relative:
        return f"{value:.2g}"
    return f"{100.0 * value:.2g} %" if abs(value) >= 1e-5 or value == 0.0 else f"{value:.1e} rel."
