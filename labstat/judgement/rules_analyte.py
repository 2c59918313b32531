"""Cautions about an analyte as a whole: its rows and the plan it was judged by."""

from __future__ import annotations

from collections.abc import Iterable

from labstat.judgement.scene import AnalyteScene, Rule
from labstat.judgement.wording import counted, listing, percent
from labstat.round.model import LeftOut

MOST_EXCLUDED = 0.05
FEWEST_ONE_SIDED = 3  # two exclusions fall on one side by chance half the time, three a quarter


def _changed(scene: AnalyteScene) -> str | None:
    approved = scene.round.approved
    if approved is None or approved.criteria is None or approved.criteria == scene.round.criteria_hash:
        return None
    return (
        f"the criteria are not those that {approved.by} approved on {approved.on}: they were changed afterwards, and "
        "the change "
        "needs a reason on record"
    )


def _exclusions(scene: AnalyteScene) -> str | None:
    parts = []
    for study, rows in scene.study.data.rows.items():
        share = rows.excluded / rows.read if rows.read else 0.0
        if share > MOST_EXCLUDED:
            parts.append(f"{rows.excluded} of {rows.read} rows of the {study} ({percent(share, 1)}) were excluded")
    side = _one_side(scene.study.data.left_out)
    if side is not None:
        parts.append(side)
    if not parts:
        return None
    return f"{listing(parts)}: exclusions can decide a finding, look at each reason"


def _one_side(left_out: Iterable[LeftOut]) -> str | None:
    """Whether all excluded pairs differ in one direction, where both results can be read."""
    specimens: dict[str, list[LeftOut]] = {}
    for row in left_out:
        if row.study == "comparison":
            specimens.setdefault(row.identity, []).append(row)
    signs = []
    for rows in specimens.values():
        procedures = {row.procedure for row in rows}
        values = {row.procedure: _value(row.result) for row in rows}
        if not any(row.why == "excluded" for row in rows) or len(procedures) != 2 or None in values.values():
            continue
        first, second = sorted(values, key=str)
        difference = (values[second] or 0.0) - (values[first] or 0.0)
        signs.append((difference > 0) - (difference < 0))
    if len(signs) < FEWEST_ONE_SIDED or len(set(signs)) != 1 or signs[0] == 0:
        return None
    return f"all {len(signs)} excluded specimens differ in the same direction"


def _value(text: str) -> float | None:
    try:
        return float(text.replace(",", "."))
    except ValueError:
        return None


def _censored(scene: AnalyteScene) -> str | None:
    rows = scene.study.data.rows.get("comparison")
    if rows is None or rows.censored == 0:
        return None
    return (
        f"{counted(rows.censored, 'result')} outside a measuring interval took no part in the line: agreement there "
        "is not shown"
    )


ANALYTE_RULES: tuple[Rule[AnalyteScene], ...] = (
    Rule("changed-criterion", "caution", _changed),
    Rule("exclusions", "caution", _exclusions),
    Rule("censored-results", "note", _censored),
)
