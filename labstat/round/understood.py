"""A round in words: what ``labstat check`` prints, so that a misread column is seen before anything is computed."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator

import numpy as np

from labstat.round.allowance import Allowance
from labstat.round.model import (
    AnalyteData,
    AnalytePlan,
    Array,
    ComparisonData,
    ComparisonPlan,
    LeftOut,
    ReferenceData,
    ReferencePlan,
    Round,
    RoundPlan,
    RowCount,
)


def describe(round: Round) -> str:
    """What was understood of a round, for a person to compare with what was meant.

    Analytes with units, procedures, counts, ranges, days, levels with the allowances in numbers, groups of the
    reference study, every row that is not used with its place and reason, what reading noticed, and the hash of the
    criteria. Problems are not part of it.
    """
    lines = [*_head(round.plan, len(round.analytes))]
    for data in round.analytes:
        lines += ["", *_analyte(data)]
    out = [row for data in round.analytes for row in _not_used(data)]
    lines += ["", f"rows not used: {len(out)}", *out]
    if round.notes:
        lines += ["", "notes:", *(f"  {note}" for note in round.notes)]
    lines += ["", *_criteria(round.plan)]
    return "\n".join(lines)


def _head(plan: RoundPlan, analytes: int) -> Iterator[str]:
    yield f"round: {plan.title}, {plan.laboratory}"
    yield f"prepared by {plan.prepared_by}, reviewed by {plan.reviewer}"
    report = "" if plan.report_number is None else f", report {plan.report_number}"
    issued = "no date of issue" if plan.issued is None else f"issued {plan.issued}"
    yield f"{issued}{report}, page {plan.page}"
    confidence = f"confidence {plan.level:g} (reference limits {plan.limit_level:g})"
    yield f"seed {plan.seed}, {plan.resamples} resamples, {confidence}"
    for deviation in plan.deviations:
        yield f"deviation: {deviation}"
    yield f"analytes: {analytes}"


def _analyte(data: AnalyteData) -> Iterator[str]:
    plan = data.plan
    words = [f"unit {plan.unit}", _number(plan.decimals, "decimal")]
    if plan.measuring_interval is not None:
        words.append(f"measuring interval {_span(*plan.measuring_interval)}")
    if plan.specimen_type is not None:
        words.append(plan.specimen_type)
    yield f"{plan.name}: {', '.join(words)}"
    if data.problems:
        number = "1 problem" if len(data.problems) == 1 else f"{len(data.problems)} problems"
        yield f"  will not be computed: {number}, see the messages"
    if plan.comparison is not None:
        for pairs in data.comparisons:
            yield from _pairs(pairs, plan)
        yield from _asked(plan.comparison, plan)
        yield f"    {_rows(data.rows['comparison'])}"
    if plan.reference is not None:
        yield from _reference(plan.reference, data.reference, plan)
        yield f"    {_rows(data.rows['reference'])}"
    if data.rows["precision"].read:
        yield "  precision (not computed by this version)"
        yield f"    {_rows(data.rows['precision'])}"
    for item in plan.elsewhere:
        yield f"  examined elsewhere: {item.item}, {item.document}, {item.outcome}"


def _pairs(pairs: ComparisonData, plan: AnalytePlan) -> Iterator[str]:
    yield f"  comparison of {pairs.candidate} (candidate, y) with {pairs.comparative} (comparative, x)"
    if pairs.specimens:
        yield (
            f"    {_number(len(pairs.specimens), 'paired specimen')}; "
            f"{pairs.comparative} {_range(pairs.x)} {plan.unit}, {pairs.candidate} {_range(pairs.y)} {plan.unit}"
        )
        yield f"    {pairs.comparative}: {_replicates(pairs.x_replicates)}"
        yield f"    {pairs.candidate}: {_replicates(pairs.y_replicates)}"
    else:
        yield "    no paired specimens"
    subjects = {subject for subject in pairs.subjects if subject is not None}
    if subjects:
        yield f"    {_number(len(subjects), 'subject')}"
    if pairs.specimens:
        yield f"    days: {_days(pairs.days)}"
    if pairs.censored:
        yield f"    {_number(len(pairs.censored), 'specimen')} with a censored result"


def _replicates(of_specimens: tuple[tuple[float, ...], ...]) -> str:
    number = Counter(len(values) for values in of_specimens)
    total = sum(len(values) for values in of_specimens)
    if len(number) == 1:
        each = next(iter(number))
        return f"{total} results, {each} a specimen"
    shares = ", ".join(f"{each} of {_number(number[each], 'specimen')}" for each in sorted(number))
    return f"{total} results ({shares})"


def _days(days: tuple[str | None, ...]) -> str:
    number = Counter(day for day in days if day is not None)
    if not number:
        return "not known"
    unknown = len(days) - sum(number.values())
    ordered = sorted(number)
    span = ordered[0] if len(ordered) == 1 else f"{ordered[0]} to {ordered[-1]}"
    blank = f"; {_number(unknown, 'specimen')} without a day" if unknown else ""
    return f"{len(number)} ({span}){blank}"


def _asked(asked: ComparisonPlan, plan: AnalytePlan) -> Iterator[str]:
    methods = ", ".join(f"{method} (reported)" if method == asked.report else method for method in asked.methods)
    yield (
        f"    lines: {methods}; {asked.interval} interval; variance ratio {asked.variance_ratio:g}; "
        f"{asked.difference} differences"
    )
    yield f"    fewer than {asked.minimum_n} specimens: no proposal; fewer than {asked.recommended_n}: a caution"
    for level in asked.levels:
        source = "" if level.source is None else f", {level.source}"
        at = f"    at {_plain(level.at)} {plan.unit}:"
        if level.allowable is None and level.total_error is None:
            yield f"{at} no allowance, estimates only{source}"
        if level.allowable is not None:
            yield f"{at} {_allowed(level.allowable, level.at)}{source}"
        if level.total_error is not None:
            yield f"{at} total error {_allowed(level.total_error, level.at)}{source} (not assessed by this version)"
    if not asked.levels:
        yield "    no decision levels, estimates only"


def _allowed(allowance: Allowance, at: float) -> str:
    low, high = allowance.at(at)
    return f"{_plain(low)} to {_plain(high)} allowed ({allowance.text})"


def _reference(asked: ReferencePlan, data: ReferenceData | None, plan: AnalytePlan) -> Iterator[str]:
    yield "  reference limits"
    limits = " and ".join(f"{p:g}" for p in asked.limits)
    by = f"; by {', '.join(asked.partition)}" if asked.partition else ""
    yield f"    limits {limits}; method {asked.method}; {asked.interval} interval{by}"
    if data is not None:
        labels = [tuple(column[i] for column in data.columns.values()) for i in range(len(data.subjects))]
        for group in sorted(set(labels)):
            here = np.array([label == group for label in labels])
            name = ", ".join(f"{c} {v}" for c, v in zip(data.columns, group, strict=True)) or "all"
            values = data.values[here]
            finite = values[np.isfinite(values)]
            span = f", {_range(finite)} {plan.unit}" if finite.size else ""
            outside = int(values.size - finite.size)
            censored = f", of them {outside} censored" if outside else ""
            yield f"    {name}: {_number(int(values.size), 'individual')}{censored}{span}"
    for adopted in asked.adopted:
        who = ", ".join(f"{column} {value}" for column, value in adopted.where.items()) or "all"
        if adopted.low is None or adopted.high is None:
            side = f"from {_plain(adopted.low)}" if adopted.low is not None else f"up to {_plain(adopted.high or 0.0)}"
        else:
            side = _span(adopted.low, adopted.high)
        yield f"    interval in use, {who}: {side} {plan.unit}"
    for key, text in asked.about.items():
        yield f"    {key.replace('_', ' ')}: {text}"


def _rows(count: RowCount) -> str:
    return (
        f"rows: {count.read} read = {count.used} used + {count.excluded} excluded + {count.censored} censored + "
        f"{count.missing} missing + {count.unpaired} unpaired"
    )


def _not_used(data: AnalyteData) -> Iterator[str]:
    for row in sorted(data.left_out, key=lambda row: (row.file, row.line)):
        yield f'  {row.file}:{row.line}: {data.plan.name}, {_who(row)}: "{row.result}": {row.why}: {row.reason}'


def _who(row: LeftOut) -> str:
    kind = {"comparison": "specimen", "reference": "subject", "precision": "material"}[row.study]
    words = [f"{kind} {row.identity}"]
    if row.procedure is not None:
        words.append(row.procedure)
    if row.replicate is not None:
        words.append(f"replicate {row.replicate}")
    return ", ".join(words)


def _criteria(plan: RoundPlan) -> Iterator[str]:
    yield f"criteria: {plan.criteria_hash}"
    approved = plan.approved
    if approved is None:
        yield "  not marked as approved in the plan"
    elif approved.criteria is None:
        yield f"  approved by {approved.by} on {approved.on}, without their hash: a later change would not show"
    elif approved.criteria == plan.criteria_hash:
        yield f"  as approved by {approved.by} on {approved.on}"
    else:
        yield f"  CHANGED since {approved.by} approved {approved.criteria} on {approved.on}"


def _range(values: Array) -> str:
    return _span(float(values.min()), float(values.max()))


def _span(low: float, high: float) -> str:
    return f"{_plain(low)} to {_plain(high)}"


def _plain(value: float) -> str:
    """A number with all the digits that a laboratory writes, and no rounding noise."""
    return f"{value:.10g}"


def _number(count: int, what: str) -> str:
    return f"{count} {what}" if count == 1 else f"{count} {what}s"
