"""Whole reports, read back as text: what page one says, what never leaves it, and that nothing does harm."""

from __future__ import annotations

import io
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from pypdf import PdfReader

from labstat.judgement import judge
from labstat.report.analyte import analyte_report
from labstat.report.model import OverviewEntry, RunContext
from labstat.report.overview import MANY, overview_report
from labstat.round.allowance import parse_allowance
from labstat.round.model import (
    AnalyteData,
    AnalytePlan,
    ComparisonData,
    ComparisonPlan,
    InputFile,
    LeftOut,
    Level,
    ReferenceData,
    ReferencePlan,
    RoundPlan,
    RowCount,
)
from labstat.study import compute

NOTHING = RowCount(0, 0, 0, 0, 0, 0)
PLAN = RoundPlan(
    "Fourth quarter", "Quillfen District Laboratory", "Validation lead", "Laboratory director", 5, 199, 0.95, 0.90,
    "A4", "2026-12-01", "Q4-7", None, ("one deviation",), "ab" * 32, (),
)
CONTEXT = RunContext(PLAN, (InputFile("comparison.csv", "cd" * 32),), {"labstat": "0.1.0"}, 5, 199, ())


def _levels(ats: list[float], allowable: str | None = "5 or 8 %") -> tuple[Level, ...]:
    allowance = None if allowable is None else parse_allowance(allowable)
    return tuple(Level(at, allowance, None, "Quality plan, table 3") for at in ats)


def _analyte(levels: tuple[Level, ...], *, name: str = "Creatinine", n: int = 50, factor: float = 1.0) -> AnalyteData:
    rng = np.random.default_rng(3)
    truth = rng.uniform(40, 400, n)
    x, y = truth + rng.normal(0, 2, n), factor * truth + rng.normal(0, 2, n)
    data = ComparisonData(
        "Procedure A", "Procedure B", tuple(f"S{i:03d}" for i in range(n)), x, y, tuple((v,) for v in x),
        tuple((v,) for v in y), (None,) * n, tuple(f"day {i % 6}" for i in range(n)), (),
    )
    plan = AnalytePlan(
        name, "µmol/L", 0, None, "plasma",
        ComparisonPlan(
            "Procedure A", ("Procedure B",), ("deming",), "deming", "percentile", 1.0, levels, "absolute", 20, 40
        ),
        None, (),
    )
    rows = {"comparison": RowCount(2 * n, 2 * n, 0, 0, 0, 0), "reference": NOTHING, "precision": NOTHING}
    return AnalyteData(plan, (data,), None, rows, (), ())


def _report(data: AnalyteData, plan: RoundPlan = PLAN) -> tuple[bytes, list[str], Any]:
    study = compute(data, plan)
    judgement = judge(study, plan)
    pdf = analyte_report(study, judgement, replace(CONTEXT, plan=plan))
    return pdf, [" ".join(page.extract_text().split()) for page in PdfReader(io.BytesIO(pdf)).pages], judgement


def test_page_one_has_proposal_findings_units_and_the_decision() -> None:
    _, pages, judgement = _report(_analyte(_levels([90.0, 250.0])))
    first = pages[0]
    assert " ".join(judgement.proposal.split()) in first
    for words in ("At 90 µmol/L, Procedure B", "within", "±7.2 µmol/L (5 or 8 %)", "Quality plan, table 3",
                  "For patients", "Not examined here", "Decision of the director", "Signature", "page 1 of",
                  "A decision against the proposal needs a reason", "accreditation rules decide", "no medical device"):
        assert words in first, words
    assert "Bias is relative to the procedure in use" in first
    assert 2 <= len(pages) <= 4


def test_beyond_stands_in_a_box_on_page_one() -> None:
    _, pages, _ = _report(_analyte(_levels([90.0, 250.0]), factor=1.2))
    assert "Beyond: at 250 µmol/L, Procedure B the whole interval lies outside the allowance" in pages[0]


@pytest.mark.parametrize("page", ["A4", "Letter"])
def test_with_many_levels_the_decision_stays_on_page_one_and_no_finding_is_lost(page: Any) -> None:
    levels = [float(at) for at in range(60, 360, 25)]
    _, pages, judgement = _report(_analyte(_levels(levels)), replace(PLAN, page=page))
    assert "Decision of the director" in pages[0]
    assert "in the tables of the following pages" in pages[0]
    assert len(judgement.findings) == 12
    table = pages[1].split("Bias at the decision levels")[1].split("What the biases rest on")[0]
    assert table.count("within") + table.count("unsettled") >= 12


def test_a_reference_study_alone_shows_its_values_on_page_one() -> None:
    values = np.random.default_rng(1).normal(80, 9, 130)
    plan = AnalytePlan(
        "Urate", "µmol/L", 0, None, None, None,
        ReferencePlan((0.025, 0.975), (), "rank", "percentile", (), {"recruitment": "donors"}, 20, 120), (),
    )
    data = AnalyteData(
        plan, (), ReferenceData(tuple(map(str, range(130))), values, {}, ()),
        {"comparison": NOTHING, "reference": RowCount(130, 130, 0, 0, 0, 0), "precision": NOTHING}, (), (),
    )
    _, pages, _ = _report(data)
    assert "Reference values" in pages[0]
    assert "all, n = 130" in pages[0]
    assert "recruitment: donors" in pages[1]


