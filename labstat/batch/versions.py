"""Versions of what a result was computed with."""

from __future__ import annotations

import platform
from importlib import metadata

from labstat import __version__

PACKAGES = ("numpy", "scipy", "pandas", "statsmodels", "reportlab")


def versions() -> dict[str, str]:
    """labstat, Python and the libraries that numbers and pages come from."""
    return {
        "labstat": __version__,
        "python": platform.python_version(),
        **{package: metadata.version(package) for package in PACKAGES},
    }
