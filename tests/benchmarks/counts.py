"""Arithmetic and memory traffic of a step, counted by running the very kernels uncompiled on numbers that count.

A few steps run in plain Python (``NUMBA_DISABLE_JIT=1``, in a process of their own) with arrays that note every element read
and written and numbers that note every operation on them.  Counts of four small grids are combined so that edges drop out: what
remains is the cost of an interior cell, whatever the size of the grid.

*Operations*: + - * and powers, those of exp and log included, which are written out; divisions and comparisons are given apart.
*Read*, *written*: elements of arrays, by any loop: what the first cache must serve.  *Swept in*, *swept out*: elements of the
arrays of the whole basin that a step reads and writes, each once: what must come from memory and go back if nothing but the
belts stays in cache from one step to the next.
"""

from __future__ import annotations

import json
import os
import subprocess
import sys
import tempfile
from collections import Counter
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

__all__ = ["StepCounts", "count_step"]

SIZES = ((8, 7), (8, 14), (16, 7), (16, 14))
STEP = {"numerics.step_s": 600.0}
NEVER = 10**6
KINDS = (
    "operations", "divisions", "comparisons", "read", "written", "swept in", "swept out"
)  # fmt: skip
TALLY: Counter[str] = Counter()
# Addresses of the elements that the step at work has read and written.
TOUCHED: tuple[set[int], set[int]] = (set(), set())


@dataclass(frozen=True)
class StepCounts:
    """Per cell, of a step without and of one exchange of the columns."""

    step: dict[str, float]
    exchange: dict[str, float]

    def per_step(self, name: str, exchange_every: int) -> float:
        """Mean over the steps from one exchange to the next."""
        return self.step[name] + self.exchange[name] / exchange_every

    def operations(self, exchange_every: int) -> float:
        """Additions, multiplications and divisions of a cell-step."""
        return sum(self.per_step(name, exchange_every) for name in ("operations", "divisions"))

    def sweep_bytes(self, exchange_every: int) -> float:
        """Bytes of a cell-step that go through memory if nothing stays in cache from one step to the next."""
        return 8.0 * sum(self.per_step(name, exchange_every) for name in ("swept in", "swept out"))

    def request_bytes(self, exchange_every: int) -> float:
        """Bytes of a cell-step asked of the first cache."""
        return 8.0 * sum(self.per_step(name, exchange_every) for name in ("read", "written"))


class Counted(float):
    """A float that notes what is done with it."""

    def __abs__(self) -> Counted:
        return Counted(float.__abs__(self))

    def __neg__(self) -> Counted:
        return Counted(float.__neg__(self))


def _noting(name: str, kind: str, result: Callable[[Any], Any]) -> Callable[..., Any]:
    plain = getattr(float, name)

    def operation(self: Counted, *others: Any) -> Any:
        TALLY[kind] += 1
        return result(plain(self, *(float(other) for other in others)))

    return operation


for _name in ("add", "sub", "mul", "pow"):
    setattr(Counted, f"__{_name}__", _noting(f"__{_name}__", "operations", Counted))
    setattr(Counted, f"__r{_name}__", _noting(f"__r{_name}__", "operations", Counted))
Counted.__truediv__ = _noting("__truediv__", "divisions", Counted)  # type: ignore[method-assign]
Counted.__rtruediv__ = _noting("__rtruediv__", "divisions", Counted)  # type: ignore[method-assign]
for _name in ("lt", "le", "gt", "ge"):
    setattr(Counted, f"__{_name}__", _noting(f"__{_name}__", "comparisons", bool))


class CountedArray:
    """An array whose elements are counted when they are read or written one by one; slices are views."""

    def __init__(self, values: Any, whole_basin: bool) -> None:
        self.values, self.whole_basin = values, whole_basin
        self.shape, self.size = values.shape, values.size

    def __getitem__(self, index: Any) -> Any:
        found = self.values[index]
        if getattr(found, "ndim", 0):
            return CountedArray(found, self.whole_basin)
        TALLY["read"] += 1
        self._note(0, index)
        return Counted(found)

    def __setitem__(self, index: Any, value: Any) -> None:
        target = self.values[index]
        if getattr(target, "ndim", 0):
            TALLY["written"] += target.size
            if isinstance(value, CountedArray):
                value = value.values
        else:
            TALLY["written"] += 1
            self._note(1, index)
        self.values[index] = value

    def _note(self, which: int, index: Any) -> None:
        if self.whole_basin:
            where = self.values.__array_interface__["data"][0]
            steps = index if isinstance(index, tuple) else (index,)
            TOUCHED[which].add(where + sum(i * s for i, s in zip(steps, self.values.strides, strict=True)))

    def max(self) -> Counted:
        """The largest element."""
        TALLY["read"] += self.size
        return Counted(self.values.max())

    def __len__(self) -> int:
        return len(self.values)


