"""``python -m tests.benchmarks.run``: print how fast a step is, as Markdown, and draw how its cost grows.

Options: ``--quick`` leaves out the large grids and the slow parts, ``--into FOLDER`` takes the figure (default: the working
directory).  Times are processor time of one thread, the best of many stretches, because others may be using the machine.
"""

from __future__ import annotations

import argparse
import tempfile
from pathlib import Path

from tests.benchmarks.basin import GRIDS
from tests.benchmarks.c_step import FLAGS
from tests.benchmarks.counts import StepCounts, count_step
from tests.benchmarks.machine import Machine, measure_machine
from tests.benchmarks.plot import draw_scaling
from tests.benchmarks.start_up import cache_notices_edits, reads_only, time_help, time_to_first_step
from tests.benchmarks.step_cost import StepCost, bytes_per_cell, time_grid
from tests.benchmarks.threads import time_threads
from tests.benchmarks.vectorised import find_vector_loops

# Grids between the tabulated ones, for the figure.
BETWEEN = ((140, 84), (280, 168), (800, 480))
LARGE = (4000, 2400)


def row(*entries: object) -> str:
    """A row of a Markdown table."""
    return "| " + " | ".join(str(entry) for entry in entries) + " |"


def head(*names: str) -> str:
    """Its first two rows."""
    return row(*names) + "\n|" + "---|" * len(names)


def print_machine(machine: Machine) -> None:
    """What the machine can do."""
    print(f"\n### Machine\n\n{machine.processor}, one thread.\n")
    print(head("limit", "measured"))
    for place, rate in machine.triad.items():
        print(row(f"triad in {place}", f"{1e-9 * rate:.0f} GB/s"))
    print(row("multiply-adds", f"{1e-9 * machine.multiply_adds:.0f} Gflop/s"), flush=True)


def print_counts(counts: StepCounts) -> None:
    """What a cell-step consists of."""
    print("\n### Counted from the kernels, per cell\n")
    names = ("operations", "divisions", "comparisons", "read", "written", "swept in", "swept out")
    print(head("", *names))
    for what, numbers in (("a step", counts.step), ("an exchange of the columns", counts.exchange)):
        print(row(what, *(f"{numbers[name]:.0f}" for name in names)))
    print(
        "\nElements, 8 bytes each: read and written by any loop; swept in and out, each array of the whole basin once a step.",
        flush=True,
    )


def print_steps(costs: list[StepCost], counts: StepCounts, machine: Machine) -> None:
    """The main table."""
    print(f"\n### A step of the reference physics, exchange and books included; C by `gcc {' '.join(FLAGS)}`\n")
    print(
        head(
            "cells",
            "steps per exchange",
            "Mcell-steps/s",
            "ns per cell-step",
            "NumPy (ns)",
            "C (ns)",
            "NumPy / compiled",
            "C / compiled",
            "working set (MB)",
            "triad there (GB/s)",
            "of triad",
            "of multiply-adds",
        )
    )
    for cost in costs:
        print(
            row(
                f"{cost.rows}x{cost.columns}",
                cost.exchange_every,
                f"{1e3 / cost.compiled:.0f}",
                f"{cost.compiled:.1f}",
                f"{cost.numpy:.0f}",
                f"{cost.c:.1f}",
                f"{cost.numpy / cost.compiled:.1f}",
                f"{cost.c / cost.compiled:.2f}",
                f"{1e-6 * cost.working_set:.0f}",
                f"{1e-9 * cost.bandwidth:.0f}",
                f"{100 * cost.traffic_share(counts):.0f} %",
                f"{100 * cost.arithmetic_share(counts, machine):.0f} %",
            )
        )
    held = bytes_per_cell()
    gigabytes = held * LARGE[0] * LARGE[1] / 2**30
    print(f"\nA model holds {held:.0f} bytes a cell; {LARGE[0]}x{LARGE[1]} cells take {gigabytes:.1f} GiB.", flush=True)


def print_loops() -> None:
    """Which loops became vector loops."""
    print("\n### Vector loops\n")
    print(head("kernel", "loops in the source", "vector loops", "doubles at a time", "all"))
    for report in find_vector_loops():
        entries = (report.source_loops, min(report.vector_loops, report.source_loops), report.doubles)
        print(row(report.kernel, *entries, "yes" if report.complete else "**no**"))


def print_threads(rows: int, columns: int) -> None:
    """What two threads would give."""
    print(f"\n### Rows shared out among threads, {rows}x{columns}, wall-clock ns per cell\n")
    print(head("loop", "as it is", "shared out, 1 thread", "2 threads", "gain"))
    for timing in time_threads(rows, columns):
        numbers = (timing.serial, timing.one_thread, timing.two_threads)
        print(row(timing.name, *(f"{number:.2f}" for number in numbers), f"{timing.serial / timing.two_threads:.2f}"))


def print_start_up() -> None:
    """From the command to the first step, and whether the cache can be trusted."""
    print("\n### Start\n")
    print(head("", "clock (s)", "processor (s)"))
    with tempfile.TemporaryDirectory() as cache:
        print(
            row("first step, nothing compiled yet", *(f"{seconds:.1f}" for seconds in time_to_first_step(Path(cache))))
        )
        warm = min(time_to_first_step(Path(cache)) for _ in range(3))
    print(row("first step, compiled before", *(f"{seconds:.2f}" for seconds in warm)))
    print(row("`oceanbox --help`", *(f"{seconds:.2f}" for seconds in min(time_help() for _ in range(3)))))
    print(f"\nRead-only installation, no home: compiled code went to `{reads_only()}`.")
    for name, changed, fresh in cache_notices_edits():
        verdict = "result changed at once, as with an empty cache" if changed and fresh else "**STALE CODE WAS SERVED**"
        print(f"Edit of `{name}` with the old cache at hand: {verdict}.")


def main() -> None:
    """Measure and print."""
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--quick", action="store_true", help="small grids, and the step alone")
    parser.add_argument("--into", type=Path, default=Path(), metavar="FOLDER", help="folder of the figure")
    chosen = parser.parse_args()
    budget = 0.5 if chosen.quick else 3.0
    grids = GRIDS[:2] if chosen.quick else GRIDS
    machine, counts = measure_machine(budget), count_step()
    print_machine(machine)
    print_counts(counts)
    costs = [time_grid(*grid, budget, yardsticks=True) for grid in grids]
    print_steps(costs, counts, machine)
    between = [] if chosen.quick else [time_grid(*grid, budget, yardsticks=False) for grid in BETWEEN]
    lines = {
        "NumPy": [(cost.cells, cost.numpy) for cost in costs],
        "C": [(cost.cells, cost.c) for cost in costs if cost.c == cost.c],
        "compiled step": [(cost.cells, cost.compiled) for cost in (*costs, *between)],
    }
    for file in draw_scaling(
        {kind: points for kind, points in lines.items() if points}, machine.processor, chosen.into
    ):
        print(f"\nFigure: {file}")
    if not chosen.quick:
        print_loops()
        print_threads(*GRIDS[-1])
        print_start_up()


if __name__ == "__main__":
    main()
