"""labstat: validation statistics for a clinical laboratory.

Not a medical device and no substitute for qualified review; the rules of the laboratory's accreditation decide.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

__version__ = "0.1.0"

if TYPE_CHECKING:
    from labstat.batch import RunReport, run_round
    from labstat.batch.output import OutputError
    from labstat.comparison.lines import LineFit, fit_line
    from labstat.errors import ArgumentError, LabstatError, NotComputableError, RoundError
    from labstat.reference.limits import reference_limits
    from labstat.reference.results import ReferenceLimits
    from labstat.resample.estimate import Estimate
    from labstat.round.reading import read_round

_HOMES = {
    "ArgumentError": "labstat.errors",
    "Estimate": "labstat.resample.estimate",
    "LabstatError": "labstat.errors",
    "LineFit": "labstat.comparison.lines",
    "NotComputableError": "labstat.errors",
    "OutputError": "labstat.batch.output",
    "ReferenceLimits": "labstat.reference.results",
    "RoundError": "labstat.errors",
    "RunReport": "labstat.batch",
    "fit_line": "labstat.comparison.lines",
    "read_round": "labstat.round.reading",
    "reference_limits": "labstat.reference.limits",
    "run_round": "labstat.batch",
}

__all__ = [
    "ArgumentError", "Estimate", "LabstatError", "LineFit", "NotComputableError", "OutputError", "ReferenceLimits",
    "RoundError", "RunReport", "__version__", "fit_line", "read_round", "reference_limits", "run_round",
]


def __getattr__(name: str) -> object:
    """Load what is asked for when it is asked for: the command line answers at once, a fit loads no report."""
    home = _HOMES.get(name)
    if home is None:
        raise AttributeError(f"module 'labstat' has no attribute {name!r}")
    from importlib import import_module  # noqa: PLC0415

    value: object = getattr(import_module(home), name)
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    return sorted(__all__)
