"""Cautions about one comparison: how many specimens, which rows, what the line leaves open."""

from __future__ import annotations

from collections.abc import Iterator

from labstat.judgement.scene import ComparisonScene, Rule
from labstat.judgement.wording import counted, listing, number, plain, signed, some, with_unit
from labstat.resample.estimate import Estimate

FEWEST_DAYS = 5  # below it no day-clustered interval exists
LOWEST_CORRELATION = 0.9
NOT_LINEAR = 0.05


def stopped(scene: ComparisonScene) -> bool:
    """Too few specimens for a proposal on agreement."""
    return scene.result.n < scene.asked.minimum_n


def _too_few(scene: ComparisonScene) -> str | None:
    if not stopped(scene):
        return None
    return (
        f"{counted(scene.result.n, 'specimen')} can be compared ({scene.pair}), {scene.asked.minimum_n} are needed "
        "for a "
        f"proposal on agreement and {scene.asked.recommended_n} are recommended"
    )


def _few(scene: ComparisonScene) -> str | None:
    if stopped(scene) or scene.result.n >= scene.asked.recommended_n:
        return None
    return (
        f"{scene.result.n} specimens were compared ({scene.pair}), {scene.asked.recommended_n} are recommended: the "
        "intervals are wide and say less about rare interferences"
    )


def _few_days(scene: ComparisonScene) -> str | None:
    days = scene.result.days
    if days is not None and days >= FEWEST_DAYS:
        return None
    known = "the days of measurement are not known" if days is None else f"the work took {counted(days, 'day')}"
    return (
        f"{known}, {FEWEST_DAYS} are needed to judge how far days differ: the intervals leave out what the results "
        "of one "
        "day share (calibration), and may be too narrow by far"
    )


def _copied(scene: ComparisonScene) -> str | None:
    equal, n = scene.result.equal_pairs, scene.result.n
    if 2 * equal <= n:
        return None
    return f"{equal} of {n} specimens have the same result by both procedures: were results copied?"


def _swapped(scene: ComparisonScene) -> str | None:
    result = scene.result
    why = []
    if result.correlation is not None and result.correlation < LOWEST_CORRELATION:
        why.append(f"the results of the procedures correlate weakly (r = {number(result.correlation, 3)})")
    if 2 * result.equal_after_shift >= result.n:
        why.append(f"{result.equal_after_shift} of {result.n} candidate results equal a neighbour's by the comparative")
    if not why:
        return None
    return f"{listing(why)}: look for swapped columns, shifted rows or a range too narrow for a line"


def _not_linear(scene: ComparisonScene) -> str | None:
    test = scene.result.linearity
    if test is None or test.p_value >= NOT_LINEAR:
        return None
    p = "p below 0.001" if test.p_value < 0.001 else f"p = {number(test.p_value, 3)}"
    return (
        f"the relation may not be a straight line (cusum test, {p}), so the bias "
        "read from the line may be wrong at single levels: look at the plot"
    )


def _ordinary(scene: ComparisonScene) -> str | None:
    if scene.result.reported.method != "ordinary":
        return None
    return (
        "the plan reads the bias from ordinary least squares, which takes the comparative's results as free of error "
        "and "
        "flattens the slope when they are not"
    )


def _outliers(scene: ComparisonScene) -> str | None:
    flagged = scene.result.outliers
    if not flagged:
        return None
    names = some([outlier.specimen for outlier in flagged], 5)
    return (
        f"{counted(len(flagged), 'difference')} flagged as outlying (specimen {names}); nothing was removed, and "
        "every finding "
        "was also read without"
    )


def _single_large(scene: ComparisonScene) -> str | None:
    flagged = scene.result.outliers
    if not flagged:
        return None
    worst = max(flagged, key=lambda outlier: (abs(outlier.y - outlier.x), outlier.specimen))
    levels = [q for q in scene.questions if q.finding is not None]
    near = min(levels, key=lambda q: abs(q.level.level.at - worst.x), default=None)
    difference = worst.y - worst.x
    beside = ""
    if near is not None and near.level.level.allowable is not None:
        low, high = near.level.level.allowable.at(near.level.level.at)
        if low <= difference <= high:
            return None
        beside = f", more than the bias allowed at {plain(near.level.level.at)}"
    shown = with_unit(signed(difference, scene.plan.decimals), scene.plan.unit)
    return (
        f"specimen {worst.specimen} differs by {shown} ({number(worst.x, scene.plan.decimals)} by "
        f"{scene.result.data.comparative}){beside}: consider interference in this patient before excluding it"
    )


def _opposite(scene: ComparisonScene) -> str | None:
    above, below = [], []
    for question in scene.questions:
        bias = question.level.leading.bias
        if bias.low is not None and bias.low > 0:
            above.append(plain(question.level.level.at))
        if bias.high is not None and bias.high < 0:
            below.append(plain(question.level.level.at))
    if not (above and below):
        return None
    return (
        f"the candidate reads high at {with_unit(listing(above), scene.plan.unit)} and low at "
        f"{with_unit(listing(below), scene.plan.unit)}: the mean difference hides it"
    )


