"""The one family of exceptions that labstat raises on purpose."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from labstat.round.model import Problem


class LabstatError(Exception):
    """Base of everything that labstat raises on purpose."""


class ArgumentError(LabstatError, ValueError):
    """An argument breaks its rule; the message gives argument, rule and the value received."""

    def __init__(self, argument: str, rule: str, value: object) -> None:
        self.argument = argument
        self.rule = rule
        self.value = value
        super().__init__(f"{argument} {rule}: {value!r}")

    def __reduce__(self) -> tuple[type, tuple[str, str, object]]:
        return type(self), (self.argument, self.rule, self.value)


class NotComputableError(LabstatError):
    """The data are well formed, but the statistic does not exist for them (the message says why)."""


class RoundError(LabstatError):
    """A round folder cannot be used as it is; ``problems`` lists everything that was found."""

    def __init__(self, problems: Sequence[Problem]) -> None:
        self.problems = tuple(problems)
        super().__init__("\n".join(str(problem) for problem in self.problems))

    def __reduce__(self) -> tuple[type, tuple[tuple[Problem, ...]]]:
        return type(self), (self.problems,)
