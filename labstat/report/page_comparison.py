"""Following pages: each candidate's lines, biases, differences and what they rest on."""

from __future__ import annotations

from collections.abc import Sequence

from reportlab.platypus import Flowable, KeepTogether, Spacer

from labstat.judgement.model import Finding
from labstat.judgement.wording import finding_decimals, some
from labstat.report.bias_plot import bias_plot
from labstat.report.differences import difference_plot
from labstat.report.frame import Bookmark
from labstat.report.numbers import number, p_value, percent, plain, signed, significant, span
from labstat.report.scatter import scatter
from labstat.report.styles import SECTION, SMALL, beside, bold_lead, heading, table, text
from labstat.report.words import INTERVALS, METHODS, allowed, bias_decimals, how, with_interval
from labstat.resample.estimate import Estimate
from labstat.round.model import AnalytePlan
from labstat.study.results import BiasAtLevel, ComparisonResult

MOST_LISTED = 12


def comparison_pages(
    result: ComparisonResult, analyte: AnalytePlan, findings: Sequence[Finding], *, wide: float, with_differences: bool
) -> list[Flowable]:
    """Figures and tables of one candidate; ``with_differences`` where page one does not show its difference plot."""
    data = result.data
    story: list[Flowable] = [
        Bookmark(f"{data.candidate} against {data.comparative}", 1),
        text(f"{data.candidate} against {data.comparative}", SECTION),
    ]
    left: list[Flowable] = [scatter(result, analyte, width=wide * 0.5, height=wide * 0.5)]
    right: list[Flowable] = [bias_plot(result, analyte, width=wide * 0.47, height=wide * 0.5)] if result.levels else []
    if not right and not with_differences:
        right = [text("The plan names no decision level: no bias is read from the line.", SMALL)]
    if right:
        story.append(beside(left, right, (wide * 0.52, wide * 0.48)))
    else:
        story += left
    if with_differences:
        story.append(difference_plot(result, analyte, width=wide, height=150))
    story += _lines(result, wide)
    if result.levels:
        story += _biases(result, analyte, findings, wide)
    story += _differences(result, analyte, wide)
    story += _checks(result, analyte, wide)
    return story


def _lines(result: ComparisonResult, wide: float) -> list[Flowable]:
    rows, remarks = [], []
    for fit in result.fits:
        lead = " (reported)" if fit.method == result.reported.method else ""
        for name, made in (("slope", fit.slope), ("intercept", fit.intercept)):
            rows.append([
                METHODS[fit.method] + lead if name == "slope" else "", name, significant(made.estimate, 4),
                span_of(made), INTERVALS.get(made.interval, made.interval),
                span_of_rank(made), significant(made.monte_carlo_error, 2), percent(made.attained, 0),
                str(made.failed_resamples),
            ])
            if made.replaced:
                asked = INTERVALS.get(made.replaced, made.replaced)
                remarks.append(f"{METHODS[fit.method]}, {name}: asked for {asked}, but {made.reason}.")
    head = ["Line", "", "Estimate", f"{percent(result.reported.level, 0)} interval", "Kind", "Rank interval (1983)",
            "MC error", "Plain attains", "Failed"]
    widths = [wide * w for w in (0.18, 0.08, 0.09, 0.16, 0.14, 0.14, 0.07, 0.07, 0.07)]
    story: list[Flowable] = [text("Lines", SECTION), table(head, rows, widths, right=(2, 6, 7, 8))]
    story += [text(remark) for remark in remarks]
    reported = result.reported
    notes = [
        f"{reported.slope.resamples} resamples of {result.unit_of_resampling}"
        if isinstance(reported.slope.resamples, int) else f"{result.unit_of_resampling} left out one by one",
        "MC error: standard error of the worse bound from drawing a finite number of resamples",
        "plain attains: estimated coverage of the uncalibrated percentile interval on these data",
    ]
    if reported.variance_ratio is not None:
        notes.append(f"variance ratio {plain(reported.variance_ratio)} (comparative to candidate)")
    if reported.slopes_used is not None:
        notes.append(f"{reported.slopes_used} pair slopes, {reported.pairs_below_minus_one} of them below −1")
    story.append(text("; ".join(notes) + "."))
    return story


