"""Bytes to text: a byte order mark, then UTF-16 by its zeros, then strict UTF-8, then cp1252 with a note."""

from __future__ import annotations

import codecs

_MARKS = (
    (codecs.BOM_UTF8, "utf-8-sig"),
    (codecs.BOM_UTF16_LE, "utf-16"),
    (codecs.BOM_UTF16_BE, "utf-16"),
)


class UndecodableError(ValueError):
    """The bytes are no text in the encoding; the message says where."""


def decode(data: bytes, *, encoding: str | None) -> tuple[str, str | None]:
    """The text and, where the encoding had to be guessed without proof, a note. Raises :class:`UndecodableError`."""
    if encoding is not None:
        try:
            # a mark at the start is no part of the first column's name, whatever encoding was said
            return data.decode(encoding).removeprefix("\ufeff"), None
        except (ValueError, LookupError) as error:
            raise UndecodableError(str(error)) from None
    for mark, name in _MARKS:
        if data.startswith(mark):
            return _strict(data, name), None
    for name, offset in (("utf-16-le", 1), ("utf-16-be", 0)):
        sample = data[:2000]
        if len(sample) >= 8 and len(sample) % 2 == 0 and sample[offset::2].count(0) > 0.4 * len(sample) / 2:
            return _strict(data, name), f"read as {name}: it has no byte order mark"
    try:
        return data.decode("utf-8"), None
    except UnicodeDecodeError:
        pass
    return _strict(data, "cp1252"), "read as cp1252: it is not UTF-8; set encoding in [files] if that is wrong"


def _strict(data: bytes, name: str) -> str:
    try:
        return data.decode(name)
    except UnicodeDecodeError as error:
        raise UndecodableError(f"neither UTF-8 nor {name}: byte {error.start} cannot be read") from None
