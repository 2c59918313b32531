"""File names for reports that are safe everywhere, whatever an analyte is called."""

from __future__ import annotations

import hashlib
import unicodedata
from collections import Counter
from collections.abc import Iterable

_FORBIDDEN = frozenset('<>:"/\\|?*%')
_RESERVED = frozenset({"con", "prn", "aux", "nul", *(f"{port}{i}" for port in ("com", "lpt") for i in range(10))})
_LONGEST = 100  # bytes of UTF-8: room for a suffix and for what other systems put before it


def report_names(names: Iterable[str]) -> dict[str, str]:
    """A file name (without folder, with ``.pdf``) for each analyte.

    Depends on the set of names only, never on their order. Names that differ only in case, or that become alike when
    made safe, get a suffix from their own SHA-256.
    """
    stems = {name: _stem(name) for name in names}
    keys = Counter(_key(stem) for stem in stems.values())
    return {name: f"{stem if keys[_key(stem)] == 1 else _marked(stem, name)}.pdf" for name, stem in stems.items()}


def _stem(name: str) -> str:
    text = "".join(
        "_" if character in _FORBIDDEN or unicodedata.category(character)[0] == "C"
        or unicodedata.category(character) in ("Zl", "Zp") else character
        for character in unicodedata.normalize("NFC", name)
    ).strip(" .")
    if not text:
        return _marked("analyte", name)
    if text.split(".")[0].rstrip().casefold() in _RESERVED:
        text = f"_{text}"
    if len(text.encode()) > _LONGEST:
        return _marked(text.encode()[:_LONGEST].decode(errors="ignore").rstrip(" ."), name)
    return text


def _key(stem: str) -> str:
    """What a file system that ignores case and composition would take for the same name."""
    return unicodedata.normalize("NFKC", unicodedata.normalize("NFKC", stem).casefold())


def _marked(stem: str, name: str) -> str:
    return f"{stem}-{hashlib.sha256(name.encode('utf-8', 'surrogatepass')).hexdigest()[:10]}"
