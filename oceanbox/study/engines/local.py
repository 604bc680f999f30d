"""Worker processes on this machine, one case at a time in each, one thread in each case."""

from __future__ import annotations

import contextlib
import os
import signal
import threading
from collections.abc import Iterator
from concurrent.futures import FIRST_COMPLETED, Future, ProcessPoolExecutor, wait
from concurrent.futures.process import BrokenProcessPool
from contextlib import contextmanager
from multiprocessing import connection, get_context, parent_process

from oceanbox.study.engines.engine import LOST
from oceanbox.study.working import Answer, Task, run_here

__all__ = ["LocalEngine", "default_workers"]

ATTEMPTS = 3
ASK_SECONDS = 0.5
THREADS = ("NUMBA_NUM_THREADS", "OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS", "BLIS_NUM_THREADS")


def default_workers() -> int:
    """The processors this process may use."""
    affinity = getattr(os, "sched_getaffinity", None)
    return len(affinity(0)) if affinity is not None else os.cpu_count() or 1


@contextmanager
def _one_thread_each() -> Iterator[None]:
    """The environment in which workers are born: libraries read their number of threads when they are loaded."""
    before = {name: os.environ.get(name) for name in THREADS}
    os.environ.update(dict.fromkeys(THREADS, "1"))
    try:
        yield
    finally:
        for name, value in before.items():
            if value is None:
                del os.environ[name]
            else:
                os.environ[name] = value


_stop_asked = threading.Event()
"""In a worker process: set by a SIGTERM that arrived while no run was there to answer it."""


def _begin() -> None:
    """Set a new worker up: it dies with its parent, and Ctrl-C is for the parent to deal with."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    signal.signal(signal.SIGTERM, lambda *_: _stop_asked.set())
    parent = parent_process()
    assert parent is not None

    def follow() -> None:
        connection.wait([parent.sentinel])
        os._exit(1)  # at once: an orphan must not go on writing where the next run of the study will write

    threading.Thread(target=follow, daemon=True).start()


def _run(task: Task) -> Answer:
    """Run a task, unless the worker was asked to stop before it began."""
    if _stop_asked.is_set():
        return Answer(task.key, "interrupted", "the study was interrupted")
    return run_here(task)


class _Lane:
    """One worker process and the task in it.  A pool of one, so that a death can be blamed on a task."""

    def __init__(self) -> None:
        self.task: Task | None = None
        self.attempts = 0
        self.future: Future[Answer] | None = None
        self._pool: ProcessPoolExecutor | None = None
        self._pid: Future[int] | None = None

    @property
    def pid(self) -> int | None:
        """The number of the process; None, and never 0 which would mean this one too, while there is none that answers."""
        if self._pid is None or not self._pid.done() or self._pid.exception() is not None:
            return None
        return self._pid.result()

    def start(self, task: Task) -> None:
        """Give the worker a task, or the same task once more."""
        self.attempts = self.attempts + 1 if self.task is task else 1
        self.task = task
        for _ in range(ATTEMPTS):
            try:
                self.future = self._living().submit(_run, task)
                return
            except BrokenProcessPool:  # it died while it had nothing to do
                self.drop()
        raise RuntimeError("worker processes die as soon as they are started; look at the memory of this machine")

    def _living(self) -> ProcessPoolExecutor:
        if self._pool is None:
            with _one_thread_each():
                self._pool = ProcessPoolExecutor(1, mp_context=get_context("spawn"), initializer=_begin)
                self._pid = self._pool.submit(os.getpid)  # not awaited, so that all workers start at once
        return self._pool

    def drop(self) -> None:
        """Forget the process."""
        if self._pool is not None:
            self._pool.shutdown(wait=False, cancel_futures=True)
        self._pool, self._pid = None, None

    def close(self) -> None:
        """End the process, once its task has ended."""
        if self._pool is not None:
            self._pool.shutdown(wait=True)
        self._pool = None


class LocalEngine:
    """A fixed number of worker processes."""

    def __init__(self, workers: int | None = None) -> None:
        self._lanes = [_Lane() for _ in range(workers or default_workers())]

    @property
    def slots(self) -> int:
        """The number of workers."""
        return len(self._lanes)

    def warm(self, task: Task) -> None:
        """Compile in this process; the workers then read the compiled code from disk."""
        from oceanbox.compiling import cache_is_warm
        from oceanbox.experiment.assembly import assemble_setup
        from oceanbox.experiment.model import Model

        if not cache_is_warm():
            Model(assemble_setup(task.config)).advance(2)

    def submit(self, task: Task) -> None:
        """Start a task in a worker that has none.  Raises ValueError if all have one."""
        free = [lane for lane in self._lanes if lane.task is None]
        if not free:
            raise ValueError(f"got one more task than the {self.slots} workers; wait for an answer first")
        free[0].start(task)

    def next_answer(self, seconds: float) -> Answer | None:
        """The next answer, or None if there is none within some seconds."""
        busy = {lane.future: lane for lane in self._lanes if lane.future is not None}
        ended, _ = wait(busy, seconds, FIRST_COMPLETED)
        return self._answer(busy[ended.pop()]) if ended else None

    def _answer(self, lane: _Lane) -> Answer | None:
        """What became of the task of a lane; None if it was started again."""
        task, future = lane.task, lane.future
        assert task is not None and future is not None
        error = future.exception()
        if isinstance(error, BrokenProcessPool):
            lane.drop()
            if lane.attempts < ATTEMPTS:
                lane.start(task)
                return None
            answer = Answer(
                task.key, LOST, f"its worker process died {ATTEMPTS} times (out of memory, or ended from outside)"
            )
        elif error is not None:
            answer = Answer(task.key, type(error).__name__, f"{type(error).__name__}: {error}")
        else:
            answer = future.result()
        lane.task, lane.future = None, None
        return answer

    def stop(self) -> list[Answer]:
        """Ask each worker to save a checkpoint and end its case; wait until they have."""
        busy = [lane for lane in self._lanes if lane.future is not None]
        # Asked again and again: a run that is just being set up is not listening yet.
        while running := [lane for lane in busy if lane.future is not None and not lane.future.done()]:
            for lane in running:
                if lane.pid is not None:
                    with contextlib.suppress(ProcessLookupError):
                        os.kill(lane.pid, signal.SIGTERM)
            wait([lane.future for lane in running if lane.future is not None], ASK_SECONDS)
        return [self._last_answer(lane) for lane in busy]

    def _last_answer(self, lane: _Lane) -> Answer:
        """What became of the task of a lane; a task whose worker died of being stopped was interrupted."""
        task, future = lane.task, lane.future
        assert task is not None and future is not None
        lane.task, lane.future = None, None
        if future.exception() is not None:
            lane.drop()
            return Answer(task.key, "interrupted", "its worker process died")
        return future.result()

    def close(self) -> None:
        """End the worker processes."""
        for lane in self._lanes:
            lane.close()

    def __enter__(self) -> LocalEngine:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()
