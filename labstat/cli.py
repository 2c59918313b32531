"""The commands. Words typed by a person; no statistics, no layout.

Exit status: 0 all computed, 1 something could not be computed, 2 unusable (nothing is written), 130 interrupted.
"""

from __future__ import annotations

import signal
import sys
import traceback
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, NoReturn

import click

from labstat import __version__
from labstat.errors import LabstatError, RoundError
from labstat.screen import forgiving_streams, printable, progress_bar, say, tell

if TYPE_CHECKING:
    from labstat.batch import RunReport
    from labstat.report.model import OverviewEntry

UNUSABLE = 2
INTERRUPTED = 130
ENDED = 143


class _EndedError(KeyboardInterrupt):
    """Asked to end by the system: cleaned up after like an interruption."""


class _Commands(click.Group):
    """The group of commands: an interruption is one line, whatever was running."""

    def invoke(self, ctx: click.Context) -> object:
        try:
            return super().invoke(ctx)
        except _EndedError:
            tell("ended")
            return ENDED
        except KeyboardInterrupt:
            tell("interrupted")
            return INTERRUPTED


@click.group(cls=_Commands, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(__version__, prog_name="labstat", message="%(prog)s %(version)s")
def cli() -> None:
    """Validation statistics for a clinical laboratory.

    A round is a folder with a plan (round.toml) and result tables. Proposals are made to the laboratory's director, who
    alone decides. Not a medical device, and no substitute for qualified review: the rules of your accreditation decide.
    """


@cli.command()
@click.argument("directory", type=click.Path(path_type=Path), metavar="DIR")
def start(directory: Path) -> int:
    """Write a new round folder DIR with a commented plan and small example tables."""
    from labstat.round.start import write_start  # noqa: PLC0415

    write_start(directory)
    say(f"new round: {directory}")
    tell(f"next: edit {directory / 'round.toml'}, then: labstat check {directory}")
    return 0


@cli.command()
@click.argument("folder", type=click.Path(path_type=Path), metavar="ROUND")
def check(folder: Path) -> int:
    """Read the round in folder ROUND, compute nothing, and print what was understood and every problem.

    Exit status: 0 clean, 1 some analytes affected, 2 unusable.
    """
    from labstat.round.reading import read_round  # noqa: PLC0415
    from labstat.round.understood import describe  # noqa: PLC0415

    try:
        read = read_round(folder)
    except RoundError as error:
        for problem in error.problems:
            say(str(problem))
        return UNUSABLE
    say(describe(read))
    problems = [p for data in read.analytes for p in data.problems]
    problems += [p for name in sorted(read.stray) for p in read.stray[name]]
    for problem in problems:
        say(str(problem))
    return 1 if problems else 0


@cli.command()
@click.argument("folder", type=click.Path(path_type=Path), metavar="ROUND")
@click.option("--out", type=click.Path(path_type=Path), metavar="DIR", help="Where to write  [default: ROUND/out]")
@click.option("--only", multiple=True, metavar="ANALYTE", help="Compute this analyte only; may be repeated")
@click.option("--workers", type=click.IntRange(min=1), metavar="N", help="Processes  [default: all processors]")
@click.option("--seed", type=click.IntRange(0, 2**63 - 1), metavar="S", help="In place of the plan's")
@click.option("--resamples", type=click.IntRange(99, 1_000_000), metavar="B", help="In place of the plan's")
def run(
    folder: Path, out: Path | None, only: tuple[str, ...], workers: int | None, seed: int | None, resamples: int | None
) -> int:
    """Compute the round in folder ROUND and write its reports.

    The output folder is replaced as a whole, or left as it was when anything fails.

    Exit status: 0 all computed, 1 something could not be computed, 2 unusable and nothing written.
    """
    from labstat.batch import run_round  # noqa: PLC0415

    signal.signal(signal.SIGTERM, _end)
    with progress_bar() as progress:
        report = run_round(
            folder, out=out, only=only, workers=workers, seed=seed, resamples=resamples, progress=progress
        )
    for problem in report.problems:
        tell(str(problem))
    _summary(report)
    return report.exit_status


def _end(number: int, frame: object) -> NoReturn:
    raise _EndedError


def _summary(report: RunReport) -> None:
    """One line an analyte, and where the reports are."""
    width = max((len(printable(entry.name)) for entry in report.entries), default=0)
    for entry in report.entries:
        say(f"{printable(entry.name):<{width}}  {_line(entry)}".rstrip())
    say(f"reports: {Path(report.out) / 'overview.pdf'}")


def _line(entry: OverviewEntry) -> str:
    if entry.judgement is None:
        return f"not computed: {entry.reason}"
    line = f"{entry.judgement.situation}: {entry.judgement.next_action}"
    return line if entry.reason is None else f"{line}; not computed: {entry.reason}"


def main(arguments: Sequence[str] | None = None) -> NoReturn:
    """Run a command and leave with its exit status."""
    forgiving_streams()
    sys.exit(_status(arguments))


def _status(arguments: Sequence[str] | None) -> int:
    try:
        result = cli.main(args=arguments, prog_name="labstat", standalone_mode=False)
        return result if isinstance(result, int) else 0
    except click.ClickException as error:
        error.show()
        return UNUSABLE
    except RoundError as error:
        for problem in error.problems:
            tell(str(problem))
        return UNUSABLE
    except LabstatError as error:
        tell(str(error), getattr(error, "hint", ""))
        return UNUSABLE
    except Exception:
        traceback.print_exc()
        tell("this is a fault of labstat, nothing was written", "report it with the lines above")
        return UNUSABLE
