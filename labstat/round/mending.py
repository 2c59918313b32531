"""The errors of a plan's keys: those that fit what was written, and a plan that can be read on without them."""

from __future__ import annotations

import copy
from typing import Any

from pydantic import ValidationError

from labstat.round import schema
from labstat.round.locate import Path

NO_ALTERNATIVE = "no alternative"
"""The kind of an error where several types are allowed and the value has none of them."""

_STAND_INS: dict[str, Any] = {
    "seed": 0, "title": "?", "laboratory": "?", "prepared_by": "?", "reviewer": "?", "name": "?", "unit": "?",
    "comparative": "?x", "candidate": "?y",
}
_MOST_ROUNDS = 100


def fitting(error: ValidationError, raw: Any) -> list[tuple[Path, dict[str, Any]]]:
    """Each error with the path of its key.

    Where a key takes one of several types, pydantic tells what is wrong with each; kept is what is wrong with the type
    that was written.
    """
    kept: list[tuple[Path, dict[str, Any]]] = []
    refused: dict[Path, dict[str, Any]] = {}
    for told in error.errors():
        item: dict[str, Any] = dict(told)
        path, fits = _walk(raw, told["loc"], missing=told["type"] == "missing")
        if fits:
            kept.append((path, item))
        else:
            refused.setdefault(path, {**item, "type": NO_ALTERNATIVE})
    told_of = [path for path, _ in kept]
    for path, item in refused.items():
        if not any(other[: len(path)] == path for other in told_of):
            kept.append((path, item))
    return kept


def _walk(raw: Any, loc: tuple[int | str, ...], *, missing: bool) -> tuple[Path, bool]:
    """The path of keys in pydantic's place, and whether every alternative named on the way fits what was written.

    The name of an alternative is told from a key by this: the value there has no such key.
    """
    path: list[int | str] = []
    place: Any = raw
    for number, part in enumerate(loc):
        last = number == len(loc) - 1
        in_list = isinstance(part, int) and isinstance(place, list) and part < len(place)
        if in_list or (isinstance(place, dict) and part in place):
            place = place[part]
        elif missing and last:
            pass
        else:
            if not _fits(place, str(part)):
                return tuple(path), False
            continue
        path.append(part)
    return tuple(path), True


def _fits(value: Any, alternative: str) -> bool:
    if alternative in ("str", "constrained-str"):
        return isinstance(value, str)
    if alternative == "FileKeys":
        return isinstance(value, dict)
    if alternative.startswith("list["):
        return isinstance(value, list)
    if alternative in ("float", "constrained-float"):
        return isinstance(value, (int, float)) and not isinstance(value, bool)
    if alternative.startswith("literal["):
        return isinstance(value, str)
    return not isinstance(value, (str, dict, list, int, float, bool))


def mended(raw: dict[str, Any]) -> schema.PlanKeys | None:
    """The plan without what is wrong in it, required keys stood in for; ``None`` if that fails."""
    plan = copy.deepcopy(raw)
    for _ in range(_MOST_ROUNDS):
        try:
            return schema.PlanKeys.model_validate(plan)
        except ValidationError as error:
            # from the back, so that the numbers of what stands before in a list stay true
            for path in sorted({path for path, _ in fitting(error, plan)}, key=_key, reverse=True):
                _mend(plan, path)
    return None


def _key(path: Path) -> list[tuple[int, int, str]]:
    return [(0, part, "") if isinstance(part, int) else (1, 0, part) for part in path]


def _mend(plan: dict[str, Any], path: Path) -> None:
    if path == ("round",):
        plan["round"] = {}
        return
    place: Any = plan
    try:
        for part in path[:-1]:
            place = place[part]
    except (KeyError, IndexError):
        return  # what held it has been left out already
    last: Any = path[-1]
    required = path[0] == "round" or (path[0] == "analyte" and len(path) in (3, 4))
    if required and isinstance(last, str) and last in _STAND_INS and len(path) != 1:
        place[last] = _STAND_INS[last]
    elif isinstance(place, list) or last in place:
        del place[last]
    elif len(path) > 1:
        _mend(plan, path[:-1])  # a required key is missing: the entry that should hold it cannot be read
