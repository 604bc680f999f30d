"""A folder holds one run: finished, it is reported and not redone; of another run, it is refused and left as it is."""

from __future__ import annotations

import hashlib
import signal
from pathlib import Path
from typing import Any

import pytest

from oceanbox.config import Config, loads
from oceanbox.errors import InterruptedRun, ResultConflict
from oceanbox.experiment.api import equilibrate, evolve
from oceanbox.experiment.outcome import Ending
from oceanbox.experiment.running import Progress
from tests.experiment.tiny_runs import TINY

SHORT = {"evolve.duration_days": 20.0, "evolve.snapshot_interval_days": None, "output.sample_interval_days": 5.0}


def short(changes: dict[str, Any] | None = None) -> Config:
    return loads(TINY).with_changes(SHORT | (changes or {}))


@pytest.fixture(scope="module")
def finished(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("finished")
    evolve(short(), folder)
    return folder


def contents(folder: Path) -> dict[str, tuple[str, int]]:
    """Digest and time of change of every file."""
    return {
        path.name: (hashlib.sha256(path.read_bytes()).hexdigest(), path.stat().st_mtime_ns) for path in folder.iterdir()
    }


def never(progress: Progress) -> None:
    raise AssertionError("a finished run was run again")


def stop_at_once(progress: Progress) -> None:
    signal.raise_signal(signal.SIGTERM)


def test_a_finished_run_is_reported_and_not_redone(finished: Path) -> None:
    before = contents(finished)
    again = evolve(short(), finished, report=never)
    assert again.found
    assert again.path == finished / "result.nc"
    assert again.outcome.ending is Ending.COMPLETED
    assert again.outcome.sentence == "ran for the 20 days asked for"
    assert float(again.result["series_time"][-1] if "series_time" in again.result else 20.0) == 20.0
    assert contents(finished) == before


def test_a_finished_run_is_the_same_whatever_it_is_called(finished: Path) -> None:
    """Name and description change nothing of what is computed."""
    assert evolve(short({"name": "renamed", "description": "The same water."}), finished, report=never).found


@pytest.mark.parametrize(
    "change",
    [
        {"surface.wind.ramp_days": 1.0},
        {"evolve.duration_days": 25.0},
        {"output.sample_interval_days": 4.0},
        {"numerics.scheme": "runge_kutta_3"},
    ],
    ids=lambda change: next(iter(change)),
)
def test_the_folder_of_another_configuration_is_refused(finished: Path, change: dict[str, Any]) -> None:
    before = contents(finished)
    with pytest.raises(
        ResultConflict, match=r"result\.nc: got a file of another run \(evolve of configuration [0-9a-f]{12}\)"
    ):
        evolve(short(change), finished, report=never)
    assert contents(finished) == before


def test_the_folder_of_another_command_is_refused(finished: Path) -> None:
    with pytest.raises(ResultConflict, match="choose another folder with --into, or move that one away"):
        equilibrate(short(), finished, report=never)


def test_the_folder_of_a_run_from_another_state_is_refused(finished: Path, tmp_path: Path) -> None:
    """Where a run starts from makes it another run."""
    state = finished / "state.nc"
    evolve(short(), tmp_path / "from state", start=state)
    with pytest.raises(ResultConflict):
        evolve(short(), tmp_path / "from state", report=never)
    with pytest.raises(ResultConflict):
        evolve(short(), finished, start=state, report=never)


def test_the_folder_of_an_interrupted_run_of_another_configuration_is_refused(tmp_path: Path) -> None:
    """Its restart point would be lost, or worse, gone on from."""
    with pytest.raises(InterruptedRun):
        evolve(short(), tmp_path, report=stop_at_once)
    before = contents(tmp_path)
    assert "checkpoint.nc" in before and "result.nc" not in before
    with pytest.raises(ResultConflict, match=r"checkpoint\.nc: got a file of another run"):
        evolve(short({"surface.wind.ramp_days": 1.0}), tmp_path, report=never)
    assert contents(tmp_path) == before
    assert not evolve(short(), tmp_path).found


def test_a_run_from_a_salty_state_carries_its_salt(tmp_path: Path) -> None:
    """Also where the configuration itself makes no salt: a salinity that was brought along is moved by the water."""
    salty = {"surface.fresh_water": None, "layers.0.initial_salinity_g_per_kg": 36.0}
    evolve(short(salty), tmp_path / "salty")
    fresh = evolve(short({"surface.fresh_water": None}), tmp_path / "fresh", start=tmp_path / "salty" / "state.nc")
    assert float(abs(fresh.result["salt_advection"]).max()) > 0.0
    assert float(abs(fresh.result["salinity"] - 36.0).max()) < 0.5
