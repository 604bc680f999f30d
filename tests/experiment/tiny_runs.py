"""A run of a second or two, ways to start it as a user does, and what it means for two of its files to be the same."""

from __future__ import annotations

import os
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

import netCDF4
import numpy as np

from oceanbox.experiment.running import Progress, Run

TOP = Path(__file__).resolve().parents[2]

TINY = """
name: tiny
basin: {width_km: 2000.0, south_km: -4000.0, north_km: 4000.0, cells_x: 8, cells_y: 40}
motion: {viscosity_m2_per_s: 6.0e5}
surface:
  fresh_water:
    precipitation_minus_evaporation_m_per_year: {shape: band, peak: 2.0, from_deg: 20.0, to_deg: 35.0}
    balance: uniform
equilibrium: {window_years: 0.25, longest_years: 1.0}
evolve: {duration_days: 600.0, snapshot_interval_days: 30.0}
output: {sample_interval_days: 2.0, series_interval_days: 10.0}
"""

# Checkpoints every tenth of a second, where a run of hours has them every half minute.
FREQUENT_CHECKPOINTS = """
import sys
from oceanbox.experiment import api
from oceanbox.cli import main
api.CHECKPOINT_SECONDS = 0.1
sys.exit(main(sys.argv[1:]))
"""
THE_COMMAND = ("-m", "oceanbox.cli")
THE_COMMAND_WITH_FREQUENT_CHECKPOINTS = ("-c", FREQUENT_CHECKPOINTS)

# When a file was made, and by which state of the sources, says nothing about what is in it.
CIRCUMSTANCES = {"date_created", "history", "oceanbox_commit"}


class Quiet:
    """An observer that sees nothing and saves nothing."""

    def progress(self, progress: Progress) -> None: ...

    def snapshot(self, run: Run, number: int) -> None: ...

    def checkpoint_due(self) -> bool:
        return False

    def save(self, run: Run) -> None: ...


def start(*arguments: str | Path, via: tuple[str, ...] = THE_COMMAND) -> subprocess.Popen[str]:
    """Start ``oceanbox`` with these arguments in a process of its own."""
    environment = os.environ | {"PYTHONPATH": str(TOP), "COLUMNS": "200"}
    command = [sys.executable, *via, *map(str, arguments)]
    return subprocess.Popen(command, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True, env=environment)


def oceanbox(*arguments: str | Path, via: tuple[str, ...] = THE_COMMAND) -> subprocess.CompletedProcess[str]:
    """Run ``oceanbox`` with these arguments to its end."""
    process = start(*arguments, via=via)
    out, err = process.communicate(timeout=300)
    return subprocess.CompletedProcess(process.args, process.returncode, out, err)


def wait_for(happened: Callable[[], bool], process: subprocess.Popen[str]) -> None:
    """Wait until something has happened while a process runs."""
    while not happened():
        if process.poll() is not None:
            raise AssertionError(f"ended before that: {process.communicate()[1]}")
        time.sleep(0.005)


def differences(one: Path, other: Path) -> list[str]:
    """Names of variables, dimensions and attributes in which two files differ by a bit; the circumstances apart."""
    with netCDF4.Dataset(one) as a, netCDF4.Dataset(other) as b:
        found = list(a.variables.keys() ^ b.variables.keys()) + list(a.dimensions.keys() ^ b.dimensions.keys())
        for file in (a, b):
            file.set_auto_maskandscale(False)
        for name in a.variables.keys() & b.variables.keys():
            if bits(a[name]) != bits(b[name]):
                found.append(name)
            found += [
                f"{name}.{key}"
                for key in a[name].ncattrs()
                if str(a[name].getncattr(key)) != str(b[name].getncattr(key))
            ]
        for key in set(a.ncattrs()) | set(b.ncattrs()) - CIRCUMSTANCES:
            if key not in CIRCUMSTANCES and str(getattr(a, key, None)) != str(getattr(b, key, None)):
                found.append(f"attribute {key}")
        return found


def bits(variable: netCDF4.Variable) -> tuple[str, tuple[int, ...], object]:
    """Type, shape and contents of a variable, the contents so that a NaN equals itself and 0.0 differs from -0.0."""
    values = np.asarray(variable[...])
    return str(values.dtype), values.shape, values.tolist() if values.dtype == object else values.tobytes()
