"""Paragraph and table styles, and tables made the one way."""

from __future__ import annotations

from collections.abc import Sequence

from reportlab.lib.colors import Color, white
from reportlab.lib.enums import TA_RIGHT
from reportlab.lib.styles import ParagraphStyle
from reportlab.platypus import Flowable, Paragraph, Table, TableStyle

from labstat.report.axes import ALARM, FAINT, INK, SOFT
from labstat.report.fonts import BOLD, TEXT, markup

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
PROPOSAL = ParagraphStyle("proposal", parent=BODY, fontSize=9.5, leading=12.5)
DANGER = ParagraphStyle("danger", parent=BODY, fontSize=8, leading=10.4, textColor=ALARM)

Cell = str | Flowable


def text(words: str, style: ParagraphStyle = SMALL, *, most: int = 3000) -> Paragraph:
    """User or program text as a paragraph: nothing in it is markup."""
    return Paragraph(markup(words, most=most), style)


def bold_lead(lead: str, words: str, style: ParagraphStyle = SMALL) -> Paragraph:
    """A paragraph that opens with bold words."""
    return Paragraph(f'<font name="{BOLD}">{markup(lead)}</font> {markup(words, most=6000)}', style)


def table(
    head: Sequence[str], rows: Sequence[Sequence[Cell]], widths: Sequence[float], *, right: Sequence[int] = ()
) -> Table:
    """A table with a ruled head; columns in ``right`` are set to the right. Text cells wrap."""
    made: list[list[Flowable]] = [
        [text(name, HEAD_RIGHT if i in right else HEAD) for i, name in enumerate(head)]
    ]
    made.extend(
        [text(cell, RIGHT if i in right else SMALL) if isinstance(cell, str) else cell for i, cell in enumerate(row)]
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
            ("LEFTPADDING", (0, 0), (-1, -1), 2), ("RIGHTPADDING", (0, 0), (-1, -1), 4),
            ("TOPPADDING", (0, 0), (-1, -1), pad), ("BOTTOMPADDING", (0, 0), (-1, -1), pad + 0.5),
        ])
    )
    return grid


def boxed(content: Sequence[Flowable], width: float, *, line: Color = SOFT, fill: Color = white) -> Table:
    """Paragraphs in a ruled box."""
    box = Table([[list(content)]], colWidths=[width], hAlign="LEFT")
    box.setStyle(
        TableStyle([
            ("BOX", (0, 0), (-1, -1), 0.8, line), ("BACKGROUND", (0, 0), (-1, -1), fill),
            ("LEFTPADDING", (0, 0), (-1, -1), 6), ("RIGHTPADDING", (0, 0), (-1, -1), 6),
            ("TOPPADDING", (0, 0), (-1, -1), 4), ("BOTTOMPADDING", (0, 0), (-1, -1), 5),
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
