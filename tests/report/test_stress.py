"""Reports under strain: text meant to do harm, very many levels, candidates, specimens and failed analytes."""

from __future__ import annotations

import io
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from pypdf import PdfReader
from reportlab.graphics.shapes import Circle, Drawing, Path

from labstat.judgement import judge
from labstat.judgement.model import Finding, FindingWord, Judgement
from labstat.report.analyte import analyte_report
from labstat.report.axes import CIRCLES, Axes, Scale
from labstat.report.frame import Bookmark
from labstat.report.model import OverviewEntry, RunContext
from labstat.report.overview import overview_report
from labstat.report.page_one import nearest_first
from labstat.report.styles import SMALL, table, text
from labstat.report.ticks import tick_labels
from labstat.round.allowance import parse_allowance
from labstat.round.model import (
    AnalyteData,
    AnalytePlan,
    CensoredPair,
    ComparisonData,
    ComparisonPlan,
    Elsewhere,
    InputFile,
    LeftOut,
    Level,
    RoundPlan,
    RowCount,
)
from labstat.study import compute

HARM = "x\x00\u202e\ud800<b>&\"'</para>漢" + "W" * 400
NOTHING = RowCount(0, 0, 0, 0, 0, 0)
PLAN = RoundPlan(
    "Fourth quarter", "Quillfen District Laboratory", "Validation lead", "Laboratory director", 5, 199, 0.95, 0.90,
    "A4", "2026-12-01", "Q4-7", None, (), "ab" * 32, (),
)
CONTEXT = RunContext(PLAN, (InputFile("comparison.csv", "cd" * 32),), {"labstat": "0.1.0"}, 5, 199, ())


def analyte(
    *, name: str = "Urea", unit: str = "mmol/L", ats: tuple[float, ...] = (90.0,), source: str = "Plan",
    candidates: tuple[str, ...] = ("Procedure B",), n: int = 40, lift: float = 0.0,
) -> AnalyteData:
    rng = np.random.default_rng(3)
    truth = rng.uniform(40, 400, n)
    pairs = []
    for index, candidate in enumerate(candidates):
        x, y = truth + rng.normal(0, 2, n), truth * (1.0 + lift * index) + rng.normal(0, 2, n)
        pairs.append(ComparisonData(
            "Procedure A", candidate, tuple(f"S{i:04d}" for i in range(n)), x, y, tuple((v,) for v in x),
            tuple((v,) for v in y), (None,) * n, (None,) * n, (),
        ))
    asked = ComparisonPlan(
        "Procedure A", candidates, ("deming",), "deming", "percentile", 1.0,
        tuple(Level(at, parse_allowance("5 or 8 %"), None, source) for at in ats), "absolute", 20, 40,
    )
    plan = AnalytePlan(name, unit, 0, None, None, asked, None, ())
    rows = {"comparison": RowCount(2 * n, 2 * n, 0, 0, 0, 0), "reference": NOTHING, "precision": NOTHING}
    return AnalyteData(plan, tuple(pairs), None, rows, (), ())


def made(data: AnalyteData, context: RunContext = CONTEXT) -> tuple[bytes, list[str]]:
    study = compute(data, context.plan)
    pdf = analyte_report(study, judge(study, context.plan), context)
    return pdf, pages_of(pdf)


def pages_of(pdf: bytes) -> list[str]:
    return [" ".join(page.extract_text().split()) for page in PdfReader(io.BytesIO(pdf)).pages]


def entry(name: str, **changes: Any) -> OverviewEntry:
    first = OverviewEntry(name, "U/L", None, "not computed", 'comparison.csv:7: result: "abc": not a number', (), None,
                          None, 0)
    return replace(first, **changes)


@pytest.mark.parametrize("field", ["name", "unit", "source", "candidate"])
def test_an_endless_text_in_any_field_still_gives_a_report(field: str) -> None:
    given: Any = {"candidates": (HARM,)} if field == "candidate" else {field: HARM}
    _, pages = made(analyte(**given))
    whole = " ".join(pages)
    assert "\u202e" not in whole
    assert "Decision of the director" in whole


