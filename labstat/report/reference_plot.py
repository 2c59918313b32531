"""Reference values of each group: their distribution, the limits with intervals, and the interval in use."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt
from reportlab.graphics.shapes import Drawing, Line
from reportlab.lib.colors import white

from labstat.report.axes import ACCENT, FAINT, INK, SHADE, SIZE, SOFT, Axes, Scale, linear_scale, put_rect
from labstat.report.fonts import fitted, register, shown
from labstat.report.fonts import width as text_width
from labstat.report.plot_parts import KeyEntry, key, with_unit
from labstat.report.words import quoted
from labstat.round.model import AnalytePlan
from labstat.study.results import GroupResult

MOST = 4
"""Groups drawn in one figure; more are named in the caption and stand in the table."""


def group_words(group: GroupResult) -> str:
    """A group in words."""
    return ", ".join(f"{column} {value}" for column, value in group.partition.items()) or "all"


def reference_plot(groups: Sequence[GroupResult], analyte: AnalytePlan, *, width: float, height: float) -> Drawing:
    """Histograms one above the other on one scale, with limits and their intervals drawn through."""
    register()
    drawing = Drawing(width, height)
    chosen = [group for group in groups if np.isfinite(group.values).any()][:MOST]
    if not chosen:
        return drawing
    values: list[float] = []
    for group in chosen:
        finite = group.values[np.isfinite(group.values)]
        values += [float(finite.min()), float(finite.max())]
        for limit in (group.limits.lower, group.limits.upper):
            if limit is not None:
                values += [v for v in (limit.low, limit.high, limit.rank_low, limit.rank_high) if v is not None]
        if group.adopted is not None:
            values += [v for v in (group.adopted.low, group.adopted.high) if v is not None]
    scale = linear_scale(values, room=0.03)
    bottom, top = 42.0, height - 6
    each = (top - bottom) / len(chosen)
    edges = np.linspace(scale.low, scale.high, 41)
    for index, group in enumerate(chosen):
        base = top - (index + 1) * each
        _group(drawing, group, scale, edges, left=40, right=width - 6, bottom=base, top=base + each)
    foot = Axes(drawing, left=40, bottom=bottom, right=width - 6, top=top, x=scale, y=Scale(0, 1))
    _foot(foot, analyte)
    entries: list[KeyEntry] = [
        ("limit", INK, 1.6, None), ("the interval to quote for it", SHADE, 6.0, None),
    ]
    if any(group.adopted is not None for group in chosen):
        entries.append(("interval in use", SOFT, 1.2, (3, 2)))
    key(drawing, entries, left=40, bottom=8, right=width)
    return drawing


def _foot(axes: Axes, analyte: AnalytePlan) -> None:
    axes.frame(x_title=with_unit(analyte.name, analyte.unit), y_title="", y_ticks=0, grid=False)


def _group(
    drawing: Drawing, group: GroupResult, scale: Scale, edges: npt.NDArray[np.float64], *, left: float, right: float,
    bottom: float, top: float,
) -> None:
    finite = group.values[np.isfinite(group.values)]
    counts, _ = np.histogram(finite, bins=edges)
    axes = Axes(
        drawing, left=left, bottom=bottom, right=right, top=top, x=scale, y=Scale(0.0, max(1, counts.max()) * 1.45)
    )
    drawing.add(Line(left, bottom, right, bottom, strokeColor=INK, strokeWidth=0.5))
    for limit in (group.limits.lower, group.limits.upper):
        if limit is None:
            continue
        shown_limit = quoted(limit)
        if shown_limit.low is not None and shown_limit.high is not None:
            axes.rectangle(shown_limit.low, 0.0, shown_limit.high, axes.ys.high, fill=SHADE)
    for count, a, b in zip(counts, edges, edges[1:], strict=False):
        if count:
            (x1, y1), (x2, y2) = axes.at(float(a), 0.0), axes.at(float(b), float(count))
            put_rect(drawing, x1 + 0.4, y1, x2 - x1 - 0.8, y2 - y1, fill=FAINT, stroke=ACCENT)
    for limit in (group.limits.lower, group.limits.upper):
        if limit is not None:
            axes.segment(limit.estimate, 0.0, limit.estimate, axes.ys.high, colour=INK, wide=1.6)
    if group.adopted is not None:
        for edge in (group.adopted.low, group.adopted.high):
            if edge is not None:
                axes.segment(edge, 0.0, edge, axes.ys.high, colour=SOFT, wide=1.2, dash=(3, 2))
    label = f"{fitted(shown(group_words(group), most=50), SIZE, 0.6 * (right - left))}, n = {group.limits.n}"
    put_rect(drawing, left + 2, top - 11.5, text_width(label, SIZE) + 4, 10, fill=white)  # a limit may pass behind it
    axes.text(left + 4, top - 9, label)
