"""The figures: inside their frame, the same every time, inputs untouched, told apart without colour."""

from __future__ import annotations

import dataclasses
import math
from collections.abc import Callable, Iterator

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from reportlab.graphics.shapes import Drawing, Group, Line, Polygon, Rect, Shape, String

from labstat.judgement.model import Finding, FindingWord
from labstat.report.axes import clip
from labstat.report.bias_plot import bias_plot
from labstat.report.differences import difference_plot
from labstat.report.fonts import width as text_width
from labstat.report.reference_plot import reference_plot
from labstat.report.scatter import scatter
from labstat.report.share_bar import share_axis, share_bar, share_of
from labstat.round.allowance import parse_allowance
from labstat.round.model import (
    AnalyteData,
    AnalytePlan,
    ComparisonData,
    ComparisonPlan,
    Level,
    ReferenceData,
    ReferencePlan,
    RoundPlan,
)
from labstat.study.comparison import compare
from labstat.study.reference import reference_groups
from labstat.study.results import ComparisonResult

WIDE, HIGH = 265.0, 240.0
PLAN = RoundPlan("t", "l", "p", "r", 1, 199, 0.95, 0.90, "A4", None, None, None, (), "", ())
Figure = Callable[..., Drawing]
FIGURES = [scatter, difference_plot, bias_plot]


def analyte(*levels: float, scale: str = "absolute") -> AnalytePlan:
    allowed = parse_allowance("2 or 10 %")
    plan = ComparisonPlan(
        "Procedure A", ("Procedure B",), ("deming",), "deming", "percentile", 1.0,
        tuple(Level(at, allowed, None, "plan") for at in levels),
        "percent" if scale == "percent" else "absolute", 20, 40,
    )
    return AnalytePlan("Analyte", "µmol/L", 1, None, None, plan, None, ())


def result_of(x: np.ndarray[tuple[int], np.dtype[np.float64]], plan: AnalytePlan) -> ComparisonResult:
    wobble = np.resize([0.4, -0.3, 0.1, -0.2, 0.3], x.size)
    y = x * (1.02 + 0.02 * wobble) + wobble
    y[3] += 25.0
    n = x.size
    data = ComparisonData(
        "Procedure A", "Procedure B", tuple(f"S{i:03d}" for i in range(n)), x, y,
        tuple((float(v),) for v in x), tuple((float(v),) for v in y), (None,) * n, (None,) * n, (),
    )
    made, _ = compare(data, plan, PLAN)
    assert made is not None
    return made


@pytest.fixture(scope="module")
def close() -> tuple[ComparisonResult, AnalytePlan]:
    plan = analyte(40.0, 41.0, 42.0, 90.0)
    return result_of(np.linspace(20.0, 110.0, 45), plan), plan


@pytest.fixture(scope="module")
def decades() -> tuple[ComparisonResult, AnalytePlan]:
    plan = analyte(5.0, 100.0, scale="percent")
    return result_of(np.geomspace(2.0, 900.0, 45), plan), plan


def shapes(node: Drawing | Group) -> Iterator[Shape]:
    for part in node.contents:
        if isinstance(part, Group):
            yield from shapes(part)
        else:
            yield part


def words(drawing: Drawing) -> list[str]:
    return [part.text for part in shapes(drawing) if isinstance(part, String)]


def box_of(part: String) -> tuple[float, float, float, float]:
    wide = text_width(part.text, part.fontSize, font=part.fontName)
    left = part.x - {"start": 0.0, "middle": wide / 2, "end": wide}[part.textAnchor]
    return left, part.y, left + wide, part.y + 0.7 * part.fontSize


def check_inside(drawing: Drawing) -> None:
    for part in shapes(drawing):
        if isinstance(part, String) and not part.text:
            continue
        if isinstance(part, String):
            spots = list(box_of(part))
        elif isinstance(part, Line):
            spots = [part.x1, part.y1, part.x2, part.y2]
        elif isinstance(part, Rect):
            spots = [part.x, part.y, part.x + part.width, part.y + part.height]
        else:
            spots = list(getattr(part, "points", []))
        assert all(math.isfinite(spot) for spot in spots)
        assert all(-1 <= x <= drawing.width + 1 for x in spots[0::2]), part.getProperties()
        assert all(-1 <= y <= drawing.height + 1 for y in spots[1::2]), part.getProperties()


def check_apart(drawing: Drawing) -> None:
    boxes = [(part.text, box_of(part)) for part in shapes(drawing) if isinstance(part, String)]
    for i, (one, a) in enumerate(boxes):
        for other, b in boxes[i + 1 :]:
            over = min(a[2], b[2]) - max(a[0], b[0]) > 0.1 and min(a[3], b[3]) - max(a[1], b[1]) > 0.1
            assert not over, f"{one!r} lies on {other!r}"


