"""Results in the words and decimals that the pages share."""

from __future__ import annotations

from dataclasses import replace

from labstat.judgement.model import Finding
from labstat.judgement.rules_reference import undercovers
from labstat.judgement.wording import finding_decimals
from labstat.report.numbers import number, plain, signed, signed_span, span
from labstat.resample.estimate import Estimate

INTERVALS = {
    "calibrated": "calibrated", "calibrated-bound": "calibrated to its bound", "percentile": "percentile",
    "bca": "BCa", "jackknife": "jackknife", "rank": "rank", "normal": "t",
}

METHODS = {
    "ordinary": "Ordinary least squares", "deming": "Deming", "weighted-deming": "Weighted Deming",
    "passing-bablok": "Passing–Bablok",
}

LIMITS = {"rank": "rank", "robust": "robust", "transformed": "transformed"}


def bias_decimals(decimals: int) -> int:
    """Biases are shown with one decimal more than results."""
    return decimals + 1


def finding_number(finding: Finding, decimals: int, unit: str) -> str:
    """Estimate with interval and unit: "+3.1 (+1.9 to +4.2) µmol/L"."""
    digits = finding_decimals(finding, decimals)
    if finding.estimate is None:
        return "no number"
    return f"{signed(finding.estimate, digits)} ({signed_span(finding.low, finding.high, digits)}) {unit}"


def allowed(finding: Finding, unit: str) -> str:
    """What is allowed, in units: "±9 µmol/L (8 or 10 %)"."""
    low, high = finding.allowed_low, finding.allowed_high
    if low is None or high is None:
        return finding.allowance or "no criterion"
    edges = f"±{plain(high)}" if low == -high else f"{plain(low)} to {plain(high)}"
    return f"{edges} {unit} ({finding.allowance})"


def with_interval(made: Estimate | None, digits: int, *, sign: bool = False) -> str:
    """Estimate and interval in one cell."""
    if made is None:
        return "–"
    show, between = (signed, signed_span) if sign else (number, span)
    return f"{show(made.estimate, digits)} ({between(made.low, made.high, digits)})"


def quoted(made: Estimate) -> Estimate:
    """The interval to quote for a limit: the rank interval where the bootstrap's attains too little and one exists."""
    if not undercovers(made):
        return made
    return replace(
        made, low=made.rank_low, high=made.rank_high, interval="rank", resamples=None, attained=made.rank_attained
    )


def how(made: Estimate) -> str:
    """How an interval was obtained: kind and resamples."""
    kind = INTERVALS.get(made.interval, made.interval)
    if made.resamples is None:
        return kind
    if made.resamples == "exact":
        return f"{kind}, exact bootstrap"
    return f"{kind}, {made.resamples} resamples"


def count(n: int, one: str, many: str) -> str:
    """"1 specimen", "14 specimens"."""
    return f"{n} {one if n == 1 else many}"


def no_sign(lost: str) -> str:
    """What is said of characters that the fonts cannot draw."""
    what = count(len(lost), "character", "characters")
    shows = "it shows" if len(lost) == 1 else "they show"
    return f"The embedded font has no sign for {what} of the names; {shows} as \ufffd."


def reach(finding: Finding) -> float:
    """The largest share of the allowance that the interval reaches, on either side."""
    shares = [
        abs(value / edge)
        for value, edge in ((finding.low, finding.allowed_low), (finding.high, finding.allowed_high))
        if value is not None and edge
    ]
    return max(shares, default=0.0)
