"""The report of one analyte."""

from __future__ import annotations

from dataclasses import replace

from reportlab.platypus import Flowable, PageBreak

from labstat.judgement.model import Judgement
from labstat.report.fonts import missing, strings
from labstat.report.frame import document, usable_width
from labstat.report.model import RunContext
from labstat.report.page_comparison import comparison_pages
from labstat.report.page_evidence import caution_pages, method_pages, row_pages
from labstat.report.page_one import leading_comparison, on_page_one, page_one, patients
from labstat.report.page_reference import reference_pages
from labstat.report.styles import text
from labstat.report.words import no_sign
from labstat.study.results import StudyResult


def analyte_report(study: StudyResult, judgement: Judgement, context: RunContext) -> bytes:
    """The report as a PDF: page one for the director, the following ones for who audits it."""
    plan = study.data.plan
    wide = usable_width(context.plan.page)
    story: list[Flowable] = [*page_one(study, judgement, context), PageBreak()]
    lost = missing(_user_text(study, judgement, context))
    if lost:
        story.append(text(no_sign(lost)))
    for result in study.comparisons:
        shown_already = result is leading_comparison(study, judgement)
        story += comparison_pages(
            result, plan, judgement.findings, wide=wide, with_differences=not shown_already
        )
        if result not in on_page_one(study, judgement):
            story += patients(study, [result])
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


def _user_text(study: StudyResult, judgement: Judgement, context: RunContext) -> str:
    """All text of the laboratory's that the pages show."""
    parts: list[object] = [study.data.plan, replace(context.plan, analytes=()), context.inputs, context.notes]
    for result in study.comparisons:
        parts += [result.data.comparative, result.data.candidate, result.data.specimens, result.data.censored]
    parts += [group.partition for group in study.groups]
    parts += [study.data.left_out, judgement]
    return "".join(strings(parts))
