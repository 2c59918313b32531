"""Numbers and lists as a director reads them: real minus signs, the plan's decimals, units beside every number."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence

from labstat.judgement.model import Finding

MINUS = "\u2212"
_EXTRA_DECIMALS = 4


def number(value: float, decimals: int) -> str:
    """A number with fixed decimals and a real minus sign; never a negative zero."""
    text = f"{value:.{decimals}f}"
    if float(text) == 0.0:
        text = text.lstrip("-")
    return text.replace("-", MINUS)


def signed(value: float, decimals: int) -> str:
    """The same with a plus sign above zero."""
    text = number(value, decimals)
    return text if text.startswith(MINUS) or float(text) == 0.0 else f"+{text}"


def plain(value: float) -> str:
    """A number from the plan, as short as it can be written."""
    return format(value, ".10g").replace("-", MINUS)


def with_unit(text: str, unit: str) -> str:
    return f"{text} {unit}".strip()


def listing(words: Iterable[str], last: str = "and") -> str:
    """``a``, ``a and b``, ``a, b and c``."""
    items = list(words)
    if len(items) < 2:
        return "".join(items)
    return f"{', '.join(items[:-1])} {last} {items[-1]}"


def some(words: Sequence[str], most: int = 3) -> str:
    """The first few of a list, and how many more there are."""
    if len(words) <= most:
        return listing(words)
    return f"{', '.join(words[:most])} and {len(words) - most} more"


def counted(n: int, one: str, many: str | None = None) -> str:
    """``1 specimen``, ``14 specimens``."""
    return f"{n} {one if n == 1 else many or one + 's'}"


def percent(share: float, decimals: int = 0) -> str:
    return f"{number(100 * share, decimals)} %"


def group_name(partition: Mapping[str, str]) -> str:
    """A partition in words: ``sex F``; everyone when nothing was partitioned."""
    return ", ".join(f"{column} {value}" for column, value in partition.items()) or "all individuals"


def decimals_that_tell(bounds: Iterable[float], edges: Iterable[float], decimals: int) -> int:
    """Decimals at which no bound is printed like an edge of the allowance from which it differs.

    A finding rests on unrounded numbers; without this a printed tie could contradict it.
    """
    pairs = [(bound, edge) for bound in bounds for edge in edges if bound != edge]
    for digits in range(decimals, decimals + _EXTRA_DECIMALS):
        if all(number(bound, digits) != number(edge, digits) for bound, edge in pairs):
            return digits
    return decimals + _EXTRA_DECIMALS


def evidence(finding: Finding, decimals: int) -> str:
    """Estimate and interval of a finding: ``+14 (11 to 17)``."""
    if finding.estimate is None:
        return "not known"
    if finding.low is None or finding.high is None:
        return f"{signed(finding.estimate, decimals)} (no interval)"
    digits = finding_decimals(finding, decimals)
    return f"{signed(finding.estimate, digits)} ({number(finding.low, digits)} to {number(finding.high, digits)})"


def finding_decimals(finding: Finding, decimals: int) -> int:
    """Decimals that show on which side of the allowance the bounds of a finding lie."""
    bounds = [b for b in (finding.low, finding.high) if b is not None]
    edges = [e for e in (finding.allowed_low, finding.allowed_high) if e is not None]
    return decimals_that_tell(bounds, edges, decimals)


def allowed(finding: Finding) -> str:
    """The allowance at the level in units: ``9``, or ``−4 to 8`` where the sides differ."""
    low, high = finding.allowed_low, finding.allowed_high
    if low is None or high is None:
        return "nothing"
    return plain(high) if low == -high else f"{plain(low)} to {plain(high)}"
