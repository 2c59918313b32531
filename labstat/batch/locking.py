"""A lock that a killed process cannot leave behind, where the system has one."""

from __future__ import annotations

import os
from contextlib import suppress
from dataclasses import dataclass
from pathlib import Path

try:
    import fcntl
except ImportError:  # no such lock on this system: an exclusive file stands in, and a killed run leaves it behind
    fcntl = None  # type: ignore[assignment]


@dataclass(frozen=True, slots=True)
class Locked:
    """A lock that is held."""

    path: Path
    handle: int

    def release(self) -> None:
        with suppress(OSError):
            self.path.unlink()
        os.close(self.handle)


def locked(path: Path) -> Locked | None:
    """Hold the lock ``path``, or ``None`` when another process holds it. Never waits."""
    if fcntl is None:
        try:
            return Locked(path, os.open(path, os.O_CREAT | os.O_EXCL | os.O_RDWR))
        except FileExistsError:
            return None
    while True:
        handle = os.open(path, os.O_CREAT | os.O_RDWR | os.O_CLOEXEC, 0o666)
        try:
            fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)
            # its last holder may have removed the file between our opening and locking it
            if path.exists() and os.path.samestat(os.fstat(handle), path.stat()):
                return Locked(path, handle)
        except BlockingIOError:
            os.close(handle)
            return None
        except OSError:
            os.close(handle)
            raise
        os.close(handle)
