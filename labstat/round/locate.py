"""Where a key of the plan stands in its file: no TOML parser tells, so the text is searched when a message needs it."""

from __future__ import annotations

import re

Path = tuple[str | int, ...]

_HEADER = re.compile(r"\s*(\[\[?)\s*([^\[\]]+?)\s*\]\]?\s*(?:#.*)?$")
_KEY = re.compile(r"\s*([A-Za-z0-9_\-.\"' ]+?)\s*=")


def line_of(text: str, path: Path) -> int | None:
    """The line (from 1) of the key at ``path``, or of the nearest table that holds it; ``None`` if nothing fits."""
    lines = text.split("\n")  # the line ends of TOML, and no others
    table: Path = ()
    counts: dict[tuple[str, ...], int] = {}
    best: tuple[int, int] | None = None
    for number, line in enumerate(lines, 1):
        header = _HEADER.match(line)
        if header:
            table = _table(_parts(header.group(2)), header.group(1) == "[[", counts)
            here = table
        else:
            key = _KEY.match(line)
            if key is None:
                continue
            here = (*table, *_parts(key.group(1)))
        if path[: len(here)] == here and (best is None or len(here) > best[0]):
            best = (len(here), number)
    if best is None:
        return None
    depth, number = best
    rest = path[depth:]
    return _inside(lines, number, rest) if rest and isinstance(rest[0], int) else number


def _parts(name: str) -> tuple[str, ...]:
    return tuple(part.strip().strip("\"'") for part in name.split("."))


def _table(parts: tuple[str, ...], is_list: bool, counts: dict[tuple[str, ...], int]) -> Path:
    """The path of a table with the current index behind each list of tables on the way."""
    if is_list:
        counts[parts] = counts.get(parts, -1) + 1
        for inner in [key for key in counts if len(key) > len(parts) and key[: len(parts)] == parts]:
            del counts[inner]
    path: list[str | int] = []
    for depth, part in enumerate(parts, 1):
        path.append(part)
        if parts[:depth] in counts:
            path.append(counts[parts[:depth]])
    return tuple(path)


def _inside(lines: list[str], number: int, rest: Path) -> int:
    """The line of the entry with a given index in an array that begins on line ``number``."""
    wanted, seen = rest[0], -1
    depth = 0
    for offset, line in enumerate(lines[number - 1 :]):
        for sign in line.split("#", 1)[0]:
            if sign == "{":
                seen += 1
                if seen == wanted:
                    return number + offset
            depth += (sign == "[") - (sign == "]")
        if depth <= 0:
            break
    return number
