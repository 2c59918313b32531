"""A small pair of axes on a vector drawing: scales, marks, clipping. It knows nothing of what is drawn."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

from reportlab.graphics.shapes import Circle, Drawing, Line, Path, Polygon, PolyLine, Rect, String
from reportlab.lib.colors import Color, white

from labstat.report.fonts import TEXT, fitted, width
from labstat.report.ticks import linear_ticks, log_ticks, tick_labels

INK = Color(0.10, 0.12, 0.15)
SOFT = Color(0.45, 0.48, 0.52)
FAINT = Color(0.86, 0.87, 0.89)
SHADE = Color(0.80, 0.84, 0.89)
ACCENT = Color(0.06, 0.29, 0.51)
ALARM = Color(0.62, 0.16, 0.10)
SIZE = 7.0
CIRCLES = 300
"""Specimens up to which each is a circle of its own."""

DIAMOND = 1.9

Anchor = Literal["start", "middle", "end"]


def put_line(
    drawing: Drawing, x1: float, y1: float, x2: float, y2: float, colour: Color, wide: float,
    dash: Sequence[float] | None = None,
) -> None:
    """A straight line on a drawing, dashed where ``dash`` says how."""
    line = Line(x1, y1, x2, y2, strokeColor=colour, strokeWidth=wide)
    line.strokeLineCap = 0
    if dash:
        line.strokeDashArray = list(dash)
    drawing.add(line)


def put_rect(
    drawing: Drawing, x: float, y: float, wide: float, high: float, *, fill: Color | None, stroke: Color | None = None,
    line: float = 0.5,
) -> None:
    """A rectangle on a drawing."""
    box = Rect(x, y, wide, high)
    box.fillColor, box.strokeColor, box.strokeWidth = fill, stroke, line if stroke is not None else 0
    drawing.add(box)


def put_text(
    drawing: Drawing, x: float, y: float, text: str, *, anchor: Anchor = "start", size: float = SIZE,
    colour: Color = INK, font: str = TEXT,
) -> None:
    """Text on a drawing."""
    drawing.add(String(x, y, text, fontName=font, fontSize=size, fillColor=colour, textAnchor=anchor))


@dataclass(frozen=True, slots=True)
class Scale:
    """A range of values on a line of given length, linear or logarithmic."""

    low: float
    high: float
    log: bool = False

    def share(self, value: float) -> float:
        """Where a value lies between the ends, 0 to 1 and beyond."""
        if self.log:
            if value <= 0.0:
                return -1e6
            return math.log(value / self.low) / math.log(self.high / self.low)
        return (value - self.low) / (self.high - self.low)

    def ticks(self, most: int) -> list[float]:
        return log_ticks(self.low, self.high) if self.log else linear_ticks(self.low, self.high, most=most)


def linear_scale(values: Sequence[float], *, room: float = 0.05, least: float = 1e-9) -> Scale:
    """A scale that holds all values with some room on both sides."""
    low, high = min(values), max(values)
    spread = max(high - low, least, 1e-9 * max(abs(low), abs(high)))
    return Scale(low - room * spread, high + room * spread)


def log_scale(values: Sequence[float], *, room: float = 0.05) -> Scale:
    """A logarithmic scale that holds all (positive) values."""
    low, high = min(values), max(values)
    factor = max(high / low, 1.1) ** room
    return Scale(low / factor, high * factor, log=True)


class Axes:
    """A plotting area inside a drawing. Everything drawn through it is clipped to the area by numbers."""

    def __init__(
        self, drawing: Drawing, *, left: float, bottom: float, right: float, top: float, x: Scale, y: Scale
    ) -> None:
        self.drawing = drawing
        self.left, self.bottom, self.right, self.top = left, bottom, right, top
        self.xs, self.ys = x, y

    def at(self, x: float, y: float) -> tuple[float, float]:
        """A point of the data in points of the page."""
        return (
            self.left + self.xs.share(x) * (self.right - self.left),
            self.bottom + self.ys.share(y) * (self.top - self.bottom),
        )

    def frame(self, *, x_title: str, y_title: str, x_ticks: int = 6, y_ticks: int = 6, grid: bool = True) -> None:
        """Ticks, their labels, a faint grid, the frame and the titles."""
        for axis, most in (("x", x_ticks), ("y", y_ticks)):
            scale = self.xs if axis == "x" else self.ys
            ticks = scale.ticks(most) if most else []
            end = -math.inf
            for tick, label in zip(ticks, tick_labels(ticks), strict=True):
                if axis == "x":
                    px = self.at(tick, self.ys.low)[0]
                    if grid:
                        self.rule(px, self.bottom, px, self.top, FAINT, 0.4)
                    self.rule(px, self.bottom, px, self.bottom - 2.5, INK, 0.5)
                    half = width(label, SIZE) / 2
                    if px - half > end + 3:
                        self.text(px, self.bottom - 10, label, anchor="middle")
                        end = px + half
                else:
                    py = self.at(self.xs.low, tick)[1]
                    if grid:
                        self.rule(self.left, py, self.right, py, FAINT, 0.4)
                    self.rule(self.left, py, self.left - 2.5, py, INK, 0.5)
                    if py > end + 7:
                        self.text(self.left - 4, py - 2.4, label, anchor="end")
                        end = py
        put_rect(
            self.drawing, self.left, self.bottom, self.right - self.left, self.top - self.bottom, fill=None,
            stroke=INK, line=0.6,
        )
        self.titles(x_title, y_title)

    def titles(self, x_title: str, y_title: str) -> None:
        """The names of both axes; one that is too long loses its end, never its unit."""
        middle, edge = (self.left + self.right) / 2, float(self.drawing.width)
        self.text(middle, self.bottom - 21, _title(x_title, 2 * min(middle, edge - middle)), anchor="middle")
        self.text(self.left, self.top + 5, _title(y_title, edge - self.left))

    def text(
        self, x: float, y: float, text: str, *, anchor: Anchor = "start", size: float = SIZE, colour: Color = INK,
        font: str = TEXT,
    ) -> None:
        """Text at a place of the page (not of the data)."""
        put_text(self.drawing, x, y, text, anchor=anchor, size=size, colour=colour, font=font)

    def rule(
        self, x1: float, y1: float, x2: float, y2: float, colour: Color, wide: float,
        dash: Sequence[float] | None = None,
    ) -> None:
        """A straight line between two places of the page."""
        put_line(self.drawing, x1, y1, x2, y2, colour, wide, dash)

    def segment(
        self, x1: float, y1: float, x2: float, y2: float, *, colour: Color = INK, wide: float = 0.8,
        dash: Sequence[float] | None = None,
    ) -> None:
        """A straight line between two points of the data, clipped."""
        clipped = clip(*self.at(x1, y1), *self.at(x2, y2), box=(self.left, self.bottom, self.right, self.top))
        if clipped is not None:
            self.rule(*clipped, colour, wide, dash)

    def curve(
        self, xs: Sequence[float], ys: Sequence[float], *, colour: Color = INK, wide: float = 0.8,
        dash: Sequence[float] | None = None,
    ) -> None:
        """A line through many points of the data, clipped piece by piece."""
        runs: list[list[float]] = []
        last: tuple[float, float] | None = None
        for i in range(len(xs) - 1):
            clipped = clip(
                *self.at(xs[i], ys[i]), *self.at(xs[i + 1], ys[i + 1]),
                box=(self.left, self.bottom, self.right, self.top),
            )
            if clipped is None:
                last = None
                continue
            if last != clipped[:2]:
                runs.append([*clipped[:2]])
            runs[-1] += clipped[2:]
            last = clipped[2], clipped[3]
        for run in runs:
            line = PolyLine(run, strokeColor=colour, strokeWidth=wide)
            if dash:
                line.strokeDashArray = list(dash)
            self.drawing.add(line)

    def area(self, xs: Sequence[float], low: Sequence[float], high: Sequence[float], *, colour: Color = SHADE) -> None:
        """The area between two curves over the same x, held inside the frame."""
        points: list[float] = []
        for x, y in [*zip(xs, low, strict=True), *zip(reversed(xs), reversed(high), strict=True)]:
            px, py = self.at(x, y)
            points += [min(max(px, self.left), self.right), min(max(py, self.bottom), self.top)]
        self.drawing.add(Polygon(points, fillColor=colour, strokeColor=None, strokeWidth=0))

    def rectangle(
        self, x1: float, y1: float, x2: float, y2: float, *, fill: Color | None, stroke: Color | None = None
    ) -> None:
        """A rectangle between two points of the data, held inside the frame."""
        (a, b), (c, d) = self.at(x1, y1), self.at(x2, y2)
        a, c = sorted(min(max(v, self.left), self.right) for v in (a, c))
        b, d = sorted(min(max(v, self.bottom), self.top) for v in (b, d))
        put_rect(self.drawing, a, b, c - a, d - b, fill=fill, stroke=stroke)

    def dots(self, points: Sequence[tuple[float, float, bool]]) -> None:
        """Measured points (x, y, flagged) in their order; very many as small diamonds in one piece, flagged ones last.

        A circle each would make the drawing of a thousand specimens slow and large.
        """
        if len(points) <= CIRCLES:
            for x, y, flagged in points:
                self.dot(x, y, flagged=flagged)
            return
        path = Path(fillColor=white, strokeColor=ACCENT, strokeWidth=0.6)
        for x, y, flagged in points:
            px, py = self.at(x, y)
            if flagged or not (self.left <= px <= self.right and self.bottom <= py <= self.top):
                continue
            path.moveTo(px - DIAMOND, py)
            for cx, cy in ((px, py + DIAMOND), (px + DIAMOND, py), (px, py - DIAMOND)):
                path.lineTo(cx, cy)
            path.closePath()
        if path.operators:
            self.drawing.add(path)
        for x, y, flagged in points:
            if flagged:
                self.dot(x, y, flagged=True)

    def dot(self, x: float, y: float, *, size: float = 1.7, flagged: bool = False) -> None:
        """A measured point; a flagged one is a hollow square with a cross, seen without colour."""
        px, py = self.at(x, y)
        if not (self.left <= px <= self.right and self.bottom <= py <= self.top):
            return
        if flagged:
            s = size + 1.2
            put_rect(self.drawing, px - s, py - s, 2 * s, 2 * s, fill=white, stroke=ALARM, line=0.8)
            self.rule(px - s, py - s, px + s, py + s, ALARM, 0.8)
        else:
            self.drawing.add(Circle(px, py, size, fillColor=white, strokeColor=ACCENT, strokeWidth=0.7))


def _title(words: str, room: float) -> str:
    name, opened, unit = words.rpartition(" (")
    tail = opened + unit if opened else ""
    return fitted(name if opened else words, SIZE, room - width(tail, SIZE)) + tail if words else ""


def clip(
    x1: float, y1: float, x2: float, y2: float, *, box: tuple[float, float, float, float]
) -> tuple[float, float, float, float] | None:
    """The part of a segment inside a box (Liang & Barsky 1984), or ``None``."""
    left, bottom, right, top = box
    dx, dy = x2 - x1, y2 - y1
    start, end = 0.0, 1.0
    for p, q in ((-dx, x1 - left), (dx, right - x1), (-dy, y1 - bottom), (dy, top - y1)):
        if p == 0.0:
            if q < 0.0:
                return None
            continue
        t = q / p
        if p < 0.0:
            start = max(start, t)
        else:
            end = min(end, t)
    if start > end:
        return None
    return x1 + start * dx, y1 + start * dy, x1 + end * dx, y1 + end * dy
