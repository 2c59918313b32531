"""Problems as they are found: all of them, by analyte, with floods cut short and counted."""

from __future__ import annotations

import gc
import math
from collections.abc import Iterator
from contextlib import contextmanager

from labstat.round.model import Problem

MOST = 50
"""More problems than this of one analyte in one file are counted, not listed."""


def _place(problem: Problem) -> tuple[str, float]:
    """By file and line; what concerns no line comes last."""
    return problem.file, math.inf if problem.line is None else problem.line


@contextmanager
def no_garbage_collection() -> Iterator[None]:
    """Rows are many small objects that all stay: walking them again and again would take most of the time."""
    before = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if before:
            gc.enable()


class Problems:
    """Collects problems while a round is read. Those without an analyte make the round unusable."""

    __slots__ = ("_found", "_more", "_number", "_told")

    def __init__(self) -> None:
        self._found: list[Problem] = []
        self._told: set[Problem] = set()
        self._number: dict[tuple[str, str | None], int] = {}
        self._more: dict[tuple[str, str | None], int] = {}

    def add(
        self, file: str, line: int | None, column: str | None, value: str | None, what: str, remedy: str, *,
        analyte: str | None = None,
    ) -> None:
        """Note one problem; ``analyte`` is ``None`` for one that makes the whole round unusable."""
        problem = Problem(file, line, column, value, what, remedy, analyte)
        if problem in self._told:
            return  # an analyte that stands in the plan twice meets each problem twice
        key = (file, analyte)
        self._number[key] = self._number.get(key, 0) + 1
        if self._number[key] > MOST:
            self._more[key] = self._more.get(key, 0) + 1
            return
        self._told.add(problem)
        self._found.append(problem)

    def unusable(self) -> tuple[Problem, ...]:
        """What makes the whole round unusable, in the order in which it was found."""
        return tuple(problem for problem in self._all() if problem.analyte is None)

    def of_analytes(self) -> dict[str, tuple[Problem, ...]]:
        """The others, by analyte."""
        found: dict[str, list[Problem]] = {}
        for problem in self._all():
            if problem.analyte is not None:
                found.setdefault(problem.analyte, []).append(problem)
        return {analyte: tuple(sorted(listed, key=_place)) for analyte, listed in found.items()}

    def all(self) -> tuple[Problem, ...]:
        """Everything, those that make the round unusable first."""
        return tuple(sorted(self._all(), key=lambda problem: problem.analyte is not None))

    def _all(self) -> list[Problem]:
        rest = [
            Problem(file, None, None, None, f"{count} more problems like these are not listed", "mend these first",
                    analyte)
            for (file, analyte), count in self._more.items()
        ]
        return self._found + rest
