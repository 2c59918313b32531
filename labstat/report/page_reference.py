"""The reference study: values, limits with intervals and what they attain, the interval in use."""

from __future__ import annotations

from reportlab.platypus import Flowable

from labstat.report.frame import Bookmark
from labstat.report.numbers import percent, plain, span
from labstat.report.reference_plot import MOST, group_words, reference_plot
from labstat.report.styles import SECTION, bold_lead, table, text
from labstat.report.words import INTERVALS, LIMITS, how, with_interval
from labstat.study.results import GroupResult, StudyResult


def reference_pages(study: StudyResult, *, wide: float, level: float) -> list[Flowable]:
    """Everything on the reference limits of one analyte."""
    plan = study.data.plan
    groups = study.groups
    if not groups:
        return []
    story: list[Flowable] = [
        Bookmark("Reference limits", 1), text("Reference limits", SECTION),
    ]
    if study.comparisons:  # otherwise the figure stands on page one
        story.append(reference_plot(groups, plan, width=wide, height=70 + 62 * min(len(groups), MOST)))
    if len(groups) > MOST:
        story.append(text(f"The figure shows the first {MOST} of {len(groups)} groups; the table has all."))
    rows = []
    for group in groups:
        for side, made in (("lower", group.limits.lower), ("upper", group.limits.upper)):
            if made is None:
                continue
            rank = "–"
            if made.has_rank:
                rank = "none" if made.rank_low is None else span(made.rank_low, made.rank_high, plan.decimals)
            rows.append([
                group_words(group), str(group.limits.n), f"{side}, {LIMITS.get(group.limits.method, '')}",
                with_interval(made, plan.decimals), how(made), percent(made.attained, 0), rank,
                percent(made.rank_attained, 0),
            ])
    unit = plan.unit
    head = ["Group", "n", "Limit", f"Estimate and {percent(level, 0)} interval ({unit})", "Kind", "Attains",
            f"Rank interval ({unit})", "Attains"]
    widths = [wide * w for w in (0.15, 0.06, 0.11, 0.24, 0.17, 0.07, 0.13, 0.07)]
    if rows:
        story.append(table(head, rows, widths, right=(1, 5, 7)))
    story.append(text(
        "Attains: coverage of the interval in any continuous population, from the ranks it lies between. Where it is "
        "well below the interval's level and a rank interval exists, the rank interval is the one to quote."
    ))
    for group in groups:
        story += _remarks(group, unit)
    asked = plan.reference
    if asked is not None and asked.about:
        listed = "; ".join(f"{name.replace('_', ' ')}: {value}" for name, value in asked.about.items())
        story.append(bold_lead("Reference individuals.", listed + "."))
    elif asked is not None:
        story.append(bold_lead(
            "Reference individuals.",
            "The plan does not state recruitment, criteria, fasting, posture or specimen type.",
        ))
    return story


def _remarks(group: GroupResult, unit: str) -> list[Flowable]:
    name = group_words(group)
    story: list[Flowable] = [text(f"{name}: {note}.") for note in group.limits.notes]
    for made in (group.limits.lower, group.limits.upper):
        if made is not None and made.reason is not None:
            asked = "" if made.replaced is None else f"asked for {INTERVALS.get(made.replaced, made.replaced)}, but "
            story.append(text(f"{name}: {asked}{made.reason}."))
    if group.limits.failure is not None:
        story.append(text(f"{name}: {group.limits.failure}."))
    count = group.outside_adopted
    if count is not None and group.adopted is not None:
        sides = []
        if count.below is not None and group.adopted.low is not None:
            sides.append(
                f"{count.below} of {count.n} below {plain(group.adopted.low)} "
                f"({percent(count.below_low)} to {percent(count.below_high)})"
            )
        if count.above is not None and group.adopted.high is not None:
            sides.append(
                f"{count.above} of {count.n} above {plain(group.adopted.high)} "
                f"({percent(count.above_low)} to {percent(count.above_high)})"
            )
        story.append(text(f"{name}, interval in use ({unit}): {'; '.join(sides)}; exact 95 % intervals."))
    return story
