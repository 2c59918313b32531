"""An interval as a share of what is allowed, on one axis for all questions: −100 % to +100 % is allowed."""

from __future__ import annotations

from reportlab.graphics.shapes import Drawing, Line, Polygon, String
from reportlab.lib.colors import white

from labstat.judgement.model import Finding
from labstat.report.axes import ACCENT, ALARM, FAINT, INK, SOFT, put_rect
from labstat.report.fonts import TEXT, register

REACH = 2.0
"""The axis ends at twice the allowance; an interval that goes on has an arrow."""


def share_of(value: float, finding: Finding) -> float | None:
    """A bias as a share of the allowance on its side; ``None`` without an allowance on that side."""
    edge = finding.allowed_high if value >= 0 else finding.allowed_low
    if edge is None:
        return None
    if edge == 0.0:
        return 0.0 if value == 0.0 else (REACH * 2 if value > 0 else -REACH * 2)
    return value / abs(edge)


def _x(share: float, width: float) -> float:
    held = min(max(share, -REACH), REACH)
    return (held + REACH) / (2 * REACH) * width


def share_bar(finding: Finding, *, width: float, height: float) -> Drawing:
    """One question's bar. Within: filled; beyond: filled and crossed at its ends; else: open."""
    register()
    drawing = Drawing(width, height)
    middle = height / 2
    left, right = _x(-1.0, width), _x(1.0, width)
    put_rect(drawing, left, 1, right - left, height - 2, fill=FAINT)
    for share in (-1.0, 1.0):
        x = _x(share, width)
        drawing.add(Line(x, 0, x, height, strokeColor=INK, strokeWidth=0.8))
    zero = _x(0.0, width)
    drawing.add(Line(zero, 1, zero, height - 1, strokeColor=SOFT, strokeWidth=0.4))
    if finding.low is None or finding.high is None or finding.estimate is None:
        drawing.add(String(zero, middle - 2.2, "no interval", fontName=TEXT, fontSize=6, fillColor=INK,
                           textAnchor="middle"))
        return drawing
    shares = [share_of(value, finding) for value in (finding.low, finding.estimate, finding.high)]
    low, estimate, high = (share if share is not None else 0.0 for share in shares)
    a, b = _x(low, width), _x(high, width)
    colour = ALARM if finding.finding == "beyond" else ACCENT
    filled = finding.finding in ("within", "beyond")
    thick = 3.6
    put_rect(
        drawing, a, middle - thick / 2, max(b - a, 1.2), thick, fill=colour if filled else white, stroke=colour,
        line=0.9,
    )
    for share, x, way in ((low, a, -1), (high, b, 1)):
        if abs(share) > REACH and (share < 0) == (way < 0):
            drawing.add(
                Polygon([x - way * 4, middle + 4, x, middle, x - way * 4, middle - 4], fillColor=colour,
                        strokeColor=colour, strokeWidth=0.5)
            )
    if finding.finding == "beyond":
        for x in (a, b):
            drawing.add(Line(x, middle - 4.5, x, middle + 4.5, strokeColor=colour, strokeWidth=1.0))
    e = _x(estimate, width)
    drawing.add(Line(e, middle - 4.5, e, middle + 4.5, strokeColor=INK, strokeWidth=1.4))
    return drawing


def share_axis(*, width: float, height: float) -> Drawing:
    """The head of the column of bars."""
    register()
    drawing = Drawing(width, height)
    for share, label in ((-1.0, "−100"), (0.0, "0"), (1.0, "+100 %")):
        drawing.add(
            String(_x(share, width), 1.5, label, fontName=TEXT, fontSize=6, fillColor=INK, textAnchor="middle")
        )
    return drawing
