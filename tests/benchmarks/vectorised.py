"""Which loops of the kernels became vector loops, read from the machine code.

Machine code can be inspected only where it was compiled, so everything is compiled afresh in a process of its own.  A loop of the
source counts if it writes arrays and has no loop inside; a loop of the machine code is a vector loop if it has no loop inside and
computes with packed doubles.  Every vector loop has a scalar one beside it for what is left at the end of a row.
"""

from __future__ import annotations

import ast
import importlib
import inspect
import json
import os
import pkgutil
import re
import subprocess
import sys
import tempfile
import textwrap
from pathlib import Path
from typing import Any, NamedTuple

__all__ = ["LoopReport", "find_vector_loops"]

LABEL = re.compile(r"^(\.LBB\d+_\d+):")
JUMP = re.compile(r"^\s+j\w+\s+(\.LBB\d+_\d+)\s*$")
PACKED = re.compile(r"^\s+v(?:add|sub|mul|div|max|min|fn?m(?:add|sub)\d+)pd\b.*%([xyz])mm", re.MULTILINE)
WIDTHS = {"z": 8, "y": 4, "x": 2}


class LoopReport(NamedTuple):
    """What became of the loops of one kernel, those of kernels compiled into it included."""

    kernel: str
    source_loops: int
    vector_loops: int
    doubles: int  # in the widest vector

    @property
    def complete(self) -> bool:
        """True if there is a vector loop for each loop of the source."""
        return self.vector_loops >= self.source_loops


def _innermost_loops(function: Any) -> int:
    """Innermost loops that write elements of arrays; loops that only call other kernels do not count."""
    tree = ast.parse(textwrap.dedent(inspect.getsource(function)))
    count = 0
    for loop in (node for node in ast.walk(tree) if isinstance(node, ast.For)):
        inside = [node for statement in loop.body for node in ast.walk(statement)]
        stores = [node for node in inside if isinstance(node, ast.Subscript) and isinstance(node.ctx, ast.Store)]
        writes = any(not isinstance(store.slice, ast.Constant) for store in stores)
        count += writes and not any(isinstance(node, ast.For) for node in inside)
    return count


def _loops_within(kernel: Any, assembly: str) -> int:
    """Innermost loops of a kernel and of the kernels that the compiler has put into it."""
    total = _innermost_loops(kernel.py_func)
    for name in kernel.py_func.__code__.co_names:
        callee = kernel.py_func.__globals__.get(name)
        if not hasattr(callee, "py_func") or callee.py_func.__module__.startswith("oceanbox.grid"):
            continue  # ghost cells are copied along columns too
        if not re.search(rf"call\w*\s+\S*\d{name}B", assembly):
            total += _loops_within(callee, assembly)
    return total


def _vector_loops(assembly: str) -> tuple[int, int]:
    """Number of innermost loops with packed doubles, and how many doubles the widest takes at a time."""
    lines = assembly.splitlines()
    labels = {found.group(1): number for number, line in enumerate(lines) if (found := LABEL.match(line))}
    loops = [
        (labels[found.group(1)], number)
        for number, line in enumerate(lines)
        if (found := JUMP.match(line)) and labels.get(found.group(1), number) < number
    ]
    count, widest = 0, 1
    for start, end in loops:
        if any(start <= s and e < end for s, e in loops if (s, e) != (start, end)):
            continue
        widths = [WIDTHS[width] for width in PACKED.findall("\n".join(lines[start : end + 1]))]
        if widths:
            count += 1
            widest = max(widest, *widths)
    return count, widest


def _reports() -> list[tuple[str, int, int, int]]:
    """Run a few steps of each scheme, then look at all kernels that were compiled for it and have loops."""
    from oceanbox.experiment.assembly import assemble_setup
    from oceanbox.experiment.model import Model
    from tests.benchmarks.basin import reference_config

    Model(assemble_setup(reference_config(24, 16))).advance(4)
    found = []
    for package_name in ("physics", "stepping"):
        package = importlib.import_module(f"oceanbox.{package_name}")
        for info in pkgutil.iter_modules(package.__path__, f"{package.__name__}."):
            module = importlib.import_module(info.name)
            for name, kernel in vars(module).items():
                plain = getattr(kernel, "py_func", None)
                if plain is None or plain.__module__ != module.__name__ or not _innermost_loops(plain):
                    continue
                for assembly in kernel.inspect_asm().values():
                    loops = _loops_within(kernel, assembly)
                    found.append(
                        (f"{module.__name__.removeprefix('oceanbox.')}.{name}", loops, *_vector_loops(assembly))
                    )
    return found


def find_vector_loops() -> list[LoopReport]:
    """One report for each compiled kernel that has loops of its own."""
    top = Path(__file__).resolve().parents[2]
    with tempfile.TemporaryDirectory() as cache:
        environment = os.environ | {"OCEANBOX_CACHE_DIR": cache}
        command = [sys.executable, "-m", "tests.benchmarks.vectorised"]
        found = subprocess.run(command, cwd=top, env=environment, capture_output=True, text=True, check=True)
    return [LoopReport(*row) for row in json.loads(found.stdout)]


if __name__ == "__main__":
    print(json.dumps(_reports()))
