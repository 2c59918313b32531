"""The first page: what was asked, what the evidence says, what is proposed, and room for the decision."""

from __future__ import annotations

from collections.abc import Sequence

from reportlab.lib.colors import white
from reportlab.platypus import Flowable, KeepTogether, Paragraph, Spacer, Table, TableStyle

from labstat.judgement.model import Finding, Judgement
from labstat.report.axes import ALARM, INK, SOFT
from labstat.report.differences import difference_plot
from labstat.report.fonts import BOLD, markup
from labstat.report.frame import Bookmark, usable_height, usable_width
from labstat.report.model import RunContext
from labstat.report.numbers import number, percent, plain, signed
from labstat.report.reference_plot import reference_plot
from labstat.report.share_bar import share_axis, share_bar
from labstat.report.styles import (
    DANGER,
    HEAD,
    LEFT,
    PADS,
    PROPOSAL,
    SECTION,
    SMALL,
    TINT,
    TITLE,
    beside,
    bold_lead,
    boxed,
    ruled,
    table,
    text,
)
from labstat.report.words import INTERVALS, allowed, count, finding_number, quoted, reach, with_interval
from labstat.study.results import ComparisonResult, GroupResult, StudyResult

ROWS = (9, 7, 6, 5, 4, 3)
"""Questions tried to show on page one, so that the decision stays on it; all are in the tables that follow."""

LEAST_FIGURE, BEST_FIGURE = 120.0, 270.0
"""Height of the figure on page one: what the rest leaves, within these bounds."""

MOST_DANGERS = 3
MOST_LEVELS = 4
MOST_CANDIDATES = 2
CELL_LINES = 4
"""Lines of a name or an allowance in the rows of page one; the header and the tables that follow have more room."""

ORDER = {"beyond": 0, "not covered": 1, "unsettled": 2, "within": 3}


def page_one(study: StudyResult, judgement: Judgement, context: RunContext) -> list[Flowable]:
    """Everything a director needs in two minutes, in this order and on this page."""
    wide, high = usable_width(context.plan.page), usable_height(context.plan.page)

    def above(rows: int) -> list[Flowable]:
        story: list[Flowable] = [*_head(study, context, wide)]
        proposal = [text("Proposal to the director", HEAD), text(judgement.proposal, PROPOSAL, most=1200)]
        story.append(boxed(proposal, wide, line=INK, fill=TINT))
        story += _dangers(judgement, wide)
        if judgement.findings:
            story += _questions(study, judgement, wide, rows)
        story += _reference(study, wide)
        if study.comparisons:
            story += patients(study, [r for r in study.comparisons if r in on_page_one(study, judgement)])
            hidden = len(study.comparisons) - MOST_CANDIDATES
            if hidden > 0:
                story.append(text(f"{count(hidden, 'more candidate', 'more candidates')} on the pages that follow."))
        return story

    room = 0.0
    rows = ROWS[0]
    for rows in ROWS:
        rest = [*above(rows), *_examined(study, judgement), *_decision(context, wide)]
        room = high - _height(rest, wide) - 30.0
        if room >= LEAST_FIGURE or rows >= len(judgement.findings) + 3:
            break
    figure = min(max(room, LEAST_FIGURE), BEST_FIGURE)
    return [
        Bookmark(study.data.plan.name), *above(rows), *_figure(study, judgement, wide, figure),
        *_examined(study, judgement), KeepTogether(_decision(context, wide)),
    ]


def _height(story: list[Flowable], wide: float) -> float:
    """Height that the flowables take one above the other."""
    return sum(item.wrap(wide, 10_000.0)[1] + item.getSpaceBefore() + item.getSpaceAfter() for item in story)


def leading_comparison(study: StudyResult, judgement: Judgement) -> ComparisonResult:
    """The comparison whose findings ask most of the reader: its differences are drawn on page one."""
    ordered = [finding.candidate for finding in nearest_first(judgement.findings)]
    by_name = {result.data.candidate: result for result in study.comparisons}
    return next((by_name[name] for name in ordered if name in by_name), study.comparisons[0])


