"""results.json: everything that was computed, unrounded, in the order of the interface.

A quantity that could not be computed is ``None`` (``null``), never NaN. The same results give the same bytes.
"""

from __future__ import annotations

import json
import math
from collections.abc import Iterable, Mapping, Sequence
from typing import Any

from labstat.comparison.lines import LineFit
from labstat.comparison.results import Bias, Difference
from labstat.judgement.model import Finding, Judgement
from labstat.record.reference import group_record
from labstat.record.values import Json, estimate_record, floating, plain_text
from labstat.report.model import RunContext
from labstat.round.model import AnalyteData, Approval, LeftOut, Problem, RowCount
from labstat.study.results import BiasAtLevel, ComparisonResult, StudyResult

FORMAT = "labstat results 1"
STUDIES = ("comparison", "reference", "precision")


def round_record(context: RunContext, analytes: Sequence[Json], *, only: Sequence[str] = ()) -> Json:
    """The whole of results.json; ``only`` names the analytes when not all of the plan were asked for."""
    plan = context.plan
    return {
        "format": FORMAT,
        "program": dict(context.versions),
        "inputs": [{"path": file.path, "sha256": file.sha256} for file in context.inputs],
        "round": {
            "title": plan.title,
            "laboratory": plan.laboratory,
            "seed": context.seed,
            "resamples": context.resamples,
            "level": plan.level,
            "limit_level": plan.limit_level,
            "prepared_by": plan.prepared_by,
            "reviewer": plan.reviewer,
            "issued": plan.issued,
            "report_number": plan.report_number,
            "page": plan.page,
            "approved": _approval(plan.approved),
            "criteria_hash": plan.criteria_hash,
            "deviations": list(plan.deviations),
            "only": list(only),
            "notes": list(context.notes),
        },
        "analytes": list(analytes),
    }


def _approval(approved: Approval | None) -> Json | None:
    return None if approved is None else {"by": approved.by, "on": approved.on, "criteria": approved.criteria}


def analyte_record(study: StudyResult, judgement: Judgement) -> Json:
    """One analyte that was computed."""
    found = {(f.candidate, f.at): f for f in judgement.findings}
    return {
        "name": study.data.plan.name,
        "unit": study.data.plan.unit,
        "outcome": "computed",
        "reason": None,
        "rows": _rows(study.data.rows),
        "comparison": [_comparison(result, found) for result in study.comparisons],
        "reference": [group_record(group) for group in study.groups],
        "precision": [],
        "findings": [_finding(finding) for finding in judgement.findings],
        "cautions": [
            {"code": c.code, "weight": c.weight, "text": c.text, "question": c.question} for c in judgement.cautions
        ],
        "proposal": judgement.proposal,
        "situation": judgement.situation,
        "next_action": judgement.next_action,
        "not_examined": list(judgement.not_examined),
        "not_computed": [
            {"study": part.study, "where": part.where, "reason": part.reason, "whole": part.whole}
            for part in study.not_computed
        ],
        **_plan_and_rows(study.data),
    }


def failed_record(data: AnalyteData, reason: str) -> Json:
    """One analyte that could not be computed: every key is there, and the reason."""
    return _failed(data.plan.name, data.plan.unit, reason, data.rows, _plan_and_rows(data))


def stray_record(name: str, reason: str, problems: Iterable[Problem]) -> Json:
    """Rows of an analyte that the plan does not know."""
    extra = {"decimals": None, "left_out": [], "problems": [str(problem) for problem in problems]}
    return _failed(name, "", reason, {}, extra)


def _failed(name: str, unit: str, reason: str, rows: Mapping[str, RowCount], extra: Json) -> Json:
    return {
        "name": name,
        "unit": unit,
        "outcome": "not computed",
        "reason": reason,
        "rows": _rows(rows),
        "comparison": [],
        "reference": [],
        "precision": [],
        "findings": [],
        "cautions": [],
        "proposal": f"Not computed: {reason}",
        "situation": "not computed",
        "next_action": "correct the rows or the data, then run again",
        "not_examined": [],
        "not_computed": [],
        **extra,
    }


def _plan_and_rows(data: AnalyteData) -> Json:
    return {
        "decimals": data.plan.decimals,
        "left_out": [_left_out(row) for row in data.left_out],
        "problems": [str(problem) for problem in data.problems],
    }


def _left_out(row: LeftOut) -> Json:
    return {
        "study": row.study, "file": row.file, "line": row.line, "identity": row.identity, "procedure": row.procedure,
        "replicate": row.replicate, "result": row.result, "why": row.why, "reason": row.reason,
    }


def _rows(rows: Mapping[str, RowCount]) -> Json:
    none = RowCount(0, 0, 0, 0, 0, 0)
    return {
        study: {
            "read": count.read, "used": count.used, "excluded": count.excluded, "censored": count.censored,
            "missing": count.missing, "unpaired": count.unpaired,
        }
        for study in STUDIES
        for count in (rows.get(study, none),)
    }


