"""What one thread of this machine can do: bytes a second by where the data lie, and multiply-adds a second; compiled kernels."""

from __future__ import annotations

import platform
from dataclasses import dataclass
from pathlib import Path

import numba
import numpy as np
from numpy.typing import NDArray

from tests.benchmarks.timing import best_seconds

__all__ = ["Machine", "measure_machine", "measure_triad"]

Array = NDArray[np.float64]
# Elements of each of the three arrays of the triad, from the first cache to memory.
TRIAD_LENGTHS = {"first cache": 1_000, "second cache": 12_000, "third cache": 200_000, "memory": 12_000_000}
CHAINS, TERMS = 512, 32


@dataclass(frozen=True)
class Machine:
    """Limits of one thread."""

    processor: str
    triad: dict[str, float]  # bytes a second: two read, one written, 24 bytes an element
    multiply_adds: float  # float64 operations a second, two for each multiply-add


@numba.njit(error_model="numpy", fastmath={"contract"})
def triad(a: Array, b: Array, c: Array, repeats: int) -> None:
    """a = b + s c, again and again."""
    for n in range(repeats):
        s = 0.5 + n
        for i in range(a.size):
            a[i] = b[i] + s * c[i]


@numba.njit(error_model="numpy", fastmath={"contract"})
def polynomial(x: Array, repeats: int) -> None:
    """x -> 0.9 + 0.1 x, TERMS times in registers: multiply-adds in CHAINS independent chains."""
    for _ in range(repeats):
        for i in range(CHAINS):
            y = x[i]
            for _ in range(TERMS):
                y = 0.9 + 0.1 * y
            x[i] = y


def processor_name() -> str:
    """The processor as the operating system names it."""
    listing = Path("/proc/cpuinfo")
    if listing.exists():
        facts = dict(line.split(":", 1) for line in listing.read_text().splitlines() if ":" in line)
        facts = {key.strip(): value.strip() for key, value in facts.items()}
        if "model name" in facts:
            return f"{facts['model name']} (family {facts['cpu family']}, model {facts['model']})"
    return platform.processor() or platform.machine()


def measure_triad(length: int, budget: float) -> float:
    """Bytes a second of the triad on arrays of ``length``, in ``budget`` processor seconds."""
    a, b, c = (np.ones(length) for _ in range(3))
    repeats = max(1, 2_000_000 // length)
    return 24.0 * length * repeats / best_seconds(lambda n: triad(a, b, c, n * repeats), budget)


def measure_machine(budget: float) -> Machine:
    """Measure the limits; ``budget`` processor seconds for each."""
    rates = {place: measure_triad(length, budget) for place, length in TRIAD_LENGTHS.items()}
    x = np.full(CHAINS, 0.5)
    seconds = best_seconds(lambda n: polynomial(x, 100 * n), budget)
    return Machine(processor_name(), rates, 2.0 * 100 * CHAINS * TERMS / seconds)
