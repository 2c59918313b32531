"""All analytes of a round: computed, judged, drawn and written at once."""

from __future__ import annotations

import os
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from pathlib import Path

from labstat.batch.job import Job, Outcome, failed_outcome, stray_outcome, work
from labstat.batch.names import report_names
from labstat.batch.output import reserved
from labstat.batch.versions import versions
from labstat.batch.workers import run_all
from labstat.errors import ArgumentError
from labstat.record import as_bytes, round_record
from labstat.record.tables import tables
from labstat.report.model import OverviewEntry, RunContext
from labstat.report.overview import overview_report
from labstat.round.model import Problem, Round
from labstat.round.reading import read_round

Progress = Callable[[str, int, int], None]
"""Told the analyte that has ended, how many have, and how many there are."""

LARGEST_SEED = 2**63 - 1
FEWEST_RESAMPLES = 99
"""Fewer cannot hold the tails of any interval."""
MOST_RESAMPLES = 1_000_000


@dataclass(frozen=True, slots=True)
class RunReport:
    """What a run did.

    ``entries``: one an analyte, in the order of the plan, then the analytes that only the tables know. ``out``: the
    folder that was written. ``exit_status``: 0 when everything was computed, 1 when something could not be, for its
    rows or its data. ``problems``: every row that kept an analyte from being computed.
    """

    exit_status: int
    entries: tuple[OverviewEntry, ...]
    out: str
    problems: tuple[Problem, ...]


def run_round(
    folder: str | os.PathLike[str],
    *,
    out: str | os.PathLike[str] | None = None,
    only: Sequence[str] = (),
    workers: int | None = None,
    seed: int | None = None,
    resamples: int | None = None,
    progress: Progress | None = None,
) -> RunReport:
    """Compute a round folder and write its reports, its overview, results.json and the tables.

    ``out`` defaults to ``folder/out``; it is replaced as a whole, or left as it was when anything fails. ``only``
    names the analytes to compute (all when empty). ``workers`` defaults to the processors at hand; the results are the
    same for any number. ``seed`` and ``resamples`` stand in for the plan's.

    Raises :class:`~labstat.errors.RoundError` when the plan or a file cannot be used (nothing is computed or written),
    :class:`~labstat.batch.output.OutputError` when the output cannot be written there, and
    :class:`~labstat.errors.ArgumentError` for an argument that breaks its rule. An analyte that cannot be computed
    raises nothing: it is named in the result.
    """
    _check("workers", workers, least=1)
    _check("seed", seed, least=0, most=LARGEST_SEED)
    _check("resamples", resamples, least=FEWEST_RESAMPLES, most=MOST_RESAMPLES)
    if isinstance(only, str):
        raise ArgumentError("only", "must be a list of analyte names", only)
    read = read_round(Path(folder), only=only)
    context = _context(read, seed=seed, resamples=resamples, only=only)
    target = Path(folder) / "out" if out is None else Path(out)
    with reserved(target, folder=Path(folder)) as output:
        outcomes = _outcomes(read, context, workers=workers, progress=progress)
        output.publish(_files(outcomes, context, only))
        path = str(output.path)
    entries = tuple(outcome.entry for outcome in outcomes)
    problems = [problem for data in read.analytes for problem in data.problems]
    problems += [problem for name in sorted(read.stray) for problem in read.stray[name]]
    status = 1 if any(not outcome.complete for outcome in outcomes) else 0
    return RunReport(status, entries, path, tuple(problems))


def _check(argument: str, value: int | None, *, least: int, most: int | None = None) -> None:
    if value is None:
        return
    whole = isinstance(value, int) and not isinstance(value, bool)
    if not whole or value < least or (most is not None and value > most):
        upper = "" if most is None else f" and at most {most}"
        raise ArgumentError(argument, f"must be a whole number of at least {least}{upper}", value)


def _context(read: Round, *, seed: int | None, resamples: int | None, only: Sequence[str]) -> RunContext:
    plan = read.plan
    plan = replace(
        plan,
        seed=plan.seed if seed is None else seed,
        resamples=plan.resamples if resamples is None else resamples,
    )
    notes = read.notes
    if only:
        notes = (*notes, f"only these analytes were asked for: {', '.join(only)}")
    return RunContext(plan, read.inputs, versions(), plan.seed, plan.resamples, notes)


def _outcomes(
    read: Round, context: RunContext, *, workers: int | None, progress: Progress | None
) -> list[Outcome]:
    names = report_names([plan.name for plan in read.plan.analytes])
    jobs = [Job(data, context, f"reports/{names[data.plan.name]}") for data in read.analytes]
    ended = 0

    def done(job: Job) -> None:
        nonlocal ended
        ended += 1
        if progress is not None:
            progress(job.data.plan.name, ended, len(jobs))

    outcomes = run_all(
        work, jobs, workers=_workers(workers, len(jobs)), failed=failed_outcome, done=done,
        preload=["labstat.batch.job"],
    )
    return outcomes + [stray_outcome(name, read.stray[name]) for name in sorted(read.stray)]


def _workers(asked: int | None, jobs: int) -> int:
    if asked is not None:
        return asked
    at_hand = len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else os.cpu_count() or 1
    return max(1, min(at_hand, jobs))


def _files(outcomes: Sequence[Outcome], context: RunContext, only: Sequence[str]) -> dict[str, bytes]:
    records = [outcome.record for outcome in outcomes]
    files = {
        "overview.pdf": overview_report([outcome.entry for outcome in outcomes], context),
        "results.json": as_bytes(round_record(context, records, only=only)),
        **{f"tables/{name}": content for name, content in tables(records).items()},
    }
    for outcome in outcomes:
        if outcome.pdf is not None and outcome.entry.file is not None:
            files[outcome.entry.file] = outcome.pdf
    return files