def test_hostile_names_are_drawn_as_they_are_and_long_ones_are_cut_or_wrapped() -> None:
    name = '<img src="/etc/passwd"/></para><b>x\u202e & Co'
    plan = replace(PLAN, laboratory="L" * 300, reviewer="R <b>" * 60, report_number="N" * 200)
    _, pages, _ = _report(_analyte(_levels([90.0]), name=name), plan)
    assert '<img src="/etc/passwd"/></para><b>x' in pages[0]
    assert "\u202e" not in "".join(pages)


def test_a_sign_without_a_glyph_is_said() -> None:
    _, pages, _ = _report(_analyte(_levels([90.0]), name="検査"))
    assert any("no sign for 2 characters" in page for page in pages)


def test_three_hundred_rows_left_out_are_listed_or_counted() -> None:
    data = _analyte(_levels([90.0]))
    out = tuple(
        LeftOut("comparison", "comparison.csv", i, f"X{i}", "Procedure A", None, "7", "excluded", "clot")
        for i in range(300)
    )
    _, pages, _ = _report(replace(data, left_out=out))
    text = " ".join(pages)
    assert "comparison.csv:119" in text
    assert "and 180 more" in text


def test_two_reports_of_one_study_have_the_same_bytes_and_no_clock() -> None:
    data = _analyte(_levels([90.0, 250.0]))
    first, _, _ = _report(data)
    second, _, _ = _report(data)
    assert first == second
    assert b"D:2000" in first  # the library's fixed date, never today's


def test_the_overview_puts_what_failed_first_and_says_what_many_findings_mean() -> None:
    entries = []
    for name, factor in (("Good", 1.0), ("Bad", 1.3)):
        study = compute(_analyte(_levels([90.0]), name=name, factor=factor), PLAN)
        entries.append(
            OverviewEntry(name, "µmol/L", f"reports/{name}.pdf", "computed", None, (("comparison", 50),), 6,
                          judge(study, PLAN), 0)
        )
    entries.append(OverviewEntry("Broken", "U/L", None, "not computed", 'comparison.csv:7: "abc"', (), None, None, 0))
    reader = PdfReader(io.BytesIO(overview_report(entries, CONTEXT)))
    text = " ".join(" ".join(page.extract_text().split()) for page in reader.pages)
    assert text.index("Could not be computed") < text.index("Analytes, those that need")
    assert 'comparison.csv:7: "abc"' in text
    assert text.index("Bad (µmol/L)") < text.index("Good (µmol/L)")
    assert " ".join(MANY.split()) in text
    links = [a.get_object()["/A"]["/URI"] for page in reader.pages for a in page.get("/Annots", [])]
    assert sorted(links) == ["reports/Bad.pdf", "reports/Good.pdf"]


def test_an_interval_inside_the_allowance_that_is_unsettled_says_why() -> None:
    data = _analyte(_levels([398.0]))
    keep = np.abs(data.comparisons[0].x - 398.0) > 0.25 * 398.0
    keep[np.argmax(data.comparisons[0].x)] = True
    c = data.comparisons[0]
    few = replace(
        c, specimens=tuple(s for s, k in zip(c.specimens, keep, strict=True) if k), x=c.x[keep], y=c.y[keep],
        x_replicates=tuple((float(v),) for v in c.x[keep]), y_replicates=tuple((float(v),) for v in c.y[keep]),
        subjects=(None,) * int(keep.sum()), days=(None,) * int(keep.sum()),
    )
    level = float(np.max(few.x)) - 1.0
    assert data.plan.comparison is not None
    asked = replace(data.plan.comparison, levels=_levels([level]))
    _, pages, judgement = _report(replace(data, comparisons=(few,), plan=replace(data.plan, comparison=asked)))
    assert judgement.findings[0].finding == "unsettled"
    assert "too few specimens lie near the level" in pages[0]


def test_a_link_to_a_report_is_a_well_formed_address() -> None:
    """Blanks, a number sign and letters beyond ASCII are percent-encoded (RFC 3986)."""
    study = compute(_analyte(_levels([90.0])), PLAN)
    entry = OverviewEntry(
        "Iron", "µmol/L", "reports/Iron in #1 é.pdf", "computed", None, (("comparison", 50),), 6, judge(study, PLAN), 0
    )
    reader = PdfReader(io.BytesIO(overview_report([entry], CONTEXT)))
    links = [a.get_object()["/A"]["/URI"] for page in reader.pages for a in page.get("/Annots", [])]
    assert links == ["reports/Iron%20in%20%231%20%C3%A9.pdf"]