def test_every_text_of_the_laboratory_at_once_still_gives_a_report_and_an_overview() -> None:
    plan = replace(PLAN, title=HARM, laboratory=HARM, prepared_by=HARM, reviewer=HARM, report_number=HARM,
                   deviations=(HARM,))
    context = replace(CONTEXT, plan=plan, inputs=(InputFile(HARM, "ab" * 32),), notes=(HARM,))
    data = analyte(name=HARM, unit=HARM, candidates=(HARM,), source=HARM)
    out = LeftOut("comparison", HARM, 3, HARM, HARM, HARM, HARM, "excluded", HARM * 6)
    censored = CensoredPair(HARM, HARM, HARM, 1.0, 2.0, "below", "inside")
    data = replace(
        data, left_out=(out,), plan=replace(data.plan, elsewhere=(Elsewhere(HARM, HARM, HARM),)),
        comparisons=(replace(data.comparisons[0], censored=(censored,)),),
    )
    _, pages = made(data, context)
    assert "How it was computed" in " ".join(pages)
    study = compute(data, plan)
    listed = entry(HARM, unit=HARM, outcome="computed", reason=None, n=((HARM, 9),) * 40, judgement=judge(study, plan))
    whole = " ".join(pages_of(overview_report([listed, entry("Broken", reason=HARM * 9)], context)))
    assert "Signature for the batch" in whole


def test_a_bookmark_has_no_character_that_cannot_be_written() -> None:
    Bookmark(HARM).title.encode("utf-16")


def test_a_hundred_and_fifty_failed_analytes_are_all_named() -> None:
    pdf = overview_report([entry(f"Analyte {i:03d}") for i in range(150)], CONTEXT)
    whole = " ".join(pages_of(pdf))
    first = whole.index("Could not be computed")
    assert all(f"Analyte {i:03d}: comparison.csv:7" in whole[first:] for i in range(150))


def test_with_six_candidates_the_decision_stays_on_page_one_and_each_meaning_for_patients_is_told_once() -> None:
    names = tuple(f"Procedure {letter} of the second site" for letter in "BCDEFG")
    _, pages = made(analyte(candidates=names, ats=(90.0, 250.0, 300.0), lift=0.02, n=30))
    assert "Decision of the director" in pages[0]
    assert "4 more candidates on the pages that follow" in pages[0]
    for name in names:
        assert " ".join(pages).count(f"{name}: of 30 specimens, results that change side") == 1


def test_sixty_levels_keep_the_decision_on_page_one_and_their_table_begins_on_page_two() -> None:
    _, pages = made(analyte(ats=tuple(float(at) for at in range(45, 405, 6))))
    assert "Decision of the director" in pages[0]
    assert "Bias at the decision levels" in pages[1]
    assert "within" in pages[1].split("Bias at the decision levels")[1]


def test_a_thousand_specimens_make_a_small_file_and_all_its_text_has_embedded_fonts() -> None:
    pdf, _ = made(analyte(n=1000))
    assert len(pdf) < 200_000  # the promise is 400 KB; a circle a specimen made 219 KB with a reference study
    drawn: dict[str, Any] = {}

    def see(words: str, _cm: Any, _tm: Any, font: Any, _size: Any) -> None:
        if words.strip() and font is not None:
            drawn[str(font["/BaseFont"])] = font

    for page in PdfReader(io.BytesIO(pdf)).pages:
        page.extract_text(visitor_text=see)
    assert len(drawn) == 2  # regular and bold
    for name, font in drawn.items():
        assert "DejaVu" in name
        assert "/FontFile2" in font["/FontDescriptor"].get_object()