def span_of(made: Estimate) -> str:
    """An interval to four significant digits."""
    if made.low is None or made.high is None:
        return "no interval"
    return f"{significant(made.low, 4)} to {significant(made.high, 4)}"


def span_of_rank(made: Estimate) -> str:
    """The classical rank interval beside it."""
    if not made.has_rank:
        return ""
    if made.rank_low is None or made.rank_high is None:
        return "none"
    return f"{significant(made.rank_low, 4)} to {significant(made.rank_high, 4)}"


def _biases(
    result: ComparisonResult, analyte: AnalytePlan, findings: Sequence[Finding], wide: float
) -> list[Flowable]:
    digits = bias_decimals(analyte.decimals)
    by_level = {finding.at: finding for finding in findings if finding.candidate == result.data.candidate}
    judged, rests, remarks = [], [], []
    for item in result.levels:
        finding = by_level.get(item.level.at)
        level = plain(item.level.at)
        telling = digits if finding is None else finding_decimals(finding, digits)
        judged.append([
            level, with_interval(item.leading.bias, telling, sign=True),
            with_interval(item.leading.percent, 1, sign=True), item.leading_unit,
            "–" if finding is None else allowed(finding, analyte.unit), item.level.source or "–", _word(finding),
            "–" if finding is None or finding.settles_at_n is None else str(finding.settles_at_n),
        ])
        changes = item.changes
        rests.append([
            level, with_interval(item.bias.bias, digits, sign=True),
            with_interval(item.by_day.bias, digits, sign=True) if item.by_day is not None else "–",
            str(item.near), _without(item, digits),
            with_interval(item.without_outliers.bias, digits, sign=True) if item.without_outliers is not None else "–",
            f"{changes.up} up, {changes.down} down",
        ])
        remarks += _remarks(item)
    unit = analyte.unit
    story: list[Flowable] = [
        *heading("Bias at the decision levels", rows=len(judged)),
        table(
            [f"Level ({unit})", f"Leading bias ({unit})", "Leading bias (%)", "Units", "Allowed", "Source", "Finding",
             "n to settle"],
            judged, [wide * w for w in (0.08, 0.16, 0.14, 0.09, 0.13, 0.12, 0.22, 0.06)], right=(7,),
        ),
        *heading("What the biases rest on", rows=len(rests)),
        table(
            [f"Level ({unit})", f"Bias by {result.unit_of_resampling} ({unit})", f"Bias by days ({unit})", "n near",
             f"Furthest without one ({unit})", f"Without flagged ({unit})", "Change side"],
            rests, [wide * w for w in (0.08, 0.18, 0.17, 0.06, 0.2, 0.18, 0.13)], right=(3,),
        ),
    ]
    story += [text(remark) for remark in remarks]
    errors = [item.bias.bias.monte_carlo_error for item in result.levels]
    worst = max((e for e in errors if e is not None), default=None)
    first = result.levels[0].bias.bias
    error = "" if worst is None else f"Largest Monte-Carlo error of a bound {significant(worst, 2)} {unit}. "
    story.append(text(
        f"Bias = intercept + (slope − 1) × level, from the {METHODS[result.reported.method]} line; "
        f"{how(first)}. {error}n near: specimens within 25 % of the level. Units: what was resampled; days lead where "
        "their interval is the wider one (a t interval of the jackknife over days). Furthest without one: the interval "
        "without the single specimen that moves it most. n to settle: a rough guide for a chance of about 80 %."
    ))
    return story


def _remarks(item: BiasAtLevel) -> list[str]:
    """What must be said of one level's bias beside its numbers."""
    remarks = []
    made, level = item.leading.bias, plain(item.level.at)
    if made.replaced:
        asked, used = (INTERVALS.get(kind, kind) for kind in (made.replaced, made.interval))
        remarks.append(f"At {level}: asked for {asked}, but {made.reason}; {used} was used.")
    if item.censored_near:
        near = some(list(item.censored_near), 6)
        remarks.append(f"At {level}: censored results within a factor of two, specimens {near}.")
    return remarks


