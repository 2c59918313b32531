"""What a person sees while a command runs: data on standard output, the rest on standard error."""

from __future__ import annotations

import os
import sys
import unicodedata
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from typing import TextIO


def say(text: str = "") -> None:
    """A line of data."""
    _write(sys.stdout, text)


def tell(text: str, hint: str = "") -> None:
    """A message: one sentence, and the hint on a line of its own."""
    _write(sys.stderr, text)
    if hint:
        _write(sys.stderr, f"hint: {hint}")


def _write(stream: TextIO, text: str) -> None:
    try:
        stream.write(f"{printable(text)}\n")
        stream.flush()
    except BrokenPipeError:
        # nobody reads on (``| head``): the work goes on, and Python's own flush at exit must not fail either
        os.dup2(os.open(os.devnull, os.O_WRONLY), stream.fileno())


def printable(text: str) -> str:
    """Text from a table must not steer a terminal: control characters other than line breaks become U+FFFD."""
    return "".join(c if c == "\n" or unicodedata.category(c)[0] != "C" else "\ufffd" for c in text)


def forgiving_streams() -> None:
    """Signs that the terminal's encoding lacks are replaced, instead of ending the program."""
    for stream in (sys.stdout, sys.stderr):
        reconfigure = getattr(stream, "reconfigure", None)
        if reconfigure is not None:
            reconfigure(errors="replace")


@contextmanager
def progress_bar() -> Iterator[Callable[[str, int, int], None]]:
    """A bar on standard error, on a terminal only."""
    from rich.console import Console  # noqa: PLC0415  # 60 ms that --help should not wait for
    from rich.markup import escape  # noqa: PLC0415
    from rich.progress import BarColumn, MofNCompleteColumn, Progress, TextColumn, TimeElapsedColumn  # noqa: PLC0415

    console = Console(stderr=True)
    columns = (BarColumn(), MofNCompleteColumn(), TimeElapsedColumn(), TextColumn("{task.description}"))
    with Progress(*columns, console=console, transient=True, disable=not console.is_terminal) as bar:
        task = bar.add_task("reading", total=None)

        def done(name: str, ended: int, total: int) -> None:
            bar.update(task, completed=ended, total=total, description=escape(printable(name)))

        yield done
