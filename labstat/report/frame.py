"""The document around the pages: size, running head and foot, page x of y, the same bytes every time."""

from __future__ import annotations

import io
from collections.abc import Sequence
from typing import Any

from reportlab.lib.pagesizes import A4, LETTER
from reportlab.pdfgen.canvas import Canvas
from reportlab.platypus import BaseDocTemplate, Flowable, Frame, PageTemplate

from labstat.report.axes import INK, SOFT
from labstat.report.fonts import TEXT, fitted, register, shown
from labstat.report.fonts import width as text_width

MARGIN = 42.0
TOP, BOTTOM = 46.0, 46.0

CAUTION = (
    "Not a medical device. No substitute for qualified review: this report defers to the laboratory's accreditation "
    "rules; licensed practice decides."
)


def page_size(page: str) -> tuple[float, float]:
    """Width and height in points."""
    return LETTER if page == "Letter" else A4


def usable_width(page: str) -> float:
    """Width between the margins."""
    return page_size(page)[0] - 2 * MARGIN


def usable_height(page: str) -> float:
    """Height between the running head and foot."""
    return page_size(page)[1] - TOP - BOTTOM + 16


class Bookmark(Flowable):
    """An entry in the document's outline at this place; takes no room."""

    def __init__(self, title: str, level: int = 0) -> None:
        super().__init__()
        self.title, self.level = shown(title, most=80), level
        self.width = self.height = 0

    def wrap(self, available_width: float, available_height: float) -> tuple[float, float]:
        return 0, 0

    def draw(self) -> None:
        canvas: Any = self.canv
        name = f"{canvas.getPageNumber()}-{self.level}-{self.title}"
        canvas.bookmarkPage(name)
        canvas.addOutlineEntry(self.title, name, level=self.level, closed=False)


def _numbered(left: str, right: str) -> type[Canvas]:
    """A canvas that holds its pages back until their number is known."""

    class Numbered(Canvas):
        def __init__(self, *args: Any, **options: Any) -> None:
            super().__init__(*args, **options)
            self._held: list[dict[str, Any]] = []

        def showPage(self) -> None:  # noqa: N802 - the library's name
            self._held.append(dict(self.__dict__))
            self._startPage()  # type: ignore[attr-defined]

        def save(self) -> None:
            total = len(self._held)
            for number, state in enumerate(self._held, 1):
                self.__dict__.update(state)
                self._edges(f"page {number} of {total}")
                super().showPage()
            super().save()

        def _edges(self, pages: str) -> None:
            wide, high = self._pagesize  # type: ignore[attr-defined]
            self.setFont(TEXT, 7)
            self.setFillColor(INK)
            told = f"{right}{pages}"
            room = wide - 2 * MARGIN - 12 - text_width(told, 7)
            self.drawString(MARGIN, high - 30, fitted(left, 7, room))
            self.drawRightString(wide - MARGIN, high - 30, told)
            self.setStrokeColor(SOFT)
            self.setLineWidth(0.4)
            self.line(MARGIN, high - 35, wide - MARGIN, high - 35)
            self.setFillColor(SOFT)
            self.setFont(TEXT, 6.2)
            self.drawString(MARGIN, 26, CAUTION)

    return Numbered


def document(
    story: Sequence[Flowable], *, page: str, title: str, subject: str, author: str, left: str, right: str
) -> bytes:
    """The pages as a PDF. Neither the clock nor the machine enters it: the same story gives the same bytes."""
    register()
    size = page_size(page)
    target = io.BytesIO()
    made = BaseDocTemplate(
        target, pagesize=size, leftMargin=MARGIN, rightMargin=MARGIN, topMargin=TOP, bottomMargin=BOTTOM,
        title=shown(title), subject=shown(subject), author=shown(author), creator="labstat", producer="labstat",
        invariant=1, lang="en", initialFontName=TEXT,
    )
    frame = Frame(
        MARGIN, BOTTOM - 8, size[0] - 2 * MARGIN, usable_height(page), leftPadding=0, rightPadding=0,
        topPadding=0, bottomPadding=0,
    )
    made.addPageTemplates([PageTemplate("page", [frame])])
    made.build(list(story), canvasmaker=_numbered(shown(left), shown(right, most=60)))
    return target.getvalue()
