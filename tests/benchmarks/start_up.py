"""How long it takes from the command to the first step, and that the compile cache can be trusted.

All of it in processes of their own with caches of their own, timed both by the clock and by the processor time they used: on a
machine that others use, processor time is nearer to what an idle machine would need.
"""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
import tempfile
import time
from pathlib import Path
from typing import NamedTuple

__all__ = ["Timing", "cache_notices_edits", "reads_only", "time_help", "time_to_first_step"]

TOP = Path(__file__).resolve().parents[2]

# The command as a user gives it, stopped when its first step has been taken.
FIRST_STEP = """
import os, resource, sys, time
from oceanbox.experiment import model
advance = model.Model.advance
def first(self, steps):
    advance(self, 1)
    used = resource.getrusage(resource.RUSAGE_SELF)
    print(time.time() - float(os.environ["STARTED"]), used.ru_utime + used.ru_stime, flush=True)
    os._exit(0)
model.Model.advance = first
from oceanbox.cli import main
main(["evolve", sys.argv[1], "--into", sys.argv[2]])
"""
FINGERPRINT = """
from oceanbox.compiling import CACHE_FOLDER
from oceanbox.config import load
from oceanbox.experiment.assembly import assemble_setup
from oceanbox.experiment.model import Model
model = Model(assemble_setup(load("configs/quick.yaml").config.with_changes({"basin.cells_x": 12, "basin.cells_y": 20})))
model.advance(20)
print(model.state.thickness.sum().hex(), model.state.heat.sum().hex(), CACHE_FOLDER)
"""
# In a file of its own, called from other files; and a number that compiled code holds as a constant.
EDITS = (
    ("oceanbox/physics/limiter.py", "max(0.0, min(min(2.0 *", "max(0.0, min(min(1.5 *"),
    ("oceanbox/stepping/weights.py", "GAMMA = 0.088", "GAMMA = 0.087"),
)


class Timing(NamedTuple):
    """Seconds by the clock and of processor time."""

    clock: float
    processor: float


def _environment(cache: Path, source: Path = TOP) -> dict[str, str]:
    return os.environ | {"OCEANBOX_CACHE_DIR": str(cache), "PYTHONPATH": str(source), "NUMBA_NUM_THREADS": "1"}


def time_to_first_step(cache: Path) -> Timing:
    """From the start of ``oceanbox evolve configs/quick.yaml`` to the end of its first step."""
    with tempfile.TemporaryDirectory() as folder:
        environment = _environment(cache) | {"STARTED": str(time.time())}
        command = [sys.executable, "-c", FIRST_STEP, str(TOP / "configs" / "quick.yaml"), f"{folder}/run"]
        found = subprocess.run(command, env=environment, capture_output=True, text=True, check=True)
    clock, processor = (float(word) for word in found.stdout.split()[-2:])
    return Timing(clock, processor)


def time_help() -> Timing:
    """Of ``oceanbox --help``."""
    code = "import resource, time, os\nfrom oceanbox.cli import main\ntry:\n    main(['--help'])\nexcept SystemExit:\n    pass\n"
    code += "used = resource.getrusage(resource.RUSAGE_SELF)\n"
    code += "print(time.time() - float(os.environ['STARTED']), used.ru_utime + used.ru_stime)"
    with tempfile.TemporaryDirectory() as cache:
        environment = _environment(Path(cache)) | {"STARTED": str(time.time())}
        found = subprocess.run(
            [sys.executable, "-c", code], env=environment, capture_output=True, text=True, check=True
        )
    clock, processor = (float(word) for word in found.stdout.split()[-2:])
    return Timing(clock, processor)


def _copy(folder: Path) -> Path:
    """The package and its configurations elsewhere, so that they can be edited or made read-only."""
    for name in ("oceanbox", "configs"):
        shutil.copytree(TOP / name, folder / name, ignore=shutil.ignore_patterns("__pycache__"))
    return folder


def _fingerprint(source: Path, cache: Path) -> str:
    command = [sys.executable, "-B", "-c", FINGERPRINT]
    found = subprocess.run(
        command, cwd=source, env=_environment(cache, source), capture_output=True, text=True, check=True
    )
    return " ".join(found.stdout.split()[:2])


def cache_notices_edits() -> list[tuple[str, bool, bool]]:
    """For each edit of a kernel source: whether the result changed with the old cache at hand, and is that of an empty cache."""
    findings = []
    with tempfile.TemporaryDirectory() as folder:
        source, shared = _copy(Path(folder) / "source"), Path(folder) / "shared"
        last = _fingerprint(source, shared)
        for number, (name, old, new) in enumerate(EDITS):
            file = source / name
            text = file.read_text(encoding="utf-8")
            if old not in text:
                raise LookupError(f"{name} no longer holds {old!r}; name another edit")
            file.write_text(text.replace(old, new), encoding="utf-8")
            now = _fingerprint(source, shared)
            findings.append((name, now != last, now == _fingerprint(source, Path(folder) / f"empty{number}")))
            last = now
    return findings


def reads_only() -> str:
    """Run an installation that may not be written to, without a home; where its compiled code went.

    ``HOME`` is a place where not even the superuser can make a folder.  Raises RuntimeError if the installation was changed.
    """
    with tempfile.TemporaryDirectory() as folder:
        source = _copy(Path(folder) / "source")
        scratch = Path(folder) / "scratch"
        scratch.mkdir()
        before = sorted(source.rglob("*"))
        for path in (source, *before):
            path.chmod(0o555 if path.is_dir() else 0o444)
        environment = {
            "PYTHONPATH": str(source),
            "HOME": "/proc/nowhere",
            "TMPDIR": str(scratch),
            "PATH": os.environ["PATH"],
        }
        command = [sys.executable, "-B", "-c", FINGERPRINT]
        found = subprocess.run(command, cwd=source, env=environment, capture_output=True, text=True, check=True)
        for path in (source, *before):
            path.chmod(0o755 if path.is_dir() else 0o644)
        if sorted(source.rglob("*")) != before:
            raise RuntimeError("the installation was written to")
        where = Path(found.stdout.split()[-1])
        return f"TMPDIR/{where.relative_to(scratch)}" if where.is_relative_to(scratch) else str(where)
