"""Cost of a step on one grid: compiled, NumPy and C from the same state, and what the machine would allow."""

from __future__ import annotations

import ctypes
import ctypes.util
import sys
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from oceanbox.experiment.model import Model
from tests.benchmarks.basin import in_motion
from tests.benchmarks.c_step import advance_c, have_compiler
from tests.benchmarks.counts import StepCounts
from tests.benchmarks.machine import Machine, measure_triad
from tests.benchmarks.numpy_step import advance_numpy
from tests.benchmarks.timing import best_seconds

__all__ = ["StepCost", "bytes_per_cell", "time_grid"]


# Numbers of options of ``mallopt``, and 32 MiB, the most it takes for the second.
TRIM_THRESHOLD, MMAP_THRESHOLD, LARGEST_THRESHOLD = -1, -3, 32 * 2**20


@dataclass(frozen=True)
class StepCost:
    """Nanoseconds per cell-step on one grid; NaN for what was not timed."""

    rows: int
    columns: int
    exchange_every: int
    working_set: float  # bytes
    bandwidth: float  # bytes a second of a triad as large, measured right after
    compiled: float
    numpy: float
    c: float

    @property
    def cells(self) -> int:
        """Number of cells."""
        return self.rows * self.columns

    def traffic_share(self, counts: StepCounts) -> float:
        """Time the triad needs for the bytes that pass from kernel to kernel, over the time of the step."""
        return 1e9 * counts.sweep_bytes(self.exchange_every) / self.bandwidth / self.compiled

    def arithmetic_share(self, counts: StepCounts, machine: Machine) -> float:
        """Time the arithmetic needs at the multiply-add rate, over the time of the step."""
        return 1e9 * counts.operations(self.exchange_every) / machine.multiply_adds / self.compiled


def keep_memory() -> None:
    """Have the C library keep freed memory, as it does by luck at some sizes: NumPy's temporaries then cost no page faults."""
    library = ctypes.util.find_library("c")
    if library and sys.platform == "linux":
        mallopt = ctypes.CDLL(library).mallopt
        for option in (TRIM_THRESHOLD, MMAP_THRESHOLD):
            mallopt(option, LARGEST_THRESHOLD)


def _arrays(model: Model) -> list[np.ndarray]:
    groups = (model.state, model.memory, model.ledger, model._work, model.setup.forcing)
    return [array for group in groups for array in group]


def bytes_per_cell(rows: int = 200, columns: int = 120) -> float:
    """Bytes a model holds for each cell: what a step works in, the opening of the books and the initial state."""
    model = in_motion(rows, columns)
    return sum(array.nbytes for array in (*_arrays(model), *model.opening, *model.setup.initial)) / (rows * columns)


def _stepper(model: Model, step: Callable[..., None]) -> Callable[[int], None]:
    def act(count: int) -> None:
        clock = model.clock
        step(
            model.state, model.memory, model.setup.forcing, model.constants, model.ledger, clock.steps, clock.steps,
            clock.seconds, clock.dt, model.exchange_every, count,
        )  # fmt: skip
        clock.steps += count

    return act


def time_grid(rows: int, columns: int, budget: float, yardsticks: bool) -> StepCost:
    """Time each kind of step for ``budget`` processor seconds, all from one state.

    Raises RuntimeError if a state did not stay finite: what is not a number is not worth timing.
    """
    keep_memory()
    model = in_motion(rows, columns)
    model.advance(2)
    kept = [field.copy() for field in model.state]
    kinds: dict[str, Callable[[int], None]] = {"compiled": model.advance}
    if yardsticks:
        kinds["numpy"] = _stepper(model, advance_numpy)
        if have_compiler():
            kinds["c"] = _stepper(model, advance_c)
    spent = dict.fromkeys(("compiled", "numpy", "c"), float("nan"))
    # In turn, twice, so that a busy spell of the machine does not fall on one kind alone.
    for kind in (*kinds, *kinds):
        for field, start in zip(model.state, kept, strict=True):
            field[...] = start
        model.change_step(model.clock.dt)
        seconds = best_seconds(kinds[kind], 0.5 * budget)
        spent[kind] = float(np.nanmin([spent[kind], 1e9 * seconds / (rows * columns)]))
        if not np.isfinite(model.state.thickness).all():
            raise RuntimeError(f"{rows}x{columns}: the state of the {kind} step did not stay finite")
    working_set = float(sum(array.nbytes for array in _arrays(model)))
    bandwidth = measure_triad(min(int(working_set / 24.0), 12_000_000), 0.5 * budget)
    return StepCost(rows, columns, model.exchange_every, working_set, bandwidth, **spent)
