"""Options that several commands share."""

from __future__ import annotations

import argparse
import os
from collections.abc import Sequence
from typing import Any


class Once(argparse.Action):
    """Store a value, and refuse a second one instead of forgetting the first."""

    def __call__(
        self,
        parser: argparse.ArgumentParser,
        namespace: argparse.Namespace,
        values: Any,
        option_string: str | None = None,
    ) -> None:
        """Store the value."""
        given: set[str] = getattr(namespace, "_given", set())
        if self.dest in given:
            parser.error(f"{option_string} is given twice")
        namespace._given = given | {self.dest}
        setattr(namespace, self.dest, values)


def add_target(parser: argparse.ArgumentParser) -> None:
    """Add the target file."""
    parser.add_argument("target", metavar="TARGET", help="target file, or - for standard input")


def add_instrument(parser: argparse.ArgumentParser, *, is_required: bool = False) -> None:
    """Add the instrument."""
    parser.add_argument(
        *("-i", "--instrument"),
        action=Once,
        metavar="INSTRUMENT",
        required=is_required,
        help="id of a shipped instrument, otherwise the path of a description",
    )


def add_delivery(parser: argparse.ArgumentParser, formats: Sequence[str]) -> None:
    """Add the format and the place of the answer."""
    parser.add_argument(
        "--format", action=Once, choices=formats, default="text", help="text unless given"
    )
    parser.add_argument(
        "--output",
        action=Once,
        metavar="FILE",
        help="write there instead of standard output; replaced whole or not at all",
    )


def add_draws(parser: argparse.ArgumentParser) -> None:
    """Add how unknown geometries are drawn."""
    group = parser.add_argument_group("geometries, where the target file gives no hot spots")
    for name, default, meaning in (
        ("--draws", "128", "geometries that are forecast"),
        ("--seed", "1", "seed of the random draws"),
    ):
        group.add_argument(
            name, action=Once, metavar="N", default=default, help=f"{meaning} (default {default})"
        )
    group.add_argument(
        "--jobs",
        action=Once,
        metavar="N",
        default=str(usable_cores()),
        help="processes; changes no number (default: the usable cores)",
    )
    group.add_argument(
        "--fixed-star",
        action="store_true",
        help="hold a mass or radius that is not given at 1.4 Msun and 12 km, not drawn",
    )


def usable_cores() -> int:
    """Return how many cores this process may use."""
    if hasattr(os, "sched_getaffinity"):
        return len(os.sched_getaffinity(0))
    return os.cpu_count() or 1
