"""The criteria of a plan as one hash, so that a change after their approval shows."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Iterable
from typing import Any

from labstat.round.model import AnalytePlan


def criteria_hash(analytes: Iterable[AnalytePlan]) -> str:
    """SHA-256 of the allowances with their sources, in an order that does not depend on the plan's."""
    criteria: list[list[Any]] = [
        [
            analyte.name, analyte.unit, analyte.comparison.comparative, list(analyte.comparison.candidates), level.at,
            None if level.allowable is None else level.allowable.text,
            None if level.total_error is None else level.total_error.text,
            level.source,
        ]
        for analyte in analytes if analyte.comparison is not None
        for level in analyte.comparison.levels
        if level.allowable is not None or level.total_error is not None
    ]
    criteria.sort(key=lambda entry: (entry[0], entry[4], json.dumps(entry)))
    text = json.dumps(criteria, ensure_ascii=True, separators=(",", ":"))
    return hashlib.sha256(text.encode("ascii")).hexdigest()