@pytest.mark.parametrize("field", ["name", "unit", "source", "candidate"])
def test_a_sign_without_a_glyph_is_said_wherever_it_stands(field: str) -> None:
    given: Any = {"candidates": ("検",)} if field == "candidate" else {field: "検"}
    assert "no sign for 1 character of the names; it shows as" in " ".join(made(analyte(**given))[1])


def test_a_sign_without_a_glyph_is_said_in_the_overview() -> None:
    assert "no sign for 2 characters" in " ".join(pages_of(overview_report([entry("検査")], CONTEXT)))
    assert "no sign for" not in " ".join(pages_of(overview_report([entry("Urea")], CONTEXT)))


def finding(high: float, word: FindingWord, at: float) -> Finding:
    return Finding("comparison", "bias", f"{at}", "Procedure B", at, high - 1.0, high - 2.0, high, "9", -9.0, 9.0, None,
                   word, word, None, None)


def test_of_findings_of_one_kind_the_one_nearest_the_edge_comes_first() -> None:
    given = (finding(3.0, "within", 1.0), finding(8.0, "within", 2.0), finding(9.5, "unsettled", 3.0),
             finding(12.0, "unsettled", 4.0))
    assert [one.at for one in nearest_first(given)] == [4.0, 3.0, 2.0, 1.0]


def test_a_bound_printed_like_the_allowance_is_told_apart_in_the_table_of_biases() -> None:
    data = analyte(n=40)
    study = compute(data, PLAN)
    judged: Judgement = judge(study, PLAN)
    level = study.comparisons[0].levels[0]
    edge = judged.findings[0].allowed_high
    assert edge is not None
    beyond_by_little = replace(level.leading, bias=replace(level.leading.bias, high=edge + 0.004))
    result = replace(study.comparisons[0], levels=(replace(level, leading=beyond_by_little),))
    found = replace(judged.findings[0], high=edge + 0.004, finding="unsettled")
    pdf = analyte_report(
        replace(study, comparisons=(result,)), replace(judged, findings=(found,)), CONTEXT
    )
    table_of_biases = pages_of(pdf)[1].split("Bias at the decision levels")[1].split("What the biases rest on")[0]
    assert f"+{edge + 0.004:.3f}" in table_of_biases


def test_marks_that_begin_at_zero_or_below_have_linear_labels() -> None:
    assert tick_labels([0.0, 5.0, 10.0]) == ["0", "5", "10"]
    assert tick_labels([0.0, 10.0, 20.0]) == ["0", "10", "20"]
    assert tick_labels([-5.0, 0.0, 5.0, 10.0]) == ["−5", "0", "5", "10"]


def test_a_cell_is_never_higher_than_a_page_and_ordinary_text_is_not_cut() -> None:
    words = "haemolysed, seen by the technician on the second day " * 4
    assert text(words, wide=150.0).getPlainText() == text(words).getPlainText()
    grid = table(["Reason"], [["W" * 3000]], [90.0])
    assert grid.wrap(90.0, 10_000.0)[1] < 700.0
    assert text("Wide " * 2000, SMALL, wide=90.0).getPlainText().endswith("…")


def test_very_many_points_are_one_shape_and_the_flagged_keep_their_own() -> None:
    few, many = Drawing(100, 100), Drawing(100, 100)
    for drawing, n in ((few, CIRCLES), (many, CIRCLES + 1)):
        axes = Axes(drawing, left=0, bottom=0, right=100, top=100, x=Scale(0.0, 1.0), y=Scale(0.0, 1.0))
        axes.dots([(i / n, i / n, i == 5) for i in range(n)])
    assert sum(isinstance(shape, Circle) for shape in few.contents) == CIRCLES - 1
    paths = [shape for shape in many.contents if isinstance(shape, Path)]
    assert len(paths) == 1
    assert len(paths[0].points) == 8 * CIRCLES  # four corners of each point that is not flagged
    assert len(many.contents) == 3  # the path, the flagged square and its stroke