def _head(study: StudyResult, context: RunContext, wide: float) -> list[Flowable]:
    plan = study.data.plan
    parts = []
    for result in study.comparisons[:1]:
        names = ", ".join(other.data.candidate for other in study.comparisons)
        parts.append(f"{names} (candidate) against {result.data.comparative} (comparative); purpose: new procedure")
    if study.groups:
        parts.append("reference limits")
    if plan.specimen_type:
        parts.append(plan.specimen_type)
    facts = [
        f"Report {context.plan.report_number or 'without number'}, {context.plan.issued or 'not dated'}",
        context.plan.laboratory,
        context.plan.title,
    ]
    first, second = wide * 0.66, wide * 0.34
    left: list[Flowable] = [
        text(f"{plan.name} ({plan.unit})", TITLE, wide=first, lines=2),
        text("; ".join(parts), LEFT, wide=first - LEFT.rightIndent, lines=7),
    ]
    return [beside(left, [text(fact, SMALL, wide=second, lines=2) for fact in facts], (first, second)), Spacer(0, 5)]


def _dangers(judgement: Judgement, wide: float) -> list[Flowable]:
    stops = [("Stop:", caution.text) for caution in judgement.cautions if caution.weight == "stop"]
    beyond = [
        ("Beyond:", f"at {finding.where} the whole interval lies outside the allowance")
        for finding in judgement.findings if finding.finding == "beyond"
    ]
    entries = [*beyond, *stops]
    if not entries:
        return []
    lines: list[Flowable] = [
        bold_lead(lead, sentence, DANGER, wide=wide - 12, lines=10) for lead, sentence in entries[:MOST_DANGERS]
    ]
    if len(entries) > MOST_DANGERS:
        lines.append(text(f"{len(entries) - MOST_DANGERS} more on the following pages", DANGER))
    return [Spacer(0, 4), boxed(lines, wide, line=ALARM)]


def few_near(finding: Finding) -> bool:
    """Unsettled although the whole interval lies inside the allowance: too few specimens lie near the level."""
    low, high, bottom, top = finding.low, finding.high, finding.allowed_low, finding.allowed_high
    if finding.finding != "unsettled" or low is None or high is None or bottom is None or top is None:
        return False
    return bottom <= low and high <= top


def nearest_first(findings: tuple[Finding, ...]) -> list[Finding]:
    """Findings in the order of what they ask of the reader, in each kind those that reach furthest first."""
    return sorted(findings, key=lambda finding: (ORDER[finding.finding], -reach(finding)))


def _questions(study: StudyResult, judgement: Judgement, wide: float, most: int) -> list[Flowable]:
    plan = study.data.plan
    bar = 96.0
    widths = (wide * 0.19, wide * 0.21, wide * 0.20, bar + 8, wide - wide * 0.60 - bar - 8)
    chosen = nearest_first(judgement.findings)[:most]
    kept = [finding for finding in judgement.findings if finding in chosen]  # in the plan's order
    rows: list[list[Flowable | list[Flowable]]] = [[
        text("Is the bias allowed?", HEAD), text("Bias and its interval", HEAD), text("Allowed, and by what", HEAD),
        share_axis(width=bar, height=9), text("Finding", HEAD),
    ]]
    for finding in kept:
        words: list[Flowable] = [Paragraph(f'<font name="{BOLD}">{markup(finding.finding)}</font>', SMALL)]
        if few_near(finding):
            words.append(text("the interval is inside, but too few specimens lie near the level"))
        if finding.counts != finding.finding:
            words.append(text(f"counts as {finding.counts}", SMALL))
            if finding.rests_on:
                words.append(text(finding.rests_on, SMALL, most=110))
        allowance: list[Flowable] = [
            text(allowed(finding, plan.unit), wide=widths[2] - PADS, lines=CELL_LINES),
            text(finding.source or "", SMALL, most=70),
        ]
        rows.append([
            text(f"At {finding.where}", wide=widths[0] - PADS, lines=CELL_LINES),
            text(finding_number(finding, plan.decimals, plan.unit), wide=widths[1] - PADS, lines=CELL_LINES), allowance,
            share_bar(finding, width=bar, height=13), words,
        ])
    story: list[Flowable] = [text("What the evidence says", SECTION), ruled(rows, widths, pad=2.0)]
    left = len(judgement.findings) - len(kept)
    if left:
        more = count(left, "more question is", "more questions are")
        story.append(text(f"{more} in the tables of the following pages; those shown ask most of the reader."))
    return story