def _word(finding: Finding | None) -> str:
    """A finding with what it counts as and on what it rests."""
    if finding is None:
        return "no criterion"
    word = str(finding.finding)
    if finding.counts != finding.finding:
        word += f", counts as {finding.counts}"
    return f"{word}: {finding.rests_on}" if finding.rests_on else word


def _without(item: BiasAtLevel, digits: int) -> str:
    """The single specimen whose absence moves the interval furthest."""
    if not item.without_specimen:
        return "–"
    first = item.without_specimen[0]
    return f"{first.unit}: {signed(first.low, digits)} to {signed(first.high, digits)}"


def _differences(result: ComparisonResult, analyte: AnalytePlan, wide: float) -> list[Flowable]:
    made = result.difference
    if made is None:
        return [text("Differences could not be computed; the cautions say why.", SMALL)]
    percent_scale = made.scale == "percent"
    digits = 1 if percent_scale else bias_decimals(analyte.decimals)
    unit = "%" if percent_scale else analyte.unit
    rows = [
        [name, with_interval(estimate, digits, sign=True), how(estimate), percent(estimate.attained, 0),
         span(normal.low, normal.high, digits)]
        for name, estimate, normal in (
            ("mean difference", made.mean, made.normal[0]),
            ("lower limit of agreement", made.lower, made.normal[1]),
            ("upper limit of agreement", made.upper, made.normal[2]),
        )
    ]
    head = ["Candidate minus comparative", f"Estimate and interval ({unit})", "Kind", "Plain attains",
            f"t interval ({unit})"]
    widths = [wide * w for w in (0.24, 0.27, 0.24, 0.09, 0.16)]
    several = max(result.replicates) > 1
    note = f"SD of the differences {number(made.sd, digits)} {unit}, n = {made.n} (Bland & Altman 1986, 1999)."
    if several:
        note += " Of means of replicates: single results, which patients get, differ more."
    return [text("Differences", SECTION), table(head, rows, widths, right=(3,)), text(note)]


def _checks(result: ComparisonResult, analyte: AnalytePlan, wide: float) -> list[Flowable]:
    story: list[Flowable] = [Spacer(0, 3)]
    if result.linearity is not None:
        story.append(bold_lead(
            "Linearity.",
            f"Cusum test: {p_value(result.linearity.p_value)} (statistic {number(result.linearity.statistic, 2)}; "
            "Passing & Bablok 1983). The test is approximate and weak: a large p does not show linearity.",
        ))
    if result.correlation is not None:
        story.append(bold_lead("Range.", f"Correlation r = {number(result.correlation, 4)}; it tells the range of the "
                                         "specimens, not the agreement."))
    if result.outliers:
        head = ["Flagged specimen", f"Comparative ({analyte.unit})", f"Candidate ({analyte.unit})", "Statistic",
                "Critical"]
        rows = [
            [o.specimen, number(o.x, analyte.decimals), number(o.y, analyte.decimals), number(o.statistic, 2),
             number(o.critical, 2)]
            for o in result.outliers[:MOST_LISTED]
        ]
        story.append(KeepTogether([
            bold_lead("Outlying differences.", "Generalized extreme studentized deviates (Rosner 1983): flagged, never "
                                               "removed."),
            table(head, rows, [wide * w for w in (0.24, 0.2, 0.2, 0.12, 0.12)], right=(1, 2, 3, 4)),
        ]))
        if len(result.outliers) > MOST_LISTED:
            story.append(text(f"and {len(result.outliers) - MOST_LISTED} more: all are in results.json"))
    if result.data.censored:
        head = ["Censored specimen", f"{result.data.comparative} ({analyte.unit})",
                f"{result.data.candidate} ({analyte.unit})"]
        pairs = result.data.censored
        rows = [[p.specimen, p.comparative, p.candidate] for p in pairs[:MOST_LISTED]]
        story += [
            Spacer(0, 2), table(head, rows, [wide * w for w in (0.24, 0.25, 0.25)], right=(1, 2)),
        ]
        if len(pairs) > MOST_LISTED:
            story.append(text(f"and {len(pairs) - MOST_LISTED} more, listed with the rows left out"))
    return story
