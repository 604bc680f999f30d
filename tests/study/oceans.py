"""A tiny ocean whose runs take a fraction of a second, studies of it, and an engine that runs them in this process."""

from __future__ import annotations

from collections import deque
from pathlib import Path

import yaml

from oceanbox.study.loading import LoadedStudy, load_study
from oceanbox.study.working import Answer, Task, run_here

TINY = """
name: tiny
basin: {width_km: 1200.0, south_km: -800.0, north_km: 800.0, cells_x: 12, cells_y: 16}
motion: {viscosity_m2_per_s: 8.0e4}
surface:
  heat: {restoring: {coefficient_W_per_m2_K: 35.0, target_temperature_degC: 20.0}}
  wind: {zonal_stress_N_per_m2: -0.03}
evolve: {duration_days: 3.0}
output: {series_interval_days: 1.0, sample_interval_days: 0.5}
"""
TARGET = "surface.heat.restoring.target_temperature_degC"
WIND = "surface.wind.zonal_stress_N_per_m2"
TARGETS = {"name": "target", "key": TARGET, "values": [15.0, 20.0, 25.0]}


def write_study(folder: Path, plan: dict[str, object], base: str = TINY) -> Path:
    """Write a base configuration and a study of it that lets each case evolve; the path of the study."""
    folder.mkdir(parents=True, exist_ok=True)
    (folder / "tiny.yaml").write_text(base, encoding="utf-8")
    path = folder / "study.yaml"
    study = {"name": "trial", "base": "tiny.yaml", "command": "evolve", **plan}
    path.write_text(yaml.safe_dump(study, sort_keys=False), encoding="utf-8")
    return path


def study_of(folder: Path, plan: dict[str, object], base: str = TINY) -> LoadedStudy:
    """Write and load a study."""
    return load_study(write_study(folder, plan, base))


class HereEngine:
    """Runs one task after another in this process and remembers them."""

    def __init__(self, slots: int = 1) -> None:
        self.slots = slots
        self.ran: list[Task] = []
        self._queue: deque[Task] = deque()

    def warm(self, task: Task) -> None:
        """Nothing to do."""

    def submit(self, task: Task) -> None:
        self.ran.append(task)
        self._queue.append(task)

    def next_answer(self, seconds: float) -> Answer | None:
        return run_here(self._queue.popleft()) if self._queue else None

    def stop(self) -> list[Answer]:
        return [Answer(task.key, "interrupted", "stopped") for task in self._queue]

    def close(self) -> None:
        """Nothing to do."""
