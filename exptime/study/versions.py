"""Versions of the program and of what its numbers rest on."""

from __future__ import annotations

import platform
from importlib.metadata import PackageNotFoundError, version

_PACKAGES = ("exptime", "numpy", "scipy", "astropy")


def versions() -> dict[str, str]:
    """Return package names with their versions, exptime first, Python last."""
    found = {}
    for package in _PACKAGES:
        try:
            found[package] = version(package)
        except PackageNotFoundError:
            found[package] = "not installed"
    return {**found, "python": platform.python_version()}