def _shifted(scene: ComparisonScene) -> list[str]:
    """Levels at which a change of results is shown: the interval of the bias leaves out zero."""
    digits = scene.plan.decimals
    return [
        f"{signed(q.level.leading.bias.estimate, digits)} at {plain(q.level.level.at)}"
        for q in scene.questions
        for bias in (q.level.leading.bias,)
        if bias.low is not None and bias.high is not None and (bias.low > 0 or bias.high < 0)
    ]


def _serial(scene: ComparisonScene) -> str | None:
    jumps = _shifted(scene)
    if not jumps:
        return None
    return (
        f"on the day of change results will jump by about {with_unit(listing(jumps), scene.plan.unit)}: tell "
        "clinicians who "
        "follow patients over time, and consider new baselines"
    )


def _critical(scene: ComparisonScene) -> str | None:
    if not _shifted(scene):
        return None
    return "critical limits and delta-check limits were set for the comparative procedure and need review"


def _selected(scene: ComparisonScene) -> str | None:
    changed = [q.level.changes for q in scene.questions if q.level.changes.up + q.level.changes.down > 0]
    if not changed:
        return None
    return (
        f"specimens that change side of a level (at {listing(plain(change.at) for change in changed)}) are counts "
        "among the "
        "specimens chosen for this comparison, not rates among patients"
    )


def _no_levels(scene: ComparisonScene) -> str | None:
    if any(q.finding is not None for q in scene.questions):
        return None
    return "the plan gives no allowable bias at any level, so nothing was judged: the numbers are estimates only"


def _estimates(scene: ComparisonScene) -> Iterator[tuple[str, Estimate]]:
    """Every estimate a reader may quote, with its name (the day-clustered ones belong to their level)."""
    for fit in scene.result.fits:
        yield f"the slope ({fit.method})", fit.slope
        yield f"the intercept ({fit.method})", fit.intercept
    for question in scene.questions:
        yield f"the bias at {plain(question.level.level.at)}", question.level.bias.bias
    if scene.result.difference is not None:
        yield "the mean difference", scene.result.difference.mean
        yield "the lower limit of agreement", scene.result.difference.lower
        yield "the upper limit of agreement", scene.result.difference.upper


def _replaced(scene: ComparisonScene) -> str | None:
    return replaced(_estimates(scene))


def _no_interval(scene: ComparisonScene) -> str | None:
    return no_interval(_estimates(scene))


def _failed(scene: ComparisonScene) -> str | None:
    return failed_resamples(_estimates(scene))


def replaced(estimates: Iterator[tuple[str, Estimate]]) -> str | None:
    """Intervals of another kind than the plan's, by name."""
    other = [(name, e) for name, e in estimates if e.replaced is not None]
    if not other:
        return None
    first = other[0][1]
    return (
        f"the {first.interval} interval stands in for the {first.replaced} one of "
        f"{some([name for name, _ in other], 4)}: "
        f"{first.reason or 'it could not be had'}"
    )


def no_interval(estimates: Iterator[tuple[str, Estimate]]) -> str | None:
    """Numbers without an interval, and why."""
    bare = [(name, e) for name, e in estimates if e.low is None or e.high is None]
    if not bare:
        return None
    return (
        f"there is no interval for {some([name for name, _ in bare], 4)}: {bare[0][1].reason or 'none exists'}; a "
        "number "
        "without an interval settles nothing"
    )


def failed_resamples(estimates: Iterator[tuple[str, Estimate]]) -> str | None:
    """Resamples in which a statistic did not exist."""
    failed = [(name, e) for name, e in estimates if e.failed_resamples > 0]
    if not failed:
        return None
    name, worst = max(failed, key=lambda item: item[1].failed_resamples)
    return (
        f"{worst.failed_resamples} of {worst.resamples} resamples gave no value for {name}: they are left out of its "
        "interval, and above 1 % no interval is given"
    )


COMPARISON_RULES: tuple[Rule[ComparisonScene], ...] = (
    Rule("few-specimens", "stop", _too_few),
    Rule("few-specimens", "caution", _few),
    Rule("few-days", "caution", _few_days),
    Rule("swapped-columns", "caution", _swapped),
    Rule("copied-results", "caution", _copied),
    Rule("not-linear", "caution", _not_linear),
    Rule("ordinary-line", "caution", _ordinary),
    Rule("opposite-bias", "caution", _opposite),
    Rule("single-specimen-large", "caution", _single_large),
    Rule("no-interval", "caution", _no_interval),
    Rule("failed-resamples", "note", _failed),
    Rule("interval-replaced", "note", _replaced),
    Rule("outlier", "note", _outliers),
    Rule("serial-results", "note", _serial),
    Rule("critical-limits", "note", _critical),
    Rule("selected-specimens", "note", _selected),
    Rule("no-allowance", "note", _no_levels),
)
