"""Writing a run's output at once: complete or not at all, and never over what somebody else put there.

Everything is written into a folder beside the output, flushed to the disk and then moved into its place. The previous
output is moved aside first and comes back when the move fails; a run that was killed in between is cleared up by the
next one.
"""

from __future__ import annotations

import hashlib
import json
import os
import re
import shutil
from collections.abc import Iterator, Mapping, Sequence
from contextlib import contextmanager, suppress
from dataclasses import dataclass
from pathlib import Path

from labstat.batch.locking import Locked, locked
from labstat.errors import LabstatError

SUMS = "SHA256SUMS"
_MARK = "labstat results"
_WRITTEN = re.compile(r"overview\.pdf|results\.json|reports/[^/]+\.pdf|tables/[^/]+\.csv|tables/README\.txt")
_CLUTTER = frozenset({".DS_Store", "Thumbs.db", "desktop.ini"})  # left by desktops, nobody's work


class OutputError(LabstatError):
    """The output folder cannot be used; ``hint`` says what to do."""

    def __init__(self, message: str, hint: str = "") -> None:
        self.message = message
        self.hint = hint
        super().__init__(message)

    def __reduce__(self) -> tuple[type, tuple[str, str]]:
        return type(self), (self.message, self.hint)


@dataclass(frozen=True, slots=True)
class Output:
    """An output folder held by one run."""

    path: Path

    @property
    def _new(self) -> Path:
        return self.path.with_name(f".{self.path.name}.labstat-new")

    @property
    def _old(self) -> Path:
        return self.path.with_name(f".{self.path.name}.labstat-old")

    def publish(self, files: Mapping[str, bytes]) -> None:
        """Put ``files`` (relative path, content) in place of what was there."""
        try:
            self._write(files)
            refuse_foreign(self.path)  # somebody may have put a file there while the round was computed
            self._swap()
        except OSError as error:
            raise _unwritable(self.path, error) from error
        finally:
            shutil.rmtree(self._new, ignore_errors=True)

    def _write(self, files: Mapping[str, bytes]) -> None:
        self._new.mkdir()
        sums = "".join(f"{_sha256(files[name])}  {name}\n" for name in sorted(files))
        for name, content in {**files, SUMS: sums.encode()}.items():
            target = self._new / name
            target.parent.mkdir(parents=True, exist_ok=True)
            with target.open("xb") as stream:
                stream.write(content)
                stream.flush()
                os.fsync(stream.fileno())
        for folder in (self._new, *(path for path in self._new.rglob("*") if path.is_dir())):
            _sync_folder(folder)

    def _swap(self) -> None:
        had = self.path.exists()
        if had:
            self.path.rename(self._old)
        try:
            self._new.rename(self.path)
        except BaseException:
            if had and not self.path.exists():
                self._old.rename(self.path)
            raise
        _sync_folder(self.path.parent)
        shutil.rmtree(self._old, ignore_errors=True)

    def recover(self) -> None:
        """Clear up after a run that was killed: the previous output comes back if it had been moved aside."""
        if self._old.is_dir() and not self.path.exists():
            self._old.rename(self.path)
        for left in (self._old, self._new):
            if left.is_dir() and not left.is_symlink():
                shutil.rmtree(left)


@contextmanager
def reserved(out: Path, *, folder: Path) -> Iterator[Output]:
    """Hold an output folder for a run of the round in ``folder``.

    Raises :class:`OutputError` when the folder is the round itself or holds it, is held by another run, cannot be
    written, or contains anything that labstat did not write or that was changed since (a signed report, say).
    """
    path = out.resolve()
    round_folder = folder.resolve()
    if path == round_folder or path in round_folder.parents:
        raise OutputError(f"the output would replace the round itself: {out}", "choose another folder with --out")
    refuse_foreign(path)
    made = _parents(path)
    lock: Locked | None = None
    try:
        try:
            lock = locked(path.with_name(f".{path.name}.labstat-lock"))
        except OSError as error:
            raise _unwritable(out, error) from error
        if lock is None:
            raise OutputError(f"another run is writing this output: {out}", "wait for it, or choose another folder")
        output = Output(path)
        try:
            output.recover()
        except OSError as error:
            raise _unwritable(out, error) from error
        refuse_foreign(path)
        yield output
    finally:
        if lock is not None:
            lock.release()
        for parent in made:  # innermost first; stays when something is in it
            with suppress(OSError):
                parent.rmdir()


def _parents(path: Path) -> list[Path]:
    """Make the folders above ``path``; returns the ones that were made, innermost first."""
    missing = [parent for parent in path.parents if not parent.exists()]
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise _unwritable(path, error) from error
    return missing


def refuse_foreign(path: Path) -> None:
    """Raise when replacing ``path`` would destroy what labstat did not write, or what was changed since."""
    if not path.exists():
        return
    if not path.is_dir():
        raise OutputError(f"the output is a file, not a folder: {path}", "choose another folder with --out")
    try:
        found = sorted(p.relative_to(path).as_posix() for p in path.rglob("*") if p.is_symlink() or not p.is_dir())
        found = [name for name in found if name.rsplit("/", 1)[-1] not in _CLUTTER]
        if not found:
            return
        if not _is_ours(path):
            raise OutputError(
                f"the output folder is not empty and was not written by labstat: {path}",
                "choose another folder with --out",
            )
        sums = _sums(path, found)
        for name in found:
            if name == SUMS:
                continue
            kept = "move it elsewhere or choose another folder with --out: labstat replaces the whole folder"
            if name not in sums:
                raise OutputError(f"the output folder holds a file that labstat did not write: {path / name}", kept)
            if (path / name).is_symlink() or sums[name] != _sha256((path / name).read_bytes()):
                raise OutputError(f"a file was changed since labstat wrote it: {path / name}", kept)
    except OSError as error:
        raise _unwritable(path, error) from error


def _is_ours(path: Path) -> bool:
    try:
        record = json.loads((path / "results.json").read_bytes())
    except (OSError, ValueError):
        return False
    return isinstance(record, dict) and str(record.get("format", "")).startswith(_MARK)


def _sums(path: Path, found: Sequence[str]) -> dict[str, str]:
    """What the previous run wrote, file by file; where its list is gone, what bears the name of something written."""
    try:
        lines = (path / SUMS).read_text(encoding="utf-8").splitlines()
    except (FileNotFoundError, UnicodeDecodeError):
        return {name: _sha256((path / name).read_bytes()) for name in found if _WRITTEN.fullmatch(name)}
    return {name: digest for digest, _, name in (line.partition("  ") for line in lines)}


def _sha256(content: bytes) -> str:
    return hashlib.sha256(content).hexdigest()


def _sync_folder(folder: Path) -> None:
    """Flush a folder's entries; some systems cannot open a folder for that, and then there is nothing to flush."""
    with suppress(PermissionError):
        handle = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)


def _unwritable(path: Path, error: OSError) -> OutputError:
    return OutputError(
        f"the output cannot be written: {path}: {error.strerror or error}", "choose another folder with --out"
    )
