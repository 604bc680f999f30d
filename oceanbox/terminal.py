"""What a person sees of a run: a live line on a terminal, plain lines in a log."""

import sys
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING

from oceanbox.constants import DAYS_PER_YEAR

if TYPE_CHECKING:
    from rich.progress import Progress as Bar
    from rich.progress import TaskID

    from oceanbox.experiment.running import Progress

__all__ = ["reporting", "tell"]

LOG_SECONDS = 10.0


def tell(line: str) -> None:
    """One line to the person, on standard error: standard output is for results."""
    print(line, file=sys.stderr, flush=True)


def _state_words(progress: "Progress") -> str:
    words = (
        f"heat imbalance {100.0 * progress.heat_imbalance:.1f} %"
        if progress.heat_imbalance == progress.heat_imbalance
        else ""
    )
    drift = progress.drift
    if drift is not None:
        words += (
            f", drift per decade: volume {100.0 * drift.volume_per_decade:.2g} %, heat {100.0 * drift.heat_per_decade:.2g} %, "
            f"exchange imbalance {100.0 * drift.exchange_imbalance:.2g} %"
        )
    return words


def _state_and_left(progress: "Progress", elapsed: float, started_at: float) -> str:
    """What is known of the state, and of the time left; '' where nothing is known yet."""
    left = _left(progress, elapsed, started_at)
    known = (_state_words(progress), f"at most {left} left" if left else "")
    return "; ".join(words for words in known if words)


def _left(progress: "Progress", elapsed: float, started_at: float) -> str:
    """Time left to the end of the plan at the pace so far, '' before there is one; equilibrium may come sooner."""
    done = progress.days - started_at
    if done <= 0.0:
        return ""
    seconds = elapsed * (progress.end_days - progress.days) / done
    minutes, rest = divmod(int(seconds), 60)
    hours, minutes = divmod(minutes, 60)
    return f"{hours}:{minutes:02d}:{rest:02d}" if hours else f"{minutes}:{rest:02d}"


class _LogLines:
    """A plain line every ten seconds."""

    def __init__(self) -> None:
        self._start = self._last = time.monotonic()
        self._from: float | None = None
        self._note = ""

    def __call__(self, progress: "Progress") -> None:
        now = time.monotonic()
        if self._from is None:
            # The first report comes after the equations have been compiled, which says nothing about the pace.
            self._from, self._start = progress.days, now
        if progress.note != self._note:
            self._note = progress.note
            tell(progress.note)
        if now - self._last < LOG_SECONDS:
            return
        self._last = now
        years, end = progress.days / DAYS_PER_YEAR, progress.end_days / DAYS_PER_YEAR
        known = _state_and_left(progress, now - self._start, self._from)
        tell(f"year {years:.1f} of at most {end:g}, step {progress.steps}" + (f", {known}" if known else ""))


class _LiveLine:
    """A bar that moves."""

    def __init__(self, bar: "Bar", task: "TaskID") -> None:
        self._bar, self._task = bar, task
        self._start = time.monotonic()
        self._from: float | None = None
        self._note = ""

    def __call__(self, progress: "Progress") -> None:
        if self._from is None:
            # The first report comes after the equations have been compiled, which says nothing about the pace.
            self._from, self._start = progress.days, time.monotonic()
        if progress.note != self._note:
            self._note = progress.note
            self._bar.console.print(progress.note)
        years, end = progress.days / DAYS_PER_YEAR, progress.end_days / DAYS_PER_YEAR
        self._bar.update(
            self._task,
            total=progress.end_days,
            completed=progress.days,
            description=f"year {years:.1f} of at most {end:g}",
            state=_state_and_left(progress, time.monotonic() - self._start, self._from),
        )


@contextmanager
def reporting() -> Iterator[Callable[["Progress"], None]]:
    """A reporter for a run: live where standard error is a terminal, lines of text elsewhere."""
    from rich.console import Console

    console = Console(stderr=True)
    if not console.is_terminal:
        yield _LogLines()
        return
    from rich.progress import BarColumn, Progress, TextColumn

    columns = (TextColumn("{task.description}"), BarColumn(bar_width=24), TextColumn("{task.fields[state]}"))
    with Progress(*columns, console=console, transient=True) as bar:
        yield _LiveLine(bar, bar.add_task("", state="starting"))
