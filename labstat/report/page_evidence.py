"""The last pages: cautions, rows left out, and how everything was computed."""

from __future__ import annotations

from reportlab.platypus import Flowable, KeepTogether, Spacer

from labstat.judgement.model import Judgement
from labstat.report.frame import Bookmark
from labstat.report.model import RunContext
from labstat.report.numbers import percent, plain
from labstat.report.styles import SECTION, bold_lead, heading, table, text
from labstat.report.words import METHODS
from labstat.round.model import AnalytePlan
from labstat.study.results import StudyResult

WEIGHTS = ("stop", "caution", "note")

SOURCES = {
    "ordinary": "ordinary least squares, for reference only",
    "deming": "Deming (Linnet 1990)",
    "weighted-deming": "weighted Deming (Linnet 1993)",
    "passing-bablok": "Passing–Bablok (Passing & Bablok 1983)",
}

INTERVALS = {
    "calibrated": "percentile bootstrap with its level calibrated by a second bootstrap (Loh 1987; Beran 1987; "
                  "Hall & Martin 1988)",
    "percentile": "percentile bootstrap (Efron 1979)",
    "bca": "bias-corrected and accelerated bootstrap (Efron 1987)",
    "jackknife": "delete-one jackknife with Student's t",
    "rank": "rank interval (Passing & Bablok 1983) for slope and intercept; biases calibrated",
}

MOST_ROWS = 120


def caution_pages(judgement: Judgement, wide: float) -> list[Flowable]:
    """All cautions, the weightiest first."""
    if not judgement.cautions:
        return []
    ordered = sorted(judgement.cautions, key=lambda caution: WEIGHTS.index(caution.weight))
    rows = [[caution.weight, caution.code, caution.text] for caution in ordered]
    return [
        Bookmark("Cautions", 1), *heading("Cautions", rows=len(rows)),
        table(["Weight", "Code", "What the reviewer must know"], rows, [wide * 0.09, wide * 0.19, wide * 0.72]),
    ]


def row_pages(study: StudyResult, wide: float) -> list[Flowable]:
    """The account of all rows, and each that was left out."""
    data = study.data
    rows = []
    for name in ("comparison", "reference", "precision"):
        c = data.rows[name]
        if c.read:
            numbers = (c.read, c.used, c.excluded, c.censored, c.missing, c.unpaired)
            rows.append([name, *(str(number) for number in numbers)])
    story: list[Flowable] = [
        Bookmark("Rows", 1), text("Rows", SECTION),
        table(
            ["Table", "Read", "Used", "Excluded", "Censored", "Missing", "Unpaired"], rows,
            [wide * 0.16] + [wide * 0.1] * 6, right=(1, 2, 3, 4, 5, 6),
        ),
        Spacer(0, 3),
    ]
    if data.left_out:
        listed = [
            [f"{row.file}:{row.line}", row.identity, " ".join(filter(None, (row.procedure, row.replicate))),
             row.result or "(empty)", row.why, row.reason]
            for row in data.left_out[:MOST_ROWS]
        ]
        head = ["Place", "Specimen or subject", "Procedure, replicate", f"Result ({data.plan.unit})", "Why", "Reason"]
        widths = [wide * w for w in (0.18, 0.15, 0.15, 0.12, 0.1, 0.3)]
        story.append(table(head, listed, widths))
        if len(data.left_out) > MOST_ROWS:
            more = len(data.left_out) - MOST_ROWS
            story.append(text(f"and {more} more: all are in tables/ and results.json"))
    else:
        story.append(text("Every row read was used."))
    return story


def method_pages(study: StudyResult, context: RunContext, wide: float) -> list[Flowable]:
    """How it was computed, from what, by which versions: enough to compute it again."""
    plan, r = study.data.plan, context.plan
    story: list[Flowable] = [Bookmark("How it was computed", 1), text("How it was computed", SECTION)]
    if plan.comparison is not None:
        story += _comparison_methods(plan, r.level)
    if plan.reference is not None:
        story.append(bold_lead(
            "Reference limits.",
            f"Limits at {', '.join(plain(p) for p in plan.reference.limits)}, method {plan.reference.method}: by rank, "
            "r = p(n + 1) with linear interpolation (Solberg 1987), exact bootstrap (Hutson & Ernst 2000) and rank "
            "interval (Reed, Henry & Mason 1971); robust (Horn, Pesce & Copeland 1998). Robust limits do not resist "
            f"outliers in the spread. Confidence of the limits {percent(r.limit_level, 0)}.",
        ))
    story.append(bold_lead(
        "Resampling.",
        f"Seed {context.seed}, {context.resamples} resamples. Every analyte's stream comes from the seed and its name: "
        "the same inputs, seed and versions give the same numbers and the same bytes.",
    ))
    versions = ", ".join(f"{name} {version}" for name, version in context.versions.items())
    inputs = table(["Input", "SHA-256"], [[i.path, i.sha256] for i in context.inputs], [wide * 0.3, wide * 0.7])
    story.append(KeepTogether([bold_lead("Versions.", versions + "."), inputs]))
    approved = r.approved
    if approved is None:
        words = "The plan names no approval of the criteria."
    else:
        words = f"Approved by {approved.by} on {approved.on}."
    story.append(bold_lead("Criteria.", f"{words} Hash of the criteria as they stand: {r.criteria_hash}."))
    deviations = "; ".join(r.deviations) if r.deviations else "none stated"
    story.append(bold_lead("Deviations from the plan.", deviations.rstrip(".") + "."))
    story.append(bold_lead("Prepared by.", f"{r.prepared_by}; reviewer {r.reviewer}."))
    if context.notes:
        story.append(bold_lead("Noticed while reading.", "; ".join(context.notes) + "."))
    return story


def _comparison_methods(plan: AnalytePlan, level: float) -> list[Flowable]:
    asked = plan.comparison
    if asked is None:
        return []
    lines = ", ".join(SOURCES[method] for method in asked.methods)
    ratio = ""
    if any("deming" in method for method in asked.methods):
        ratio = f" Variance ratio {plain(asked.variance_ratio)}, as the plan states it."
    return [
        bold_lead(
            "Lines.",
            f"{lines}. The bias is read from the {METHODS[asked.report]} line: intercept + (slope − 1) × level, in "
            f"percent of the level's absolute value. Means of replicates.{ratio}",
        ),
        bold_lead(
            "Intervals.",
            f"{percent(level, 0)} two-sided: {INTERVALS[asked.interval]}. Days as units: delete-one-day jackknife with "
            "Student's t, where five days or more are known; the wider of both intervals leads. Single specimens: "
            "jackknife after bootstrap (Efron 1992).",
        ),
        bold_lead(
            "Findings.",
            "within: the whole interval lies inside the allowance (closed, unrounded); beyond: the whole interval lies "
            "outside; unsettled: neither; not covered: the specimens do not reach the level. A point estimate settles "
            "nothing.",
        ),
    ]
