"""Workers of a cluster, through dask.distributed: whatever starts the workers, a batch queue for instance, is not our concern.

Each worker runs one case at a time, so workers are started with one thread each.  Results are written straight into the
study's folder where a worker can see it, and travel through the scheduler where it cannot.
"""

from __future__ import annotations

import contextlib
import queue
import threading
import time
import uuid
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

from oceanbox.errors import OceanboxError
from oceanbox.output.files import whole_file
from oceanbox.study.engines.engine import LOST
from oceanbox.study.working import TOKEN, Answer, Task, run_task

if TYPE_CHECKING:
    from distributed import Client

__all__ = ["ClusterEngine"]

PATIENCE_SECONDS = 60.0
# Two cases at once in the threads of one process would share libraries that do not expect it (HDF5).
_one_at_a_time = threading.Lock()


def _run_alone(task: Task) -> Answer:
    """Run a task when no other one runs in this process."""
    with _one_at_a_time:
        return run_task(task)


def _connect(address: str) -> Client:
    try:
        from distributed import Client
    except ImportError as error:
        raise OceanboxError(
            f"--scheduler {address}: got no dask.distributed here; it is an extra; pip install 'oceanbox[cluster]'"
        ) from error
    try:
        return Client(address, timeout=f"{PATIENCE_SECONDS:g}s", set_as_default=False)
    except (OSError, ValueError) as error:
        raise OceanboxError(
            f"--scheduler {address}: no scheduler answers there ({error}); give the address it printed when it was started, "
            "such as tcp://host:8786"
        ) from error


class ClusterEngine:
    """The workers of a running scheduler.

    into    the folder of the study; a file with a random word in it tells workers whether they see the same one
    """

    def __init__(self, address: str, into: Path) -> None:
        self._client = _connect(address)
        self._token = uuid.uuid4().hex
        into.mkdir(parents=True, exist_ok=True)
        with whole_file(into / TOKEN) as part:
            part.write_text(self._token, encoding="utf-8")
        self._ended: queue.SimpleQueue[Any] = queue.SimpleQueue()
        self._tasks: dict[str, tuple[Task, Any]] = {}

    @property
    def slots(self) -> int:
        """The workers there are now; while there are none, one task is handed to the scheduler to wait."""
        return max(1, len(self._client.nthreads()))

    def warm(self, task: Task) -> None:
        """Nothing: each machine compiles for itself and keeps what it compiled."""

    def submit(self, task: Task) -> None:
        """Hand a task to the scheduler, which starts it again if its worker dies."""
        start = task.start.read_bytes() if task.start is not None else None
        sent = replace(task, token=self._token, start_bytes=start)
        # A key of its own for each submission: a failed one would otherwise be remembered and answered at once.
        future = self._client.submit(_run_alone, sent, key=f"case-{task.key}-{uuid.uuid4().hex}", pure=False)
        self._tasks[task.key] = (task, future)
        future.add_done_callback(lambda _: self._ended.put(task.key))

    def next_answer(self, seconds: float) -> Answer | None:
        """The next answer, or None if there is none within some seconds."""
        try:
            key = self._ended.get(timeout=seconds)
        except queue.Empty:
            return None
        if key not in self._tasks:
            return None
        task, future = self._tasks.pop(key)
        return self._answer(task, future)

    def _answer(self, task: Task, future: Any) -> Answer:
        from distributed import KilledWorker

        try:
            answer: Answer = future.result(timeout=PATIENCE_SECONDS)
            return answer
        except KilledWorker as error:
            return Answer(task.key, LOST, f"every worker that ran it died ({error})")
        except Exception as error:  # whatever the cluster does, it is this case's failure and not the study's
            return Answer(task.key, type(error).__name__, f"{type(error).__name__}: {error}")

    def stop(self) -> list[Answer]:
        """Give up what has not begun; a case that a worker has begun runs on there, and is found when it is done."""
        answers = []
        for task, future in self._tasks.values():
            with contextlib.suppress(Exception):
                future.cancel()
            answers.append(Answer(task.key, "interrupted", "the study was interrupted"))
        self._tasks.clear()
        return answers

    def await_workers(self, count: int, seconds: float) -> None:
        """Wait until so many workers are there, for tests and scripts; raises TimeoutError."""
        end = time.monotonic() + seconds
        while len(self._client.nthreads()) < count:
            if time.monotonic() > end:
                raise TimeoutError(f"fewer than {count} workers after {seconds:g} s")
            time.sleep(0.1)

    def close(self) -> None:
        """Leave the cluster as it is."""
        self._client.close()

    def __enter__(self) -> ClusterEngine:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()
