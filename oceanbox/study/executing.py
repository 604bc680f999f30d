"""Running what is missing of a study: every case once, whatever becomes of the others."""

from __future__ import annotations

import math
import signal
import threading
import time
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

from oceanbox.output.files import whole_file
from oceanbox.study.engines import Engine
from oceanbox.study.plan import Case, folder_of
from oceanbox.study.status import CHECKPOINT, STATE, CaseStatus, State, status_of, write_status
from oceanbox.study.working import Answer, Task

__all__ = ["StudyProgress", "execute", "nearest_done", "quiet"]

POLL_SECONDS = 0.5


@dataclass(frozen=True)
class StudyProgress:
    """Where a study is.

    total, found, done, failed    numbers of cases: all, finished before, done and failed now
    running                       names of the cases that are running
    seconds_left                  by the mean time of the cases done now; NaN before the first
    """

    total: int
    found: int
    done: int
    failed: int
    running: tuple[str, ...]
    seconds_left: float


def quiet(progress: StudyProgress) -> None:
    """A reporter that reports nothing."""


def execute(
    cases: Sequence[Case],
    into: Path,
    engine: Engine,
    report: Callable[[StudyProgress], None] = quiet,
) -> list[CaseStatus]:
    """Run the cases that are not finished; the status of all, in the order of `cases`.

    cases     in the order in which they are started; a case with a `start` waits for that one, which must be among them
              or finished
    into      the folder of the study
    report    called after every change and twice a second

    A case that fails is a status with a reason; so is one whose start failed.  Cases of one identity run once.  Raises
    KeyboardInterrupt on SIGINT or SIGTERM, after the running cases have saved a checkpoint.
    """
    into = into.resolve()
    into.mkdir(parents=True, exist_ok=True)
    execution = _Execution(cases, into, engine, report)
    with _stopping_on_signals(execution.stop):
        return execution.run()


@contextmanager
def _stopping_on_signals(stop: threading.Event) -> Iterator[None]:
    """The first SIGINT or SIGTERM sets `stop`, which is looked at where stopping does no harm; a second one does not wait.

    Outside the main thread nothing is caught.
    """
    if threading.current_thread() is not threading.main_thread():
        yield
        return

    def ask(number: int, frame: object) -> None:
        if stop.is_set():
            raise KeyboardInterrupt
        stop.set()

    before = {number: signal.signal(number, ask) for number in (signal.SIGINT, signal.SIGTERM)}
    try:
        yield
    finally:
        for number, handler in before.items():
            signal.signal(number, handler)


