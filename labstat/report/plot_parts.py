"""What the figures of a comparison share: names with units, level marks that do not collide, a key of lines."""

from __future__ import annotations

from collections.abc import Sequence

from reportlab.graphics.shapes import Drawing
from reportlab.lib.colors import Color, white

from labstat.report.axes import SOFT, Axes, put_line, put_rect, put_text
from labstat.report.fonts import shown, width
from labstat.report.numbers import plain
from labstat.study.results import ComparisonResult

LOG_FROM = 30.0
"""Specimens whose highest result is this many times the lowest are drawn on logarithmic scales."""


def with_unit(name: str, unit: str) -> str:
    """A quantity with its unit, as an axis or a table head names it."""
    return f"{shown(name, most=60)} ({shown(unit, most=20)})" if unit else shown(name, most=60)


def wide_range(result: ComparisonResult) -> bool:
    """Whether the results ask for logarithmic scales."""
    low = min(float(result.data.x.min()), float(result.data.y.min()))
    high = max(float(result.data.x.max()), float(result.data.y.max()))
    return low > 0.0 and high / low >= LOG_FROM


CROWD = 12
"""Levels up to which each has its own mark in a figure."""


def crowded(levels: Sequence[float]) -> bool:
    """Whether marks of all the levels would hide the specimens."""
    return len(levels) > CROWD


def level_marks(axes: Axes, levels: Sequence[float]) -> None:
    """A small mark with its number on the upper edge for each level; numbers that would collide are left out.

    Of many levels only those have a mark whose numbers have room.
    """
    end = -1e9
    for level in sorted(levels):
        x, _ = axes.at(level, axes.ys.low)
        if not axes.left <= x <= axes.right:
            continue
        label = plain(level)
        half = width(label, 6.5) / 2
        named = x - half > end + 2
        if named or not crowded(levels):
            axes.rule(x, axes.bottom, x, axes.top, SOFT, 0.5, (1, 2))
        if named:
            put_rect(axes.drawing, x - half - 1, axes.top - 10, 2 * half + 2, 9, fill=white)
            axes.text(x, axes.top - 8, label, anchor="middle", size=6.5, colour=SOFT)
            end = x + half


def specimen_names(axes: Axes, outliers: Sequence[tuple[str, float, float]]) -> None:
    """Names of flagged specimens beside their marks, turned inwards at the right edge; none over another."""
    taken: list[tuple[float, float]] = []
    for name, at_x, at_y in outliers:
        x, y = axes.at(at_x, at_y)
        if any(abs(x - other_x) < 34 and abs(y - other_y) < 8 for other_x, other_y in taken):
            continue
        inward = x > (axes.left + axes.right) / 2
        axes.text(
            x - 5 if inward else x + 5, y - 2.3, shown(name, most=14), anchor="end" if inward else "start", size=6
        )
        taken.append((x, y))


KeyEntry = tuple[str, Color, float, tuple[float, ...] | None]
"""Words, colour, width and dash of a line in a figure's key."""


def key(drawing: Drawing, entries: Sequence[KeyEntry], *, left: float, bottom: float, right: float) -> None:
    """A key of lines and areas below a figure, broken into rows where it is too wide."""
    x, y = left, bottom
    for text, colour, wide, dash in entries:
        need = 20 + width(text, 6.5) + 10
        if x > left and x + need > right:
            x, y = left, y - 9
        put_line(drawing, x, y + 2.2, x + 16, y + 2.2, colour, wide, dash)
        put_text(drawing, x + 19, y, text, size=6.5)
        x += need
