"""The embedded fonts, and user text made safe for them."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import fields, is_dataclass
from importlib.resources import files
from typing import Final
from xml.sax.saxutils import escape

from reportlab.pdfbase import pdfmetrics
from reportlab.pdfbase.ttfonts import TTFont

TEXT: Final = "Text"
BOLD: Final = "Text-Bold"

_BIDI = {0x200E, 0x200F, 0x061C, *range(0x202A, 0x202F), *range(0x2066, 0x206A)}
REPLACEMENT = "\ufffd"
WIDEST = 1.7
"""No sign of the fonts is wider than this many times their size."""


def register() -> None:
    """Make the fonts known to the drawing library; calling it again does nothing."""
    known = pdfmetrics.getRegisteredFontNames()
    for name in (TEXT, BOLD):
        if name not in known:
            path = files("labstat.report").joinpath("fonts", f"{name}.ttf")
            pdfmetrics.registerFont(TTFont(name, str(path), asciiReadable=False))
    if TEXT not in known:
        pdfmetrics.registerFontFamily(TEXT, normal=TEXT, bold=BOLD, italic=TEXT, boldItalic=BOLD)


def clean(text: str) -> str:
    """Text without control characters, direction overrides and lone surrogates: each becomes U+FFFD."""
    return "".join(
        " " if sign in "\n\r\t" else REPLACEMENT if _harmful(ord(sign)) else sign for sign in text
    )


def _harmful(code: int) -> bool:
    return code < 0x20 or 0x7F <= code < 0xA0 or 0xD800 <= code < 0xE000 or code in _BIDI


def missing(text: str) -> str:
    """The characters of ``text`` that the fonts cannot draw, each once; empty when there are none."""
    register()
    font = pdfmetrics.getFont(TEXT)
    if not isinstance(font, TTFont):
        raise TypeError("the text font is not the embedded one")
    glyphs = font.face.charToGlyph
    return "".join(dict.fromkeys(sign for sign in clean(text) if ord(sign) not in glyphs))


def strings(thing: object) -> Iterator[str]:
    """Every text inside frozen values, mappings and sequences, whatever the depth."""
    if isinstance(thing, str):
        yield thing
    elif isinstance(thing, Mapping):
        for key, value in thing.items():
            yield from strings(key)
            yield from strings(value)
    elif isinstance(thing, (list, tuple)):
        for part in thing:
            yield from strings(part)
    elif is_dataclass(thing):
        for field in fields(thing):
            yield from strings(getattr(thing, field.name))


def shown(text: str, *, most: int = 400) -> str:
    """Text as it can be drawn: characters without a glyph become U+FFFD, endless text is cut with an ellipsis."""
    lost = set(missing(text))
    words = "".join(REPLACEMENT if sign in lost else sign for sign in clean(text))
    return words if len(words) <= most else words[: most - 1] + "…"


def markup(text: str, *, most: int = 400) -> str:
    """Text for a paragraph: drawable, and nothing in it is taken for markup."""
    return escape(shown(text, most=most))


def width(text: str, size: float, *, font: str = TEXT) -> float:
    """Width of drawn text in points."""
    return float(pdfmetrics.stringWidth(text, font, size))


def fitted(text: str, size: float, room: float, *, font: str = TEXT) -> str:
    """Text cut with an ellipsis where it would be wider than ``room`` points."""
    if len(text) * size * WIDEST <= room or width(text, size, font=font) <= room:
        return text
    keep, above = 0, len(text)
    while keep < above:
        half = (keep + above + 1) // 2
        if width(text[:half] + "…", size, font=font) <= room:
            keep = half
        else:
            above = half - 1
    return text[:keep] + "…"