class _Execution:
    """One call of `execute`."""

    def __init__(
        self, cases: Sequence[Case], into: Path, engine: Engine, report: Callable[[StudyProgress], None]
    ) -> None:
        self.cases, self.into, self.engine, self.report = cases, into, engine, report
        self.by_key = {case.identity: case for case in cases}
        self.status = {key: status_of(case, into) for key, case in self.by_key.items()}
        self.found = sum(status.finished for status in self.status.values())
        self.waiting = [key for key, status in self.status.items() if not status.finished]
        self.running: list[str] = []
        self.now: list[CaseStatus] = []
        self.began = time.monotonic()
        self.stop = threading.Event()

    def run(self) -> list[CaseStatus]:
        """Start and await until nothing waits and nothing runs."""
        warmed = False
        while self.waiting or self.running:
            self._fail_without_start()
            for key in self._ready()[: max(0, self.engine.slots - len(self.running))]:
                if self.stop.is_set():
                    break
                if not warmed:
                    self.engine.warm(self._task(key, ""))
                    warmed = True
                self._start(key)
            self._tell()
            answer = self.engine.next_answer(POLL_SECONDS) if self.running else None
            if answer is not None:
                self._take(answer)
            if self.stop.is_set():
                self._stop()
        self._tell()
        return [self.status[case.identity] for case in self.cases]

    def _stop(self) -> None:
        """Have what is running saved.  Raises KeyboardInterrupt if anything is left to do."""
        for answer in self.engine.stop():
            self._take(answer)
        if self.waiting or self.running:
            raise KeyboardInterrupt

    # -- starting -----------------------------------------------------------------------------------------------------

    def _ready(self) -> list[str]:
        """The waiting cases that can start."""
        return [key for key in self.waiting if self._start_status(key).state is State.DONE]

    def _start_status(self, key: str) -> CaseStatus:
        """The status of what a case starts from; done where it starts from its own initial state."""
        start = self.by_key[key].start
        if start is None:
            return CaseStatus(State.DONE)
        return self.status.get(start.identity) or status_of(start, self.into)

    def _fail_without_start(self) -> None:
        """Give up the cases that can never start."""
        for key in list(self.waiting):
            start, status = self.by_key[key].start, self._start_status(key)
            if start is None or status.state is State.DONE:
                continue
            pending = start.identity in self.waiting or start.identity in self.running
            if not pending:
                self.waiting.remove(key)
                why = status.reason or "it is not part of this study"
                self._end(key, CaseStatus(State.FAILED, f"its start, {start.name}, was not reached: {why}", "no start"))

    def _task(self, key: str, source: str) -> Task:
        case = self.by_key[key]
        start = self.into / source / STATE if source else None
        return Task(key, case.config, case.command, folder_of(case, self.into), start)

    def _source(self, key: str) -> str:
        """The folder, relative to the study's, of the case from whose end this one starts, '' for none."""
        case = self.by_key[key]
        if case.start is not None:
            return self._relative(case.start)
        if case.warm_start == "none":
            return ""
        if (folder_of(case, self.into) / CHECKPOINT).exists():  # it goes on from where it once started
            return self.status[key].started_from
        done = [item for item in self.cases if self.status[item.identity].state is State.DONE]
        nearest = nearest_done(case, done, self.cases)
        return self._relative(nearest) if nearest is not None else ""

    def _relative(self, case: Case) -> str:
        return folder_of(case, self.into).relative_to(self.into).as_posix()

    def _start(self, key: str) -> None:
        source = self._source(key)
        self.status[key] = replace(self.status[key], state=State.RUNNING, reason="", failure="", started_from=source)
        write_status(self.by_key[key], self.into, self.status[key])
        self.waiting.remove(key)
        self.running.append(key)
        self.engine.submit(self._task(key, source))

    # -- ending -------------------------------------------------------------------------------------------------------

    def _take(self, answer: Answer) -> None:
        """Note how a task went; files that came with the answer are put in place, the result last."""
        key = answer.key
        case = self.by_key[key]
        for name, contents in sorted(answer.files.items(), key=lambda item: item[0] == "result.nc"):
            with whole_file(folder_of(case, self.into) / name) as part:
                part.write_bytes(contents)
        self.running.remove(key)
        earlier = self.status[key].seconds
        seconds = answer.seconds + (earlier if math.isfinite(earlier) else 0.0)
        if answer.failure == "interrupted":
            self.waiting.append(key)
            self._note(key, replace(self.status[key], state=State.WAITING, reason=answer.reason, seconds=seconds))
            return
        if answer.failure:
            ended = replace(self.status[key], state=State.FAILED, failure=answer.failure, reason=answer.reason)
        else:
            ended = replace(status_of(case, self.into), started_from=self.status[key].started_from)
            if ended.state is not State.DONE:
                ended = replace(ended, state=State.FAILED, failure="no result", reason="the run left no whole result")
        self._end(key, replace(ended, seconds=seconds))

    def _end(self, key: str, status: CaseStatus) -> None:
        self.now.append(status)
        self._note(key, status)

    def _note(self, key: str, status: CaseStatus) -> None:
        self.status[key] = status
        write_status(self.by_key[key], self.into, status)

    def _tell(self) -> None:
        done = sum(status.state is State.DONE for status in self.now)
        left = len(self.waiting) + len(self.running)
        pace = (time.monotonic() - self.began) / len(self.now) if self.now else math.nan
        names = tuple(self.by_key[key].name for key in self.running)
        self.report(StudyProgress(len(self.status), self.found, done, len(self.now) - done, names, left * pace))


def nearest_done(case: Case, done: Sequence[Case], cases: Sequence[Case]) -> Case | None:
    """The case among `done` that differs least from `case`, the first of equals; None if there is none.

    Differences of numbers are measured by their range over `cases`; anything else differs by 0 or 1.
    """
    keys = sorted({key for item in cases for key in item.changes})
    ranges = {key: _range([item.changes.get(key) for item in cases]) for key in keys}

    def distance(other: Case) -> float:
        pairs = ((case.changes.get(key), other.changes.get(key), ranges[key]) for key in keys)
        return sum(_difference(one, two, size) ** 2 for one, two, size in pairs)

    return min(done, key=distance, default=None)


def _range(values: Sequence[Any]) -> float:
    numbers = [value for value in values if isinstance(value, int | float)]
    return max(numbers) - min(numbers) if numbers else 0.0


def _difference(one: Any, other: Any, size: float) -> float:
    if isinstance(one, int | float) and isinstance(other, int | float):
        return abs(one - other) / size if size > 0.0 else 0.0
    return float(one != other)
