"""What a worker does: run one case in a folder, and tell how it went without ever raising."""

from __future__ import annotations

import socket
import tempfile
import time
import traceback
from dataclasses import dataclass, field
from pathlib import Path
from typing import Literal

import oceanbox
from oceanbox.config import Config
from oceanbox.errors import InterruptedRun, OceanboxError
from oceanbox.study.locking import waiting_for

__all__ = ["Answer", "Task", "run_here", "run_task"]

RETURNED = ("result.nc", "state.nc", "config.yaml", "snapshots.nc")
TOKEN = ".token"


@dataclass(frozen=True)
class Task:
    """A case on its way to a worker.

    key            identity of the case
    config         its configuration
    command        what to do
    folder         its folder, absolute
    start          the state file it starts from, or None
    token          what the file `.token` in the study's folder says, by which a worker knows a shared folder; '' where
                   the worker is on the same machine
    start_bytes    the contents of the state file, for workers that cannot see it
    """

    key: str
    config: Config
    command: Literal["equilibrate", "evolve"]
    folder: Path
    start: Path | None = None
    token: str = ""
    start_bytes: bytes | None = None
    version: str = oceanbox.__version__


@dataclass(frozen=True)
class Answer:
    """How a task went.

    failure    '' if it went well, else the name of the error, or 'interrupted'
    reason     the failure in words
    seconds    wall time
    files      contents of the written files by name, where the folder is not shared
    """

    key: str
    failure: str = ""
    reason: str = ""
    seconds: float = 0.0
    files: dict[str, bytes] = field(default_factory=dict)


def run_here(task: Task) -> Answer:
    """Run a task in its folder, which this process can write to."""
    from oceanbox.experiment.api import equilibrate, evolve

    began = time.monotonic()
    failure = reason = ""
    command = equilibrate if task.command == "equilibrate" else evolve
    try:
        task.folder.mkdir(parents=True, exist_ok=True)
        with waiting_for(task.folder):
            command(task.config, task.folder, task.start)
    except InterruptedRun as error:
        failure, reason = "interrupted", str(error)
    except OceanboxError as error:
        failure, reason = type(error).__name__, str(error)
    except Exception as error:  # a defect or a full disk must not stop the other cases
        failure, reason = type(error).__name__, f"{type(error).__name__}: {error}"
        trace = traceback.format_exc()
        _leave(task.folder, trace)
    return Answer(task.key, failure, reason, time.monotonic() - began)


def _leave(folder: Path, trace: str) -> None:
    """Keep the trace of an unforeseen failure, if the disk still takes it."""
    try:
        (folder / "failure.txt").write_text(trace, encoding="utf-8")
    except OSError:
        return


def run_task(task: Task) -> Answer:
    """Run a task on a worker that may or may not see the study's folder; what it cannot see, it sends."""
    if task.version != oceanbox.__version__:
        return Answer(
            task.key,
            "WrongVersion",
            f"worker on {socket.gethostname()} has oceanbox {oceanbox.__version__}; the study was started with "
            f"{task.version}; install the same version everywhere",
        )
    if _sees(task):
        return run_here(task)
    with tempfile.TemporaryDirectory(prefix="oceanbox-") as name:
        folder = Path(name) / "case"
        start = None
        if task.start_bytes is not None:
            start = Path(name) / "start.nc"
            start.write_bytes(task.start_bytes)
        answer = run_here(Task(task.key, task.config, task.command, folder, start))
        files = {file: (folder / file).read_bytes() for file in RETURNED if (folder / file).exists()}
        return Answer(task.key, answer.failure, answer.reason, answer.seconds, files)


def _sees(task: Task) -> bool:
    """Whether the study's folder on this machine is the very one the study was started in."""
    if not task.token:
        return True
    try:
        return (task.folder.parent.parent / TOKEN).read_text(encoding="utf-8") == task.token
    except OSError:
        return False
