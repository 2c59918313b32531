"""The overview of a round: what needs the director first, one row an analyte."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from urllib.parse import quote

from reportlab.platypus import Flowable, KeepTogether, Paragraph, Spacer, Table, TableStyle

from labstat.judgement.model import Finding, Judgement
from labstat.report.axes import ACCENT, ALARM, INK, SOFT
from labstat.report.fonts import BOLD, markup, missing, shown, strings
from labstat.report.frame import Bookmark, document, usable_width
from labstat.report.model import OverviewEntry, RunContext
from labstat.report.page_one import nearest_first
from labstat.report.share_bar import share_axis, share_bar
from labstat.report.styles import BODY, HEAD, PADS, SECTION, SMALL, TITLE, bold_lead, boxed, ruled, table, text
from labstat.report.words import allowed, count, finding_number, no_sign, reach

CELL_LINES = 5
MOST_SIZES = 8
"""Lines of a cell and counts of an analyte in its row: a row must fit on a page."""

MANY = (
    "At most 2.5 % a finding would be within on one side even if the true bias sat at the allowance; requiring all "
    "levels within does not add false acceptances."
)


def overview_report(entries: Sequence[OverviewEntry], context: RunContext) -> bytes:
    """The overview as a PDF.

    What could not be computed comes first, then beyond, not covered, unsettled (closest to the edge first), within.
    """
    plan = context.plan
    wide = usable_width(plan.page)
    ordered = sorted(entries, key=_urgency)
    story: list[Flowable] = [
        Bookmark("Overview"), text(plan.title, TITLE, wide=wide, lines=2),
        text(
            f"{shown(plan.laboratory, most=120)}; {plan.issued or 'not dated'}; "
            f"{count(len(entries), 'analyte', 'analytes')}", BODY,
        ),
        Spacer(0, 4),
    ]
    lost = missing("".join(strings([replace(plan, analytes=()), context.inputs, ordered])))
    if lost:
        story.append(text(no_sign(lost)))
    failed = [entry for entry in ordered if entry.outcome != "computed" or entry.reason]
    if failed:
        lines: list[Flowable] = [text("Could not be computed", HEAD)]
        lines += [
            bold_lead(f"{shown(entry.name, most=60)}:", entry.reason or "no reason given", wide=wide - 12)
            for entry in failed
        ]
        story += [boxed(lines, wide, line=ALARM), Spacer(0, 4)]
    story += [text("Analytes, those that need the director first", SECTION), _rows(ordered, wide)]
    story += [Spacer(0, 6), bold_lead("What many findings mean.", MANY)]
    story.append(text(
        "The bar shows the interval as a share of what is allowed: the shaded part is inside the allowance. The "
        "findings and proposals are the program's; the director decides, by the laboratory's accreditation rules."
    ))
    story += [Spacer(0, 4), *_made(context, wide)]
    story.append(KeepTogether(_signature(context, wide)))
    number = plan.report_number
    return document(
        story, page=plan.page, title=f"{plan.title}: overview", subject="Overview of a validation round",
        author=plan.laboratory, left=f"{plan.laboratory}: overview", right=f"{number}, " if number else "",
    )


def _urgency(entry: OverviewEntry) -> tuple[int, float, str]:
    if entry.judgement is None:
        return -1, 0.0, entry.name
    return entry.judgement.urgency, -entry.judgement.closeness, entry.name


def _rows(entries: Sequence[OverviewEntry], wide: float) -> Table:
    bar = 92.0
    widths = (wide * 0.16, wide * 0.15, wide * 0.22, bar + 6, wide * 0.13, wide * 0.34 - bar - 6)
    rows: list[list[Flowable | list[Flowable]]] = [[
        text("Analyte", HEAD), text("n and days", HEAD), text("Level that asks most", HEAD),
        share_axis(width=bar, height=9), text("Findings", HEAD), text("Next", HEAD),
    ]]
    rows += [_row(entry, bar, widths) for entry in entries]
    return ruled(rows, widths, pad=2.5)


def _row(entry: OverviewEntry, bar: float, widths: Sequence[float]) -> list[Flowable | list[Flowable]]:
    name = f'<font name="{BOLD}">{markup(entry.name, most=60)}</font>'
    if entry.file:
        target = quote(entry.file, errors="replace")  # an address is ASCII; "#" in a file's name is no fragment
        name = f'<a href="{target}" color="#{ACCENT.hexval()[2:]}">{name}</a>'
    title = Paragraph(name + (f" ({markup(entry.unit, most=20)})" if entry.unit else ""), SMALL)
    sizes = [f"{what}: {n}" for what, n in entry.n]
    if entry.days is not None:
        sizes.append(count(entry.days, "day", "days"))
    if entry.judgement is None:
        return [title, text("–"), text("not computed"), text(""), text("not computed"),
                text("mend the rows and run again")]
    judgement = entry.judgement
    worst = _worst(judgement)
    level: list[Flowable] = [text("no criterion in the plan")]
    picture: Flowable = text("")
    if worst is not None:
        level = [
            text(words, wide=widths[2] - PADS, lines=CELL_LINES) for words in (
                worst.where, finding_number(worst, entry.decimals, entry.unit), "allowed " + allowed(worst, entry.unit)
            )
        ]
        picture = share_bar(worst, width=bar, height=13)
    counted: list[Flowable] = [text(size, wide=widths[1] - PADS, lines=CELL_LINES) for size in sizes[:MOST_SIZES]]
    if len(sizes) > MOST_SIZES:
        counted.append(text(f"and {len(sizes) - MOST_SIZES} more"))
    return [title, counted or [text("–")], level, picture, _words(judgement), text(judgement.next_action, most=160)]


def _worst(judgement: Judgement) -> Finding | None:
    """The finding that asks most: by its word, then by the share of the allowance that its interval reaches."""
    ordered = nearest_first(judgement.findings)
    if not ordered:
        return None
    first = ordered[0].finding
    return max((f for f in ordered if f.finding == first), key=reach)


def _words(judgement: Judgement) -> list[Flowable]:
    numbers: dict[str, int] = {}
    for finding in judgement.findings:
        word = str(finding.finding)
        if finding.counts != finding.finding:
            word += f", counts as {finding.counts}"
        numbers[word] = numbers.get(word, 0) + 1
    stops = sum(caution.weight == "stop" for caution in judgement.cautions)
    lines: list[Flowable] = [text(f"{number} {word}") for word, number in numbers.items()]
    if stops:
        lines.append(Paragraph(f'<font name="{BOLD}">{count(stops, "stop", "stops")}</font>', SMALL))
    return lines or [text("estimates only")]


def _made(context: RunContext, wide: float) -> list[Flowable]:
    versions = ", ".join(f"{name} {version}" for name, version in context.versions.items())
    return [
        bold_lead("Made from.", f"Seed {context.seed}, {context.resamples} resamples; {versions}."),
        table(["Input", "SHA-256"], [[i.path, i.sha256] for i in context.inputs], [wide * 0.3, wide * 0.7]),
    ]


def _signature(context: RunContext, wide: float) -> list[Flowable]:
    lines = Table(
        [
            ["Name", text(context.plan.reviewer, SMALL, most=46, wide=wide * 0.5 - 14, lines=1), "Date", ""],
            ["Signature", "", "", ""],
        ],
        colWidths=[wide * 0.12, wide * 0.5, wide * 0.08, wide * 0.25], rowHeights=[16, 20],
    )
    lines.setStyle(
        TableStyle([
            ("FONT", (0, 0), (-1, -1), "Text", 7.5), ("LINEBELOW", (1, 0), (1, 0), 0.4, SOFT),
            ("LINEBELOW", (3, 0), (3, 0), 0.4, SOFT), ("LINEBELOW", (1, 1), (-1, 1), 0.4, SOFT),
            ("LEFTPADDING", (0, 0), (0, -1), 0), ("TEXTCOLOR", (1, 0), (1, 0), SOFT),
            ("VALIGN", (0, 0), (-1, -1), "BOTTOM"), ("BOTTOMPADDING", (0, 0), (-1, -1), 2),
        ])
    )
    words = "The reports of all analytes of this round were reviewed; each decision stands in its own report."
    return [Spacer(0, 6), boxed([text("Signature for the batch", HEAD), text(words), lines], wide, line=INK)]
