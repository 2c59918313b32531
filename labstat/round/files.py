"""The files of a round: found inside its folder, hashed, and read as tables."""

from __future__ import annotations

import hashlib
from collections.abc import Sequence
from pathlib import Path, PurePosixPath, PureWindowsPath

from labstat.round.collecting import Problems
from labstat.round.decoding import UndecodableError, decode
from labstat.round.grid import Grid, UnreadableError, read_text_table
from labstat.round.model import InputFile
from labstat.round.schema import FileKeys, Files

BOOKS = (".xlsx", ".xlsm")


class Folder:
    """A round's folder; remembers what was read from it, with its hash, and what was noticed."""

    __slots__ = ("_inputs", "_problems", "folder", "notes")

    def __init__(self, folder: Path, problems: Problems) -> None:
        self.folder = folder
        self.notes: list[str] = []
        self._problems = problems
        self._inputs: dict[str, InputFile] = {}

    @property
    def inputs(self) -> tuple[InputFile, ...]:
        return tuple(self._inputs.values())

    def bytes_of(self, path: str, asked_by: str) -> bytes | None:
        """The content of a file inside the folder; ``None`` with a problem when there is none."""
        # a plan may come from elsewhere: it must not make the program read outside its folder
        pure = PurePosixPath(path.replace("\\", "/"))
        if pure.is_absolute() or PureWindowsPath(path).drive or ".." in pure.parts:
            self._problems.add("round.toml", None, asked_by, path, "lies outside the round's folder", "copy it into it")
            return None
        full = self.folder.joinpath(*pure.parts)
        try:
            data = full.read_bytes()
        except FileNotFoundError:
            self._problems.add(path, None, None, None, "this file does not exist", f"add it, or correct {asked_by}")
            return None
        except (OSError, ValueError) as error:
            why = getattr(error, "strerror", None) or error
            self._problems.add(path, None, None, None, f"cannot be read ({why})", "check the file")
            return None
        self._inputs[path] = InputFile(str(pure), hashlib.sha256(data).hexdigest())
        return data

    def text_of(self, path: str, asked_by: str, *, encoding: str | None = None) -> str | None:
        """The file as text; ``None`` with a problem."""
        data = self.bytes_of(path, asked_by)
        if data is None:
            return None
        try:
            text, note = decode(data, encoding=encoding)
        except UndecodableError as error:
            self._problems.add(path, None, None, None, f"cannot be decoded ({error})", "set encoding in [files]")
            return None
        if note is not None:
            self.notes.append(f"{path}: {note}")
        return text

    def grid_of(self, keys: FileKeys, asked_by: str) -> Grid | None:
        """The file as a table of text; ``None`` with a problem."""
        try:
            if keys.path.lower().endswith(BOOKS):
                # openpyxl is loaded only where a workbook is read
                from labstat.round.workbook import read_workbook  # noqa: PLC0415

                data = self.bytes_of(keys.path, asked_by)
                return None if data is None else read_workbook(
                    keys.path, data, sheet=keys.sheet, decimal=keys.decimal or "."
                )
            text = self.text_of(keys.path, asked_by, encoding=keys.encoding)
            if text is None:
                return None
            delimiter = "\t" if keys.delimiter is None and keys.path.lower().endswith(".tsv") else keys.delimiter
            return read_text_table(keys.path, text, delimiter=delimiter)
        except UnreadableError as error:
            self._problems.add(keys.path, error.line, None, None, error.what, error.remedy)
            return None


def listed(files: Files | None, *, default: str, folder: Path, needed: bool) -> tuple[FileKeys, ...]:
    """The files of one table as keys. A table that the plan does not name is the default file, if needed or there."""
    if files is None:
        return (FileKeys(path=default),) if needed or folder.joinpath(default).is_file() else ()
    entries: Sequence[str | FileKeys] = files if isinstance(files, list) else [files]
    return tuple(FileKeys(path=entry) if isinstance(entry, str) else entry for entry in entries)
