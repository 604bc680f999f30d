"""What `execute` asks of the thing that runs the cases."""

from __future__ import annotations

from typing import Protocol

from oceanbox.study.working import Answer, Task

__all__ = ["LOST", "Engine"]

LOST = "worker lost"
"""The failure of an answer about a task whose worker died more often than is reasonable."""


class Engine(Protocol):
    """Runs tasks, several at a time, in any order."""

    @property
    def slots(self) -> int:
        """How many tasks can run at once, at least 1."""

    def warm(self, task: Task) -> None:
        """Have the equations compiled before several workers would all do so; called once, before the first task."""

    def submit(self, task: Task) -> None:
        """Start a task.  A task whose worker dies is started again by the engine."""

    def next_answer(self, seconds: float) -> Answer | None:
        """The next answer, or None if there is none within some seconds."""

    def stop(self) -> list[Answer]:
        """Have running tasks save a checkpoint and end, as far as the engine can, and give up all others."""

    def close(self) -> None:
        """Let the workers go."""