def _reference(study: StudyResult, wide: float) -> list[Flowable]:
    """The limits in short where the study has them."""
    if not study.groups:
        return []
    plan = study.data.plan
    rows = []
    for group in study.groups[:6]:
        name = ", ".join(f"{column} {value}" for column, value in group.partition.items()) or "all"
        adopted = "none given"
        if group.adopted is not None:
            low, high = group.adopted.low, group.adopted.high
            adopted = f"{'–' if low is None else plain(low)} to {'–' if high is None else plain(high)}"
        rows.append([
            name, str(group.limits.n), group.limits.method,
            _limit(group, "lower", plan.decimals), _limit(group, "upper", plan.decimals), adopted,
        ])
    head = ["Group", "n", "Method", f"Lower limit ({plan.unit})", f"Upper limit ({plan.unit})", f"In use ({plan.unit})"]
    widths = (wide * 0.18, wide * 0.07, wide * 0.11, wide * 0.25, wide * 0.25, wide * 0.14)
    story: list[Flowable] = [text("Reference limits, each with its interval", SECTION), table(head, rows, widths)]
    if len(study.groups) > len(rows):
        story.append(text(f"{len(study.groups) - len(rows)} more groups on the following pages", SMALL))
    return story


def _limit(group: GroupResult, side: str, decimals: int) -> str:
    """A limit with the interval to quote, and of which kind that is."""
    made = group.limits.lower if side == "lower" else group.limits.upper
    if made is None:
        asked = any((p >= 0.5) == (side == "upper") for p in group.limits.probabilities)
        return "not computed" if asked or len(group.limits.probabilities) > 1 else "not asked for"
    chosen = quoted(made)
    kind = "" if chosen.low is None else f", {INTERVALS.get(chosen.interval, chosen.interval)}"
    return with_interval(chosen, decimals) + kind


def on_page_one(study: StudyResult, judgement: Judgement) -> list[ComparisonResult]:
    """The comparisons whose meaning for patients stands on page one: the leading one, then in the plan's order."""
    first = leading_comparison(study, judgement)
    return [first, *(result for result in study.comparisons if result is not first)][:MOST_CANDIDATES]


def patients(study: StudyResult, results: Sequence[ComparisonResult]) -> list[Flowable]:
    """What the change means for patients: results that change side, the largest difference, the expected jump."""
    plan = study.data.plan
    story: list[Flowable] = [text("For patients", SECTION)]
    for result in results:
        moved = []
        for item in result.levels[:MOST_LEVELS]:
            c = item.changes
            moved.append(
                f"at {plain(c.at)}: {c.up} up ({percent(c.up_low, 0)} to {percent(c.up_high, 0)}), "
                f"{c.down} down ({percent(c.down_low, 0)} to {percent(c.down_high, 0)})"
            )
        words = ""
        if moved:
            words = (
                f"of {result.n} specimens, results that change side of a level, with exact 95 % intervals: "
                f"{'; '.join(moved)}. These are not rates among patients. "
            )
        story.append(bold_lead(f"{result.data.candidate}:", words + _largest(result, plan.decimals, plan.unit)))
        jumps = ", ".join(
            f"{signed(item.leading.bias.estimate, plan.decimals)} at {plain(item.level.at)}"
            for item in result.levels[:MOST_LEVELS]
        )
        if jumps:
            more = len(result.levels) - MOST_LEVELS
            rest = f" {count(more, 'more level', 'more levels')} in the tables that follow." if more > 0 else ""
            story.append(text(f"Expected jump of serial results on the day of change: {jumps} {plan.unit}.{rest}"))
    return story


def _largest(result: ComparisonResult, decimals: int, unit: str) -> str:
    at = result.largest
    x, y = float(result.data.x[at]), float(result.data.y[at])
    return (
        f"Largest single difference: {signed(y - x, decimals)} {unit}, specimen {result.data.specimens[at]} "
        f"({number(x, decimals)} and {number(y, decimals)})."
    )


