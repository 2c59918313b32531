"""A new round folder: a commented plan and small example tables, invented, to be written over."""

from __future__ import annotations

from importlib.resources import files
from pathlib import Path

from labstat.errors import ArgumentError

FILES = ("round.toml", "comparison.csv", "reference.csv", "allowances.csv")
"""What a new round holds; each is a file of the package, so that what is shipped is what is written."""


def write_start(folder: str | Path) -> None:
    """Write a new round into ``folder``, which must not exist or be empty; nothing is ever written over.

    Raises :class:`ArgumentError` where the folder holds something, is no folder, or cannot be written.
    """
    path = Path(folder)
    try:
        if path.exists() and not path.is_dir():
            raise ArgumentError("folder", "must be a folder", str(folder))
        path.mkdir(parents=True, exist_ok=True)
        if any(path.iterdir()):
            raise ArgumentError("folder", "must be new or empty", str(folder))
        source = files("labstat.round").joinpath("templates")
        for name in FILES:
            # "x": a file that appeared meanwhile is somebody's work
            with path.joinpath(name).open("xb") as file:
                file.write(source.joinpath(name).read_bytes())
    except OSError as error:
        raise ArgumentError("folder", f"cannot be written ({error.strerror})", str(folder)) from None


__all__ = ["FILES", "write_start"]