def _close_step() -> None:
    """Enter what the step touched."""
    for name, addresses in zip(("swept in", "swept out"), TOUCHED, strict=True):
        TALLY[name] += len(addresses)
        addresses.clear()


def _watched(function: Callable[..., Any]) -> Callable[..., Any]:
    """A kernel as it is; the part of the step that comes first, in the first band, closes the step before."""
    if function.__name__ != "open_band":
        return function

    def run(band: int, *arguments: Any) -> Any:
        if band == 0:
            _close_step()
        return function(band, *arguments)

    return run


def _watch_kernels() -> None:
    """Put a watching decorator in the place of the compiling ones."""
    from oceanbox import compiling

    for name in ("kernel", "part"):
        setattr(compiling, name, _watched)


def _count(state: dict[str, Any], rows: int, columns: int, exchange_every: int, steps: int) -> Counter[str]:
    """Counts of some steps on one grid, the last of which ends with an exchange."""
    from oceanbox.experiment.assembly import assemble_setup
    from oceanbox.experiment.model import Model
    from oceanbox.stepping.forward_backward import advance_forward_backward
    from tests.benchmarks.basin import reference_config

    model = Model(assemble_setup(reference_config(rows, columns, STEP)))
    for name, array in model.state._asdict().items():
        array[...] = state[f"{name}_{rows}_{columns}"]

    def counted(group: Any, whole_basin: bool = True) -> Any:
        return type(group)(*(CountedArray(array, whole_basin) for array in group))

    TALLY.clear()
    advance_forward_backward(
        counted(model.state), counted(model.memory), counted(model.setup.forcing), model.constants, counted(model.ledger),
        counted(model._work, whole_basin=False), 0, 3, 0.0, model.clock.dt, exchange_every, steps,
    )  # fmt: skip
    _close_step()
    return Counter(TALLY)


def _difference(more: Counter[str], less: Counter[str]) -> dict[str, float]:
    return {kind: float(more[kind] - less[kind]) for kind in KINDS}


def _count_all(state: dict[str, Any]) -> tuple[dict[str, float], dict[str, float]]:
    """Per cell: a step without exchange, and an exchange."""
    plain = []
    for rows, columns in SIZES:
        two, one = (_count(state, rows, columns, NEVER, steps) for steps in (2, 1))
        plain.append(_difference(two, one))
    small, wide, tall, large = plain
    rows, columns = SIZES[0]
    step = {kind: (large[kind] - wide[kind] - tall[kind] + small[kind]) / (rows * columns) for kind in KINDS}
    rows, columns = SIZES[-1]
    extra = _difference(_count(state, rows, columns, 1, 2), _count(state, rows, columns, NEVER, 2))
    return step, {kind: count / (rows * columns) for kind, count in extra.items()}


def count_step() -> StepCounts:
    """Count in a process of its own, because kernels are compiled or not for the whole of a process."""
    from tests.benchmarks.basin import in_motion

    environment = os.environ | {"NUMBA_DISABLE_JIT": "1"}
    top = Path(__file__).resolve().parents[2]
    with tempfile.TemporaryDirectory() as folder:
        states = Path(folder) / "states.npz"
        arrays = {
            f"{name}_{rows}_{columns}": array
            for rows, columns in SIZES
            for name, array in in_motion(rows, columns, STEP).state._asdict().items()
        }
        np.savez(states, **arrays)
        command = [sys.executable, "-m", "tests.benchmarks.counts", str(states)]
        found = subprocess.run(command, cwd=top, env=environment, capture_output=True, text=True, check=True)
    return StepCounts(*json.loads(found.stdout))


if __name__ == "__main__":
    _watch_kernels()
    with np.load(sys.argv[1]) as saved:
        print(json.dumps(_count_all(dict(saved))))
