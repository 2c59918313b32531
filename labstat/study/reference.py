"""The reference study of one analyte: its groups, their limits, and the counts outside an interval in use."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from labstat.reference.adopted import outside_interval
from labstat.reference.limits import limits_of_group
from labstat.resample.seeds import derived_seed
from labstat.round.model import Adopted, AnalyteData, ReferenceData, ReferencePlan, RoundPlan
from labstat.study.results import GroupResult, NotComputed

Group = tuple[tuple[str, str], ...]


def reference_groups(
    data: AnalyteData, plan: RoundPlan
) -> tuple[tuple[GroupResult, ...], tuple[NotComputed, ...]]:
    """Limits of each group of the plan's partition, in the order of the groups' names."""
    asked, reference = data.plan.reference, data.reference
    if asked is None or reference is None:
        return (), ()
    groups: list[GroupResult] = []
    missing: list[NotComputed] = []
    for group, members in _partitions(reference, asked).items():
        made = _group(group, reference.values[members], asked, data, plan)
        if made.limits.failure is not None:
            missing.append(NotComputed("reference", words(group), made.limits.failure))
        groups.append(made)
    return tuple(groups), tuple(missing)


def words(group: Group) -> str:
    """A group in words: "sex F, age adult"; empty for everyone."""
    return ", ".join(f"{column} {value}" for column, value in group)


def _partitions(reference: ReferenceData, asked: ReferencePlan) -> dict[Group, npt.NDArray[np.intp]]:
    labels = [
        tuple((column, reference.columns[column][row]) for column in asked.partition)
        for row in range(len(reference.subjects))
    ]
    return {
        group: np.flatnonzero([label == group for label in labels]) for group in sorted(set(labels))
    }


def _group(
    group: Group, values: npt.NDArray[np.float64], asked: ReferencePlan, data: AnalyteData, plan: RoundPlan
) -> GroupResult:
    limits = limits_of_group(
        values, probabilities=asked.limits, method=asked.method, interval=asked.interval, level=plan.limit_level,
        resamples=plan.resamples, seed=derived_seed(plan.seed, data.plan.name, "reference", words(group)),
        minimum_n=asked.minimum_n,
    )
    adopted = _adopted(group, asked)
    outside = None
    if adopted is not None and values.size:
        outside = outside_interval(values, low=adopted.low, high=adopted.high)
    return GroupResult(dict(group), limits, np.sort(values), adopted, outside)


def _adopted(group: Group, asked: ReferencePlan) -> Adopted | None:
    """The interval in use for a group: the one whose conditions all hold, the most specific first."""
    fitting = [adopted for adopted in asked.adopted if adopted.where.items() <= dict(group).items()]
    return max(fitting, key=lambda adopted: len(adopted.where), default=None)
