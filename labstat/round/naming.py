"""Names as they are compared, and the nearest known one for a message."""

from __future__ import annotations

import difflib
import unicodedata
from collections.abc import Iterable


def clean_name(name: str) -> str:
    """A name without blanks around it, its signs composed (NFC): what looks the same compares the same."""
    return unicodedata.normalize("NFC", name.strip())


def did_you_mean(name: str, known: Iterable[str]) -> str:
    """``, did you mean "…"`` for the nearest known name, or nothing."""
    names = list(known)
    folded = {candidate.casefold(): candidate for candidate in names}
    near = difflib.get_close_matches(name.casefold(), list(folded), n=1, cutoff=0.7)
    return f', did you mean "{folded[near[0]]}"' if near else ""
