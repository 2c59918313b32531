"""The bias at each level against what is allowed there."""

from __future__ import annotations

from reportlab.graphics.shapes import Circle, Drawing
from reportlab.lib.colors import white

from labstat.comparison.results import Bias
from labstat.report.axes import ACCENT, FAINT, INK, SOFT, Axes, Scale, linear_scale, put_rect
from labstat.report.fonts import register
from labstat.report.numbers import plain
from labstat.report.plot_parts import KeyEntry, key, with_unit
from labstat.round.model import AnalytePlan
from labstat.study.results import BiasAtLevel, ComparisonResult


def bias_plot(result: ComparisonResult, analyte: AnalytePlan, *, width: float, height: float) -> Drawing:
    """One place a level, in the levels' order: allowance as a bracketed area, the leading interval thick.

    In units; in percent of the level where the levels span more than a factor of ten, so that none is squeezed flat.
    """
    register()
    drawing = Drawing(width, height)
    levels = result.levels
    if not levels:
        return drawing
    ats = [abs(item.level.at) for item in levels]
    percent = min(ats) > 0.0 and max(ats) / min(ats) > 10.0
    values = [0.0]
    for item in levels:
        factor = _factor(item, percent)
        if item.level.allowable is not None:
            values += [edge * factor for edge in item.level.allowable.at(item.level.at)]
        for made in _both(item):
            values += [v * factor for v in (made.bias.low, made.bias.high, made.bias.estimate) if v is not None]
    axes = Axes(
        drawing, left=40, bottom=42, right=width - 6, top=height - 16,
        x=Scale(0.0, float(len(levels))), y=linear_scale(values, room=0.08),
    )
    for index, item in enumerate(levels):
        _allowance(axes, index, item, _factor(item, percent))
    _frame(axes, result, analyte, percent=percent)
    for index, item in enumerate(levels):
        _intervals(axes, index + 0.5, item, _factor(item, percent))
    by_day = any(item.by_day is not None for item in levels)
    entries: list[KeyEntry] = [("bias, leading interval", ACCENT, 2.4, None)]
    if by_day:
        entries.append(("the narrower of specimens and days", SOFT, 1.0, None))
    entries.append(("allowed", FAINT, 6.0, None))
    key(drawing, entries, left=40, bottom=8, right=width)
    return drawing


def _factor(item: BiasAtLevel, percent: bool) -> float:
    return 100.0 / abs(item.level.at) if percent else 1.0


def _both(item: BiasAtLevel) -> list[Bias]:
    return [item.bias] if item.by_day is None else [item.bias, item.by_day]


def _frame(axes: Axes, result: ComparisonResult, analyte: AnalytePlan, *, percent: bool) -> None:
    unit = "% of the level" if percent else analyte.unit
    for tick in axes.ys.ticks(6):
        y = axes.at(0.0, tick)[1]
        axes.rule(axes.left, y, axes.left - 2.5, y, INK, 0.5)
        axes.text(axes.left - 4, y - 2.4, plain(round(tick, 9)).replace("-", "−"), anchor="end")
    zero = axes.at(0.0, 0.0)[1]
    axes.rule(axes.left, zero, axes.right, zero, SOFT, 0.8, (4, 2.5))
    put_rect(
        axes.drawing, axes.left, axes.bottom, axes.right - axes.left, axes.top - axes.bottom, fill=None, stroke=INK,
        line=0.6,
    )
    step = max(1, -(-len(result.levels) * 34 // int(axes.right - axes.left)))
    for index, item in enumerate(result.levels):
        if index % step == 0:
            axes.text(axes.at(index + 0.5, axes.ys.low)[0], axes.bottom - 10, plain(item.level.at), anchor="middle")
    axes.titles(with_unit("Level", analyte.unit), with_unit("Bias", unit))


def _allowance(axes: Axes, index: int, item: BiasAtLevel, factor: float) -> None:
    if item.level.allowable is None:
        return
    low, high = (edge * factor for edge in item.level.allowable.at(item.level.at))
    axes.rectangle(index + 0.15, low, index + 0.85, high, fill=FAINT)
    for edge in (low, high):
        axes.segment(index + 0.15, edge, index + 0.85, edge, colour=INK, wide=1.2)


def _intervals(axes: Axes, x: float, item: BiasAtLevel, factor: float) -> None:
    leading = item.leading
    for made in _both(item):
        lead = made is leading or made == leading
        at = x if lead else x + 0.14
        if made.bias.low is not None and made.bias.high is not None:
            low, high = made.bias.low * factor, made.bias.high * factor
            axes.segment(at, low, at, high, colour=ACCENT if lead else SOFT, wide=2.4 if lead else 1.0)
        if lead:
            px, py = axes.at(at, made.bias.estimate * factor)
            axes.drawing.add(Circle(px, py, 2.6, fillColor=white, strokeColor=INK, strokeWidth=1.2))
