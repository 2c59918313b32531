"""What is wrong with a key of the plan, in words."""

from __future__ import annotations

from typing import Any, cast

from pydantic import BaseModel

from labstat.round import schema
from labstat.round.locate import Path
from labstat.round.mending import NO_ALTERNATIVE
from labstat.round.naming import did_you_mean


def key_words(path: Path) -> str:
    """A path in words: ``analyte[2].comparison.levels[1].source``, counted from 1 as people do."""
    words = ""
    for part in path:
        words += f"[{part + 1}]" if isinstance(part, int) else ("." if words else "") + part
    return words


def value_of(item: Any) -> str | None:
    """The offending value as it stands, where it is a single one."""
    value = item.get("input")
    if item["type"] in ("missing", "extra_forbidden") and isinstance(value, (dict, list)):
        return None
    if isinstance(value, (dict, list, BaseModel)):
        return None
    return str(value)


def in_words(path: Path, item: Any) -> tuple[str, str]:
    """What is wrong and what to do."""
    kind, context = item["type"], item.get("ctx", {})
    if kind == "missing":
        return "is missing", "add it"
    if kind == "extra_forbidden":
        known = _known_keys(path[:-1])
        return f"is no key here{did_you_mean(str(path[-1]), known)}", f"keys here: {', '.join(known)}"
    if kind == "literal_error":
        return f"must be {context['expected']}", "choose one of these"
    if kind == NO_ALTERNATIVE:
        return "is of the wrong type", "correct the value"
    names = {
        "string_type": "must be text", "int_type": "must be a whole number", "float_type": "must be a number",
        "list_type": "must be a list", "dict_type": "must be a table", "model_type": "must be a table",
        "finite_number": "must be a finite number", "date_type": "must be a date or text",
        "bool_type": "must be true or false",
    }
    if kind == "string_too_short":
        return "is blank", "fill it in, or leave the key out"
    if kind in names:
        return names[kind], "write it in quotes" if kind == "string_type" else "correct the value"
    said = cast("str", item["msg"]).replace("Input should", "must").replace("Value should", "must")
    return said, "correct the value"


def _known_keys(path: Path) -> tuple[str, ...]:
    """The keys that the schema knows at a place."""
    places: dict[tuple[str, ...], type[BaseModel]] = {
        (): schema.PlanKeys, ("round",): schema.RoundKeys, ("round", "approved"): schema.ApprovalKeys,
        ("files",): schema.FilesKeys, ("defaults", "comparison"): schema.ComparisonKeys,
        ("defaults", "reference"): schema.ReferenceKeys,
        ("defaults", "comparison", "levels"): schema.LevelKeys, ("defaults",): schema.DefaultsKeys,
        ("analyte",): schema.AnalyteKeys,
        ("analyte", "comparison"): schema.ComparisonKeys, ("analyte", "reference"): schema.ReferenceKeys,
        ("analyte", "comparison", "levels"): schema.LevelKeys, ("analyte", "elsewhere"): schema.ElsewhereKeys,
    }
    model = places.get(tuple(part for part in path if isinstance(part, str)), schema.FileKeys)
    return tuple(model.model_fields)
