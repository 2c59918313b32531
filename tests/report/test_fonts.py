"""The embedded fonts and text made safe for them."""

from __future__ import annotations

from hypothesis import given
from hypothesis import strategies as st
from reportlab.pdfbase import pdfmetrics

from labstat.report import fonts

USED = "AZaz09äßéñŁ αβγλμσΩ АЯяёіЖ µ − – — ≤ ≥ × ± · ◀▶▲▼ ☐ \u00a0\u2009\u202f\ufffd"


def test_registering_twice_keeps_the_first_fonts() -> None:
    fonts.register()
    first = pdfmetrics.getFont("Text")
    fonts.register()
    assert pdfmetrics.getFont("Text") is first
    assert {"Text", "Text-Bold"} <= set(pdfmetrics.getRegisteredFontNames())


def test_every_sign_that_a_report_needs_has_a_glyph() -> None:
    assert fonts.missing(USED) == ""


def test_signs_without_a_glyph_are_named_once() -> None:
    assert fonts.missing("a漢b漢") == "漢"


def test_harmful_characters_are_replaced_visibly() -> None:
    assert fonts.clean("a\x00b\u202ec\ud800d\x85") == "a\ufffdb\ufffdc\ufffdd\ufffd"


def test_user_text_is_never_taken_for_markup() -> None:
    assert fonts.markup("<b>1 & 2</b>") == "&lt;b&gt;1 &amp; 2&lt;/b&gt;"


@given(st.text(st.characters()))
def test_cleaned_text_can_be_encoded_and_stays_the_same_when_cleaned_again(text: str) -> None:
    made = fonts.clean(text)
    made.encode("utf-8")
    assert fonts.clean(made) == made
    assert len(made) == len(text)
