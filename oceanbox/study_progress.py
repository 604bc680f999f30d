"""What a person sees of a study: a live line over all cases on a terminal, plain lines in a log."""

from __future__ import annotations

import math
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING

from oceanbox.terminal import tell

if TYPE_CHECKING:
    from oceanbox.study.executing import StudyProgress

__all__ = ["duration", "study_reporting", "words"]

LOG_SECONDS = 30.0
NAMES_SHOWN = 3


def duration(seconds: float) -> str:
    """A time in the two largest units that it has; '?' for one that nobody knows."""
    if not math.isfinite(seconds):
        return "?"
    minutes, rest = divmod(round(seconds), 60)
    hours, minutes = divmod(minutes, 60)
    if hours:
        return f"{hours} h {minutes} min"
    return f"{minutes} min {rest} s" if minutes else f"{rest} s"


def words(progress: StudyProgress) -> str:
    """Done, running, failed, time left."""
    done = progress.found + progress.done
    parts = [f"{done} of {progress.total} done"]
    if progress.found:
        parts[0] += f" ({progress.found} before)"
    if progress.failed:
        parts.append(f"{progress.failed} failed")
    if progress.running:
        names = ", ".join(progress.running[:NAMES_SHOWN]) + (" …" if len(progress.running) > NAMES_SHOWN else "")
        parts.append(f"{len(progress.running)} running: {names}")
        if math.isfinite(progress.seconds_left):  # before the first case has ended nobody knows
            parts.append(f"{duration(progress.seconds_left)} left")
    return "; ".join(parts)


class _LogLines:
    """A plain line whenever a case ends, and every half minute."""

    def __init__(self) -> None:
        self._ended = -1
        self._last = -math.inf

    def __call__(self, progress: StudyProgress) -> None:
        now, ended = time.monotonic(), progress.done + progress.failed
        if ended == self._ended and now - self._last < LOG_SECONDS:
            return
        self._ended, self._last = ended, now
        tell(words(progress))


@contextmanager
def study_reporting() -> Iterator[Callable[[StudyProgress], None]]:
    """A reporter for a study: live where standard error is a terminal, lines of text elsewhere."""
    from rich.console import Console

    console = Console(stderr=True)
    if not console.is_terminal:
        yield _LogLines()
        return
    from rich.progress import BarColumn, Progress, TextColumn

    with Progress(BarColumn(bar_width=24), TextColumn("{task.fields[state]}"), console=console, transient=True) as bar:
        task = bar.add_task("", state="starting")

        def show(progress: StudyProgress) -> None:
            ended = progress.found + progress.done + progress.failed
            bar.update(task, total=progress.total, completed=ended, state=words(progress))

        yield show