@pytest.mark.parametrize("figure", FIGURES)
@pytest.mark.parametrize("which", ["close", "decades"])
def test_a_comparison_figure_stays_inside_with_its_words_apart_and_is_made_the_same_twice(
    figure: Figure, which: str, request: pytest.FixtureRequest
) -> None:
    result, plan = request.getfixturevalue(which)
    before = result.data.x.tobytes() + result.data.y.tobytes()
    drawing = figure(result, plan, width=WIDE, height=HIGH)
    assert (drawing.width, drawing.height) == (WIDE, HIGH)
    check_inside(drawing)
    check_apart(drawing)
    assert any("µmol/L" in text for text in words(drawing))
    again = figure(result, plan, width=WIDE, height=HIGH)
    assert [p.getProperties() for p in shapes(drawing)] == [p.getProperties() for p in shapes(again)]
    assert before == result.data.x.tobytes() + result.data.y.tobytes()


def test_flagged_outliers_are_named_in_the_figures(close: tuple[ComparisonResult, AnalytePlan]) -> None:
    result, plan = close
    assert [flagged.specimen for flagged in result.outliers] == ["S003"]
    for figure in (scatter, difference_plot):
        assert "S003" in words(figure(result, plan, width=WIDE, height=HIGH))


def test_reference_values_by_the_hundred_thousand_make_a_small_figure() -> None:
    values = np.sort(np.exp(np.linspace(3.0, 4.5, 400)))
    asked = ReferencePlan((0.025, 0.975), (), "rank", "rank", (), {}, 20, 120)
    plan = AnalytePlan("Analyte", "µmol/L", 1, None, None, None, asked, ())
    data = ReferenceData(tuple(f"R{i:04d}" for i in range(400)), values, {}, ())
    groups, _ = reference_groups(AnalyteData(plan, (), data, {}, (), ()), PLAN)
    many = [dataclasses.replace(group, values=np.repeat(group.values, 250)) for group in groups]
    drawing = reference_plot(many, plan, width=WIDE, height=HIGH)
    assert len(list(shapes(drawing))) < 300
    check_inside(drawing)
    check_apart(drawing)


def finding(low: float, estimate: float, high: float, word: FindingWord) -> Finding:
    return Finding(
        "comparison", "bias", "90", "Procedure B", 90.0, estimate, low, high, "-4 to 8", -4.0, 8.0, None, word, word,
        None, None,
    )


def test_each_side_of_an_uneven_allowance_is_its_own_hundred_percent() -> None:
    one = finding(-4.0, 0.0, 8.0, "within")
    assert [share_of(value, one) for value in (-4.0, 4.0, 8.0)] == [-1.0, 0.5, 1.0]


def test_the_findings_can_be_told_apart_without_colour() -> None:
    drawn = {}
    every: tuple[FindingWord, ...] = ("within", "beyond", "unsettled")
    for word in every:
        bar = share_bar(finding(-1.0, 1.0, 3.0, word), width=120, height=12)
        fills = [getattr(part, "fillColor", None) for part in shapes(bar)]
        drawn[word] = [fill is not None and fill.rgb() == (1, 1, 1) for fill in fills]
    assert drawn["within"] != drawn["unsettled"] != drawn["beyond"] != drawn["within"]


@pytest.mark.parametrize(("low", "high", "arrows"), [(-1.0, 3.0, 0), (1.0, 40.0, 1), (-40.0, 40.0, 2)])
def test_an_interval_beyond_the_axis_ends_in_an_arrow(low: float, high: float, arrows: int) -> None:
    bar = share_bar(finding(low, (low + high) / 2, high, "unsettled"), width=120, height=12)
    check_inside(bar)
    assert sum(isinstance(part, Polygon) and len(part.points) == 6 for part in shapes(bar)) == arrows


def test_the_head_of_the_bars_keeps_its_words_apart() -> None:
    check_apart(share_axis(width=120, height=10))


SPOT = st.floats(-1e3, 1e3)


@given(SPOT, SPOT, SPOT, SPOT)
def test_a_clipped_segment_lies_in_the_box(x1: float, y1: float, x2: float, y2: float) -> None:
    part = clip(x1, y1, x2, y2, box=(0.0, 0.0, 100.0, 50.0))
    if part is None:
        assert not (0 <= x1 <= 100 and 0 <= y1 <= 50)
    else:
        assert all(-1e-6 <= x <= 100 + 1e-6 for x in part[0::2])
        assert all(-1e-6 <= y <= 50 + 1e-6 for y in part[1::2])
