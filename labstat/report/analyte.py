"""The report of one analyte."""

from __future__ import annotations

from reportlab.platypus import Flowable, PageBreak

from labstat.judgement.model import Judgement
from labstat.report.fonts import missing
from labstat.report.frame import document, usable_width
from labstat.report.model import RunContext
from labstat.report.page_comparison import comparison_pages
from labstat.report.page_evidence import caution_pages, method_pages, row_pages
from labstat.report.page_one import leading_comparison, page_one
from labstat.report.page_reference import reference_pages
from labstat.report.styles import text
from labstat.study.results import StudyResult


def analyte_report(study: StudyResult, judgement: Judgement, context: RunContext) -> bytes:
    """The report as a PDF: page one for the director, the following ones for who audits it."""
    plan = study.data.plan
    wide = usable_width(context.plan.page)
    story: list[Flowable] = [*page_one(study, judgement, context), PageBreak()]
    lost = missing(_user_text(study, context))
    if lost:
        words = f"The embedded font has no sign for {len(lost)} characters of the names; they show as \ufffd."
        story.append(text(words))
    for result in study.comparisons:
        shown_already = result is leading_comparison(study, judgement)
        story += comparison_pages(
            result, plan, judgement.findings, wide=wide, with_differences=not shown_already
        )
    story += reference_pages(study, wide=wide, level=context.plan.limit_level)
    story += caution_pages(judgement, wide)
    story += row_pages(study, wide)
    story += method_pages(study, context, wide)
    number = context.plan.report_number
    return document(
        story, page=context.plan.page, title=f"{plan.name}: validation report", subject=context.plan.title,
        author=context.plan.laboratory, left=f"{context.plan.laboratory}: {plan.name}",
        right=f"{number}, " if number else "",
    )


def _user_text(study: StudyResult, context: RunContext) -> str:
    """All names that the laboratory wrote and the pages show."""
    plan, r = study.data.plan, context.plan
    names = [plan.name, plan.unit, plan.specimen_type or "", r.title, r.laboratory, r.prepared_by, r.reviewer]
    for result in study.comparisons:
        names += [result.data.comparative, result.data.candidate, *result.data.specimens]
    names += [row.reason for row in study.data.left_out]
    return "".join(names)
