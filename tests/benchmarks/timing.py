"""Timing on a machine that others use too: processor time of this thread, the best of many stretches.

Processor time leaves out the waiting while others run; what they do to the caches can only slow a stretch down, so the best
stretch is nearest to the cost on a machine of one's own.
"""

from __future__ import annotations

import time
from collections.abc import Callable

__all__ = ["best_seconds"]

SHORTEST_STRETCH = 0.004
FEWEST_STRETCHES = 5


def best_seconds(act: Callable[[int], object], budget: float) -> float:
    """Processor seconds of one of the ``n`` acts of ``act(n)``, best of as many stretches as ``budget`` seconds hold."""
    act(1)
    count, best, spent, stretches = 1, float("inf"), 0.0, 0
    while spent < budget or stretches < FEWEST_STRETCHES:
        start = time.thread_time()
        act(count)
        took = time.thread_time() - start
        spent += took
        stretches += 1
        best = min(best, took / count)
        if took < SHORTEST_STRETCH:
            count *= 2
    return best
