"""What two threads would give: the heaviest loops with their rows shared out, against the compiled loops as they are.

Threads run side by side, so here wall-clock time counts, best of many; on a machine that others use two threads seldom get two
cores, and the best of many is the nearest to the truth that can be had.
"""

from __future__ import annotations

import inspect
import textwrap
import time
from collections.abc import Callable
from typing import Any, NamedTuple

import numba
import numpy as np

from oceanbox.experiment.model import Model
from oceanbox.physics import momentum, tracers
from oceanbox.stepping import forward_backward
from tests.benchmarks.basin import in_motion

__all__ = ["ThreadTiming", "time_threads"]

ATTEMPTS = 40


class ThreadTiming(NamedTuple):
    """Nanoseconds of wall-clock time per cell of one loop."""

    name: str
    serial: float
    one_thread: float
    two_threads: float


def _shared_out(kernel: Any) -> Callable[..., None]:
    """The kernel compiled again with its outer loops over rows as parallel loops."""
    source = textwrap.dedent(inspect.getsource(kernel.py_func))
    source = source[source.index("def ") :].replace("for j in range(", "for j in prange(")
    scope = dict(kernel.py_func.__globals__, prange=numba.prange)
    exec(source, scope)
    compile_it = numba.njit(parallel=True, error_model="numpy", fastmath={"contract"})
    shared: Callable[..., None] = compile_it(scope[kernel.py_func.__name__])
    return shared


def _best_wall(kernel: Callable[..., None], arguments: tuple[Any, ...]) -> float:
    kernel(*arguments)
    spent = []
    for _ in range(ATTEMPTS):
        start = time.perf_counter()
        kernel(*arguments)
        spent.append(time.perf_counter() - start)
    return min(spent)


def _heavy_loops(model: Model) -> dict[str, tuple[Any, tuple[Any, ...]]]:
    """Three kernels with their arguments; what they write goes to scratch."""
    u, h = model.state.velocity_x[0], model.state.thickness[0]
    rows, constants, memory = len(u), model.constants, model.memory
    U, V = memory.transport_x[0, 0], memory.transport_y[0, 0]
    ones = [np.ones_like(u) for _ in range(8)]
    update = forward_backward.update_u
    # The velocity update by the names of its arguments: its numbers, and an array of its own for each field.
    given = {"first": 2, "end": rows - 2, "history": 5, "dt": 1e-6, "wind": 1.0, "constants": constants}
    names = inspect.signature(update.py_func).parameters
    of_update = tuple(given[name] if name in given else np.ones_like(u) for name in names)
    q, K, du, dv, *_ = ones
    flux = (2, rows - 1, h, *ones[:2], U, V, model.clock.dt, 1e-6, constants, *ones[2:])
    return {
        "momentum advection": (momentum.advection, (2, rows - 2, q, K, U, V, constants, du, dv)),
        "tracer flux": (tracers.tracer_flux, flux),
        "velocity update": (update, of_update),
    }


def time_threads(rows: int, columns: int) -> list[ThreadTiming]:
    """Time the three loops on one grid: as they are, shared out on one thread, shared out on two."""
    numba.config.THREADING_LAYER = "omp"  # type: ignore[attr-defined]
    model = in_motion(rows, columns)
    model.advance(2)
    timings = []
    for name, (kernel, arguments) in _heavy_loops(model).items():
        shared = _shared_out(kernel)
        spent = [_best_wall(kernel, arguments)]
        for threads in (1, 2):
            numba.set_num_threads(min(threads, numba.config.NUMBA_NUM_THREADS))  # type: ignore[attr-defined]
            spent.append(_best_wall(shared, arguments))
        timings.append(ThreadTiming(name, *(1e9 * seconds / (rows * columns) for seconds in spent)))
    return timings
