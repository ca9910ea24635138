"""What was read, shown before anything is computed: the answers of `check` and `instruments`."""

from __future__ import annotations

import json
import textwrap
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import Any

from exptime.instrument.records import BackgroundKnowledge, Instrument, Redistribution
from exptime.target.records import Target

_INDENT = "  "
_LAWS = {
    "sqrt": "growing as the root of energy",
    "constant": "the same at every energy",
    "linear": "growing with energy",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Checked:
    """A target, and perhaps an instrument, without faults.

    Parameters
    ----------
    target : Target
        What the target file says.
    instrument : Instrument or None
        What the instrument description says.
    """

    target: Target
    instrument: Instrument | None = None

    def to_text(self, width: int = 80) -> str:
        """Return what was understood and what is assumed, in at most so many columns."""
        target, instrument = self.target, self.instrument
        lines = [*textwrap.wrap(f"Target {target.name} ({_place(target.file)})", width), ""]
        lines += _table([(entry.key, entry.text) for entry in target.entries], width)
        if instrument is not None:
            title = f"Instrument {instrument.id}"
            lines += ["", *textwrap.wrap(title, width), "", *_table(describe(instrument), width)]
        lines += _list("Assumed", self.assumptions, width)
        lines += _list("Warnings", self.warnings, width)
        return "\n".join([*lines, "", "No fault found. Nothing was computed."]) + "\n"

    def to_json(self) -> str:
        """Return the same as a JSON document (``exptime.check/1``)."""
        target, instrument = self.target, self.instrument
        document: dict[str, Any] = {
            "schema": "exptime.check/1",
            "target": {
                "name": target.name,
                "file": target.file,
                "given": [
                    {"key": entry.key, "text": entry.text, "line": entry.line}
                    for entry in target.entries
                ],
            },
            "instrument": None if instrument is None else _summary(instrument),
            "assumptions": list(self.assumptions),
            "warnings": list(self.warnings),
        }
        return json.dumps(document, ensure_ascii=False, allow_nan=False, indent=2) + "\n"

    @property
    def assumptions(self) -> tuple[str, ...]:
        """Sentences about what neither file says."""
        return self.target.assumptions + (self.instrument.assumptions if self.instrument else ())

    @property
    def warnings(self) -> tuple[str, ...]:
        """Doubts about what they say."""
        return self.target.warnings + (self.instrument.warnings if self.instrument else ())


@dataclass(frozen=True, slots=True, kw_only=True)
class InstrumentList:
    """The instrument descriptions that ship.

    Parameters
    ----------
    instruments : tuple of Instrument
        In the order of their ids.
    """

    instruments: tuple[Instrument, ...]

    def to_text(self, width: int = 80) -> str:
        """Return id and name of each with its band, area and background."""
        lines = []
        for instrument in self.instruments:
            lines += [f"{instrument.id}", *_table(describe(instrument)[:5], width), ""]
        closing = (
            "All of these are invented. Describe yours in a file of the same form and give its "
            "path after -i."
        )
        return "\n".join([*lines, *textwrap.wrap(closing, width)]) + "\n"

    def to_json(self) -> str:
        """Return the same as a JSON document."""
        document = {"instruments": [_summary(each) for each in self.instruments]}
        return json.dumps(document, ensure_ascii=False, allow_nan=False, indent=2) + "\n"


def describe(instrument: Instrument) -> list[tuple[str, str]]:
    """Return what an instrument description says, as pairs of a label and words."""
    edges, area = instrument.channel_edges_kev, instrument.area
    peak = int(area.area_cm2.argmax())
    efficiency = instrument.observing_efficiency
    pairs = [
        ("name", instrument.name),
        (
            "effective area",
            f"up to {area.area_cm2[peak]:.4g} cm2 at {area.energies_kev[peak]:.3g} keV; "
            f"table from {area.energies_kev[0]:.3g} to {area.energies_kev[-1]:.3g} keV",
        ),
        ("channels", f"{edges.size - 1} from {edges[0]:.3g} to {edges[-1]:.3g} keV"),
        ("redistribution", _redistribution(instrument.redistribution)),
        (
            "background",
            f"{instrument.background_per_s.sum():.3g} ct/s, "
            f"{_knowledge(instrument.background_knowledge)}",
        ),
        ("timing", _timing(instrument)),
        ("area uncertainty", _share(instrument.area_uncertainty, "none")),
        ("observing efficiency", "not stated" if efficiency is None else _share(efficiency, "")),
        ("phase bins", str(instrument.phase_bins)),
        ("area table", area.source),
    ]
    return pairs


def _summary(instrument: Instrument) -> dict[str, Any]:
    edges = instrument.channel_edges_kev
    return {
        "id": instrument.id,
        "name": instrument.name,
        "band_kev": [float(edges[0]), float(edges[-1])],
        "channels": int(edges.size - 1),
        "peak_area_cm2": float(instrument.area.area_cm2.max()),
        "background_per_s": float(instrument.background_per_s.sum()),
        "background_knowledge": instrument.background_knowledge.kind,
        "phase_bins": instrument.phase_bins,
    }


def _redistribution(spread: Redistribution) -> str:
    if spread.law == "perfect" or spread.fwhm_kev == 0.0:
        return "perfect"
    return (
        f"{1e3 * spread.fwhm_kev:.4g} eV full width at half maximum at {spread.at_kev:.3g} keV, "
        f"{_LAWS[spread.law]}"
    )


def _knowledge(knowledge: BackgroundKnowledge) -> str:
    share = _share(knowledge.fraction, "exactly")
    return {
        "known": "known exactly",
        "unknown": "one free level in each channel",
        "fraction": f"one level per 0.2 keV known to {share}",
        "scale": f"one common factor known to {share}",
    }[knowledge.kind]


def _timing(instrument: Instrument) -> str:
    bin_width, error = instrument.time_resolution_s, instrument.time_uncertainty_s
    return f"bins of {_duration(bin_width)}, clock good to {_duration(error)}"


def _duration(seconds: float) -> str:
    for size, unit in ((1.0, "s"), (1e-3, "ms"), (1e-6, "us")):
        if seconds >= size:
            return f"{seconds / size:.3g} {unit}"
    return f"{seconds * 1e9:.3g} ns" if seconds > 0.0 else "0 s"


def _share(value: float, none: str) -> str:
    return f"{100.0 * value:.3g} %" if value > 0.0 else none


def _place(file: str) -> str:
    return "standard input" if file == "-" else file


def _table(pairs: Sequence[tuple[str, str]], width: int) -> list[str]:
    """Return pairs as lines, the second column wrapped under itself."""
    column = max((len(key) for key, _ in pairs), default=0) + 2
    lines = []
    for key, text in pairs:
        start = f"{_INDENT}{key:<{column}}"
        lines += textwrap.wrap(
            text, width, initial_indent=start, subsequent_indent=" " * len(start)
        ) or [start.rstrip()]
    return lines


def _list(title: str, sentences: Iterable[str], width: int) -> list[str]:
    """Return a title with its sentences as a list; nothing where there are none."""
    lines = [
        line
        for sentence in sentences
        for line in textwrap.wrap(
            sentence, width, initial_indent=f"{_INDENT}- ", subsequent_indent=f"{_INDENT}  "
        )
    ]
    return ["", title, "", *lines] if lines else []
