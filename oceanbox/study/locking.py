"""Locks that die with the process that holds them."""

from __future__ import annotations

import contextlib
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from oceanbox.errors import ResultConflict

try:
    import fcntl
except ImportError:  # a system without this kind of lock: nothing is locked
    fcntl = None  # type: ignore[assignment]

__all__ = ["alone_in", "waiting_for"]


@contextmanager
def alone_in(folder: Path) -> Iterator[None]:
    """Hold the folder of a study.  Raises ResultConflict if another process is at work in it."""
    with (folder / ".lock").open("w") as file:
        if fcntl is not None:
            try:
                fcntl.flock(file, fcntl.LOCK_EX | fcntl.LOCK_NB)
            except OSError as error:
                raise ResultConflict(
                    f"{folder}: another process is running a study there; wait for it or choose another folder with --into"
                ) from error
        yield


@contextmanager
def waiting_for(folder: Path) -> Iterator[None]:
    """Hold the folder of a case, waiting while a worker that was given up for lost is still writing in it."""
    with (folder / ".lock").open("w") as file:
        if fcntl is not None:
            with contextlib.suppress(OSError):  # a file system without locks
                fcntl.flock(file, fcntl.LOCK_EX)
        yield