def _comparison(result: ComparisonResult, found: Mapping[tuple[str | None, float | None], Finding]) -> Json:
    return {
        "comparative": result.data.comparative,
        "candidate": result.data.candidate,
        "n": result.n,
        "range": [floating(end) for end in result.range],
        "fits": [_fit(fit) for fit in result.fits],
        "bias": [_bias(level, found.get((result.data.candidate, level.level.at))) for level in result.levels],
        "difference": _difference(result.difference),
        "linearity": None if result.linearity is None else {
            "statistic": floating(result.linearity.statistic), "p_value": floating(result.linearity.p_value),
        },
        "reported": result.reported.method,
        "unit_of_resampling": result.unit_of_resampling,
        "days": result.days,
        "correlation": floating(result.correlation),
        "equal_pairs": result.equal_pairs,
        "equal_after_shift": result.equal_after_shift,
        "replicates": list(result.replicates),
        "outliers": [
            {
                "specimen": o.specimen, "comparative": floating(o.x), "candidate": floating(o.y),
                "difference": floating(o.difference), "statistic": floating(o.statistic),
                "critical": floating(o.critical),
            }
            for o in result.outliers
        ],
        "censored": [
            {"specimen": pair.specimen, "comparative": pair.comparative, "candidate": pair.candidate}
            for pair in result.data.censored
        ],
    }


def _fit(fit: LineFit) -> Json:
    return {
        "method": fit.method,
        "slope": estimate_record(fit.slope),
        "intercept": estimate_record(fit.intercept),
        "n": fit.n,
        "variance_ratio": floating(fit.variance_ratio),
        "slopes_used": fit.slopes_used,
        "pairs_below_minus_one": fit.pairs_below_minus_one,
        "seed": fit.seed,
    }


def _bias(level: BiasAtLevel, finding: Finding | None) -> Json:
    allowable, total = level.level.allowable, level.level.total_error
    changes = level.changes
    return {
        "at": floating(level.level.at),
        **_bias_values(level.bias),
        "allowable": None if allowable is None else allowable.text,
        "source": level.level.source,
        "finding": None if finding is None else finding.finding,
        "settles_at_n": None if finding is None else finding.settles_at_n,
        "allowed": None if allowable is None else [floating(edge) for edge in allowable.at(level.level.at)],
        "total_error": None if total is None else total.text,
        "counts": None if finding is None else finding.counts,
        "rests_on": None if finding is None else finding.rests_on,
        "leading": level.leading_unit,
        "by_day": None if level.by_day is None else _bias_values(level.by_day),
        "near": level.near,
        "covered": level.covered,
        "censored_near": list(level.censored_near),
        "without_specimen": [
            {"unit": w.unit, "estimate": floating(w.estimate), "low": floating(w.low), "high": floating(w.high)}
            for w in level.without_specimen
        ],
        "without_outliers": None if level.without_outliers is None else _bias_values(level.without_outliers),
        "changes": {
            "n": changes.n, "up": changes.up, "up_low": floating(changes.up_low),
            "up_high": floating(changes.up_high), "down": changes.down, "down_low": floating(changes.down_low),
            "down_high": floating(changes.down_high),
        },
    }


def _bias_values(bias: Bias) -> Json:
    return {
        "bias": estimate_record(bias.bias),
        "percent": None if bias.percent is None else estimate_record(bias.percent),
    }


def _difference(difference: Difference | None) -> Json | None:
    if difference is None:
        return None
    return {
        "scale": difference.scale,
        "n": difference.n,
        "mean": estimate_record(difference.mean),
        "sd": floating(difference.sd),
        "lower": estimate_record(difference.lower),
        "upper": estimate_record(difference.upper),
        "normal": dict(zip(("mean", "lower", "upper"), map(estimate_record, difference.normal), strict=True)),
    }


def _finding(finding: Finding) -> Json:
    return {
        "study": finding.study,
        "question": finding.question,
        "where": finding.where,
        "estimate": floating(finding.estimate),
        "low": floating(finding.low),
        "high": floating(finding.high),
        "allowance": finding.allowance,
        "source": finding.source,
        "finding": finding.finding,
        "counts": finding.counts,
        "candidate": finding.candidate,
        "at": floating(finding.at),
        "allowed": [floating(finding.allowed_low), floating(finding.allowed_high)],
        "rests_on": finding.rests_on,
        "settles_at_n": finding.settles_at_n,
    }


def as_bytes(record: Json) -> bytes:
    """UTF-8 with a line feed at the end; refuses NaN and infinities."""
    text = json.dumps(_clean(record), ensure_ascii=False, indent=1, allow_nan=False)
    return f"{text}\n".encode()


def _clean(value: Any) -> Any:
    if isinstance(value, str):
        return plain_text(value)
    if isinstance(value, Mapping):
        return {plain_text(str(key)): _clean(item) for key, item in value.items()}
    if isinstance(value, (list, tuple)):
        return [_clean(item) for item in value]
    if isinstance(value, float) and not math.isfinite(value):
        raise ValueError("a number that is not finite must be recorded as null")
    return value
