"""Paragraph and table styles, and tables made the one way."""

from __future__ import annotations

from collections.abc import Sequence
from xml.sax.saxutils import escape

from reportlab.lib.colors import Color, white
from reportlab.lib.enums import TA_RIGHT
from reportlab.lib.styles import ParagraphStyle
from reportlab.platypus import CondPageBreak, Flowable, Paragraph, Table, TableStyle

from labstat.report.axes import ALARM, FAINT, INK, SOFT
from labstat.report.fonts import BOLD, TEXT, fitted, markup, shown

TINT = Color(0.95, 0.96, 0.97)

BODY = ParagraphStyle("body", fontName=TEXT, fontSize=8, leading=10.4, textColor=INK)
LEFT = ParagraphStyle("left", parent=BODY, rightIndent=14)
SMALL = ParagraphStyle("small", parent=BODY, fontSize=7, leading=9)
RIGHT = ParagraphStyle("right", parent=SMALL, alignment=TA_RIGHT)
HEAD = ParagraphStyle("head", parent=SMALL, fontName=BOLD)
HEAD_RIGHT = ParagraphStyle("head-right", parent=HEAD, alignment=TA_RIGHT)
TITLE = ParagraphStyle("title", parent=BODY, fontName=BOLD, fontSize=15, leading=18)
SECTION = ParagraphStyle(
    "section", parent=BODY, fontName=BOLD, fontSize=9.5, leading=12, spaceBefore=7, spaceAfter=3, keepWithNext=1
)
LOOSE = ParagraphStyle("loose", parent=SECTION, keepWithNext=0)
PROPOSAL = ParagraphStyle("proposal", parent=BODY, fontSize=9.5, leading=12.5)
DANGER = ParagraphStyle("danger", parent=BODY, fontSize=8, leading=10.4, textColor=ALARM)

Cell = str | Flowable

PADS = 6
"""What is left free at both sides of a table's cell together, in points."""


MOST_LINES = 40
"""Lines of a cell: a table breaks between its rows only, so that no row may be higher than a page."""

HEAD_LINES = 5
FILLED = 0.8
"""Share of a paragraph's lines that text fills, since lines break between words."""


def text(
    words: str, style: ParagraphStyle = SMALL, *, most: int = 3000, wide: float | None = None, lines: int = MOST_LINES
) -> Paragraph:
    """User or program text as a paragraph: nothing in it is markup.

    With ``wide``, the width in points of the place it goes to, what needs more than so many lines ends in an ellipsis.
    """
    if wide is None:
        return Paragraph(markup(words, most=most), style)
    return Paragraph(escape(_held(shown(words, most=most), style, wide, lines)), style)


LONG = 16
ROOM = 110.0


def heading(words: str, *, rows: int) -> list[Flowable]:
    """The head of a table with so many rows. A long table begins below it and goes on, it is not moved as a whole."""
    if rows <= LONG:
        return [text(words, SECTION)]
    return [CondPageBreak(ROOM), text(words, LOOSE)]


def bold_lead(
    lead: str, words: str, style: ParagraphStyle = SMALL, *, wide: float | None = None, lines: int = MOST_LINES
) -> Paragraph:
    """A paragraph that opens with bold words; ``wide`` and ``lines`` as for :func:`text`."""
    body = shown(words, most=6000)
    if wide is not None:
        body = _held(body, style, wide, lines)
    return Paragraph(f'<font name="{BOLD}">{markup(lead)}</font> {escape(body)}', style)


def _held(words: str, style: ParagraphStyle, wide: float, lines: int) -> str:
    filled = FILLED if lines > 1 else 1.0
    return fitted(words, style.fontSize, filled * lines * wide, font=style.fontName)


def table(
    head: Sequence[str], rows: Sequence[Sequence[Cell]], widths: Sequence[float], *, right: Sequence[int] = ()
) -> Table:
    """A table with a ruled head; columns in ``right`` are set to the right. Text cells wrap."""
    room = [wide - PADS for wide in widths]
    made: list[list[Flowable]] = [[
        text(name, HEAD_RIGHT if i in right else HEAD, wide=room[i], lines=HEAD_LINES) for i, name in enumerate(head)
    ]]
    made.extend(
        [
            text(cell, RIGHT if i in right else SMALL, wide=room[i]) if isinstance(cell, str) else cell
            for i, cell in enumerate(row)
        ]
        for row in rows
    )
    return ruled(made, widths)


def ruled(rows: Sequence[Sequence[Flowable | list[Flowable]]], widths: Sequence[float], *, pad: float = 1.5) -> Table:
    """Cells in a table with a ruled head that repeats on every page."""
    grid = Table([list(row) for row in rows], colWidths=list(widths), repeatRows=1, hAlign="LEFT")
    grid.setStyle(
        TableStyle([
            ("VALIGN", (0, 0), (-1, -1), "TOP"),
            ("VALIGN", (0, 0), (-1, 0), "BOTTOM"),
            ("LINEBELOW", (0, 0), (-1, 0), 0.8, INK),
            ("LINEBELOW", (0, 1), (-1, -1), 0.3, FAINT),
            ("LEFTPADDING", (0, 0), (-1, -1), 2), ("RIGHTPADDING", (0, 0), (-1, -1), PADS - 2),
            ("TOPPADDING", (0, 0), (-1, -1), pad), ("BOTTOMPADDING", (0, 0), (-1, -1), pad + 0.5),
        ])
    )
    return grid


ONE_PIECE = 12
"""Paragraphs up to which a box stays in one piece."""


def boxed(content: Sequence[Flowable], width: float, *, line: Color = SOFT, fill: Color = white) -> Table:
    """Paragraphs in a ruled box, which breaks between them where it is higher than the page."""
    rows = [[item] for item in content] if len(content) > ONE_PIECE else [[list(content)]]
    box = Table(rows, colWidths=[width], hAlign="LEFT")
    box.setStyle(
        TableStyle([
            ("BOX", (0, 0), (-1, -1), 0.8, line), ("BACKGROUND", (0, 0), (-1, -1), fill),
            ("LEFTPADDING", (0, 0), (-1, -1), 6), ("RIGHTPADDING", (0, 0), (-1, -1), 6),
            ("TOPPADDING", (0, 0), (-1, -1), 1), ("BOTTOMPADDING", (0, 0), (-1, -1), 1),
            ("TOPPADDING", (0, 0), (-1, 0), 4), ("BOTTOMPADDING", (0, -1), (-1, -1), 5),
        ])
    )
    return box


def beside(left: Sequence[Flowable], right: Sequence[Flowable], widths: tuple[float, float]) -> Table:
    """Two columns of content without rules."""
    pair = Table([[list(left), list(right)]], colWidths=list(widths), hAlign="LEFT")
    pair.setStyle(
        TableStyle([
            ("VALIGN", (0, 0), (-1, -1), "TOP"), ("LEFTPADDING", (0, 0), (-1, -1), 0),
            ("RIGHTPADDING", (0, 0), (-1, -1), 0), ("TOPPADDING", (0, 0), (-1, -1), 0),
            ("BOTTOMPADDING", (0, 0), (-1, -1), 0),
        ])
    )
    return pair
