"""Candidate against comparative: specimens, line, band, identity and allowances."""

from __future__ import annotations

import numpy as np
from reportlab.graphics.shapes import Drawing

from labstat.report.axes import ACCENT, INK, SHADE, SOFT, Axes, linear_scale, log_scale
from labstat.report.fonts import register
from labstat.report.plot_parts import KeyEntry, crowded, key, level_marks, specimen_names, wide_range, with_unit
from labstat.round.model import AnalytePlan
from labstat.study.results import ComparisonResult

POINTS = 80


def scatter(result: ComparisonResult, analyte: AnalytePlan, *, width: float, height: float) -> Drawing:
    """The scatter of one candidate; both axes have one scale, logarithmic where the specimens span decades."""
    register()
    drawing = Drawing(width, height)
    data = result.data
    log = wide_range(result)
    both = [*map(float, data.x), *map(float, data.y)]
    scale = log_scale(both) if log else linear_scale(both)
    side = min(width - 52, height - 62)
    axes = Axes(drawing, left=44, bottom=46, right=44 + side, top=46 + side, x=scale, y=scale)
    grid = np.geomspace(scale.low, scale.high, POINTS) if log else np.linspace(scale.low, scale.high, POINTS)
    if result.band is not None:
        band = result.band
        axes.area(list(map(float, band.x)), list(map(float, band.low)), list(map(float, band.high)), colour=SHADE)
    axes.frame(
        x_title=with_unit(f"{data.comparative}, comparative", analyte.unit),
        y_title=with_unit(f"{data.candidate}, candidate", analyte.unit),
    )
    _allowed(axes, result)
    level_marks(axes, [level.level.at for level in result.levels])
    axes.segment(scale.low, scale.low, scale.high, scale.high, colour=SOFT, wide=0.8, dash=(4, 2.5))
    fit = result.reported
    line = [fit.intercept.estimate + fit.slope.estimate * float(x) for x in grid]
    axes.curve(list(map(float, grid)), line, colour=ACCENT, wide=1.3)
    flagged = {outlier.specimen for outlier in result.outliers}
    axes.dots([
        (float(x), float(y), specimen in flagged)
        for specimen, x, y in zip(data.specimens, data.x, data.y, strict=True)
    ])
    specimen_names(axes, [(outlier.specimen, outlier.x, outlier.y) for outlier in result.outliers])
    entries: list[KeyEntry] = [
        ("line", ACCENT, 1.3, None), ("its band", SHADE, 5.0, None), ("no difference", SOFT, 0.8, (4, 2.5)),
    ]
    if any(level.level.allowable for level in result.levels):
        entries.append(("allowed at the level", INK, 1.6, None))
    key(drawing, entries, left=44, bottom=12, right=width)
    return drawing


def _allowed(axes: Axes, result: ComparisonResult) -> None:
    """What is allowed around identity, drawn at each level as an upright bar with caps; as two lines for many."""
    asked = [(item.level.at, item.level.allowable) for item in result.levels]
    edges = sorted((at, *(at + edge for edge in allowance.at(at))) for at, allowance in asked if allowance is not None)
    if crowded([item[0] for item in edges]):
        for side in (1, 2):
            axes.curve([item[0] for item in edges], [item[side] for item in edges], colour=INK, wide=1.0)
        return
    for item in result.levels:
        allowance, at = item.level.allowable, item.level.at
        if allowance is None:
            continue
        low, high = allowance.at(at)
        axes.segment(at, at + low, at, at + high, colour=INK, wide=1.6)
        x = axes.at(at, at)[0]
        for edge in (at + low, at + high):
            y = axes.at(at, edge)[1]
            if axes.bottom <= y <= axes.top and axes.left <= x <= axes.right:
                axes.rule(x - 4, y, x + 4, y, INK, 1.0)