def _figure(study: StudyResult, judgement: Judgement, wide: float, high: float) -> list[Flowable]:
    if not study.comparisons:
        if not study.groups:
            return []
        plot = reference_plot(study.groups, study.data.plan, width=wide, height=high)
        return [text("Reference values", SECTION), plot]
    result = leading_comparison(study, judgement)
    plot = difference_plot(result, study.data.plan, width=wide * 0.66, height=high)
    strip: list[Flowable] = [text("Specimens", HEAD)]
    plan = study.data.plan
    low, high = result.range
    rows = study.data.rows["comparison"]
    facts = [
        f"{result.n} measured by both procedures",
        f"{number(low, plan.decimals)} to {number(high, plan.decimals)} {plan.unit} by {result.data.comparative}",
        "days not known" if result.days is None else count(result.days, "day", "days"),
        "single results" if max(result.replicates) == 1 else "replicates: up to {} and {}".format(*result.replicates),
        f"rows: {rows.read} read, {rows.used} used",
    ]
    left = [
        f"{number} {why}" for why, number in (
            ("excluded", rows.excluded), ("censored", rows.censored), ("missing", rows.missing),
            ("unpaired", rows.unpaired),
        ) if number
    ]
    facts.append("left out: " + (", ".join(left) if left else "none"))
    strip += [text(f"– {fact}", wide=wide * 0.32, lines=3) for fact in facts]
    if len(study.comparisons) > 1:
        strip.append(text(f"The figure shows {result.data.candidate}; the others stand on the pages that follow."))
    return [
        text("Differences", SECTION),
        beside([plot], [Spacer(0, 4), *strip], (wide * 0.68, wide * 0.32)),
    ]


def _examined(study: StudyResult, judgement: Judgement) -> list[Flowable]:
    story: list[Flowable] = []
    if judgement.not_examined:
        story.append(bold_lead("Not examined here:", "; ".join(judgement.not_examined) + "."))
    elsewhere = study.data.plan.elsewhere
    if elsewhere:
        listed = "; ".join(f"{e.item}: {e.outcome} ({e.document})" for e in elsewhere)
        story.append(bold_lead("Examined elsewhere:", listed + "."))
    if study.comparisons:
        story.append(text("Bias is relative to the procedure in use; it says nothing of trueness."))
    return [Spacer(0, 3), *story] if story else []


def _decision(context: RunContext, wide: float) -> list[Flowable]:
    """The block that the director fills in; the program proposes, it does not decide."""
    boxes = Table(
        [["☐ accept", "☐ accept with restriction", "☐ reject", "☐ more data"]], colWidths=[wide * 0.235] * 4,
    )
    boxes.setStyle(TableStyle([("FONT", (0, 0), (-1, -1), "Text", 8.5), ("LEFTPADDING", (0, 0), (-1, -1), 0),
                               ("TOPPADDING", (0, 0), (-1, -1), 1), ("BOTTOMPADDING", (0, 0), (-1, -1), 2)]))
    lines = Table(
        [
            ["Restriction or reason", "", "", ""],
            ["Name", text(context.plan.reviewer, SMALL, most=46, wide=wide * 0.45 - 14, lines=1), "Date", ""],
            ["Signature", "", "", ""],
        ],
        colWidths=[wide * 0.17, wide * 0.45, wide * 0.07, wide * 0.25], rowHeights=[15, 15, 17],
    )
    lines.setStyle(
        TableStyle([
            ("FONT", (0, 0), (-1, -1), "Text", 7.5), ("LINEBELOW", (1, 0), (-1, 0), 0.4, SOFT),
            ("LINEBELOW", (1, 1), (1, 1), 0.4, SOFT), ("LINEBELOW", (3, 1), (3, 1), 0.4, SOFT),
            ("LINEBELOW", (1, 2), (-1, 2), 0.4, SOFT), ("LEFTPADDING", (0, 0), (0, -1), 0),
            ("TEXTCOLOR", (1, 1), (1, 1), SOFT), ("BOTTOMPADDING", (0, 0), (-1, -1), 2),
            ("VALIGN", (0, 0), (-1, -1), "BOTTOM"),
        ])
    )
    words = (
        "A decision against the proposal needs a reason. The laboratory's accreditation rules decide; this report is "
        "no medical device and no substitute for qualified review."
    )
    return [
        Spacer(0, 5),
        boxed([text("Decision of the director", HEAD), boxes, lines, text(words, SMALL)], wide, line=INK, fill=white),
    ]
