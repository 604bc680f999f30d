"""A run that was stopped or killed goes on with the same command and ends as if nothing had happened, to the last bit."""

from __future__ import annotations

import json
import math
import random
import signal
import time
from collections.abc import Callable
from functools import partial
from pathlib import Path

import pytest

from oceanbox.config import Config, loads
from oceanbox.errors import InterruptedRun
from oceanbox.experiment.api import equilibrate, evolve
from oceanbox.experiment.assembly import assemble_setup
from oceanbox.experiment.model import Model
from oceanbox.experiment.outcome import Ending
from oceanbox.experiment.plan import evolution_plan
from oceanbox.experiment.running import Progress, Run
from oceanbox.experiment.scales import derive_scales
from oceanbox.output.checkpoint import load_checkpoint
from oceanbox.output.files import part_of, read_dataset
from tests.experiment.tiny_runs import (
    THE_COMMAND_WITH_FREQUENT_CHECKPOINTS,
    TINY,
    Quiet,
    differences,
    oceanbox,
    start,
    wait_for,
)

INTERRUPTED = 5


@pytest.fixture(scope="module")
def config(tmp_path_factory: pytest.TempPathFactory) -> Path:
    path = tmp_path_factory.mktemp("config") / "tiny.yaml"
    path.write_text(TINY)
    return path


@pytest.fixture(scope="module")
def uninterrupted(config: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The folder of the run that nobody disturbed."""
    folder = tmp_path_factory.mktemp("uninterrupted")
    evolve(config, folder)
    return folder


def assert_same_run(folder: Path, uninterrupted: Path) -> None:
    for name in ("result.nc", "snapshots.nc", "state.nc"):
        assert differences(folder / name, uninterrupted / name) == [], name
    assert not (folder / "checkpoint.nc").exists()
    assert (folder / "config.yaml").read_text() == (uninterrupted / "config.yaml").read_text()


def test_a_run_told_to_stop_goes_on_to_the_same_result(config: Path, uninterrupted: Path, tmp_path: Path) -> None:
    """SIGTERM: the run saves itself, says how to go on, and ends with an exit code of its own."""
    process = start("evolve", config, "--into", tmp_path)
    wait_for(part_of(tmp_path / "snapshots.nc").exists, process)
    process.send_signal(signal.SIGTERM)
    _, told = process.communicate(timeout=60)
    assert process.returncode == INTERRUPTED, told
    last = told.splitlines()[-1]
    assert last.startswith("interrupted at day ")
    assert f"run the same command again to go on from {tmp_path / 'checkpoint.nc'}" in last
    assert not (tmp_path / "result.nc").exists()

    again = oceanbox("evolve", config, "--into", tmp_path)
    assert again.returncode == 0, again.stderr
    assert_same_run(tmp_path, uninterrupted)


def steps_in(checkpoint: Path) -> int:
    """Steps taken up to a restart point, 0 if there is none."""
    return int(json.loads(str(load_checkpoint(checkpoint)[1]["run"]))["total_steps"]) if checkpoint.exists() else 0


def made_at(path: Path) -> int:
    """When a file was written, ns; 0 if it is not there."""
    return path.stat().st_mtime_ns if path.exists() else 0


def newer(path: Path, than: int) -> bool:
    return made_at(path) > than


def test_a_run_killed_again_and_again_goes_on_to_the_same_result(
    config: Path, uninterrupted: Path, tmp_path: Path
) -> None:
    """SIGKILL at two random moments, each after a new checkpoint; nothing can be saved or said then."""
    moments = random.Random()
    checkpoint = tmp_path / "checkpoint.nc"
    reached = [0]
    for _ in range(2):
        before = made_at(checkpoint)
        process = start("evolve", config, "--into", tmp_path, via=THE_COMMAND_WITH_FREQUENT_CHECKPOINTS)
        wait_for(partial(newer, checkpoint, before), process)
        time.sleep(moments.uniform(0.0, 0.3))
        process.kill()
        process.communicate()
        reached.append(steps_in(checkpoint))
    assert reached == sorted(set(reached))
    again = oceanbox("evolve", config, "--into", tmp_path)
    assert again.returncode == 0, again.stderr
    assert_same_run(tmp_path, uninterrupted)


KILLED_BEFORE_THE_RESULT = """
import os, signal, sys
from oceanbox.experiment import api
from oceanbox.cli import main
api.CHECKPOINT_SECONDS = 0.1
api.write_dataset = lambda *_: os.kill(os.getpid(), signal.SIGKILL)
sys.exit(main(sys.argv[1:]))
"""


def test_a_run_killed_between_its_snapshots_and_its_result_keeps_every_snapshot(
    config: Path, uninterrupted: Path, tmp_path: Path
) -> None:
    """The snapshots are whole before the result is; a kill in between must not lose them."""
    killed = oceanbox("evolve", config, "--into", tmp_path, via=("-c", KILLED_BEFORE_THE_RESULT))
    assert killed.returncode == -signal.SIGKILL
    assert (tmp_path / "snapshots.nc").exists() and not (tmp_path / "result.nc").exists()
    again = oceanbox("evolve", config, "--into", tmp_path)
    assert again.returncode == 0, again.stderr
    assert_same_run(tmp_path, uninterrupted)


def stop_at_once(progress: Progress) -> None:
    """A reporter that asks the run to stop whenever it is told where the run is."""
    signal.raise_signal(signal.SIGTERM)


def stretches(run: Callable[..., object], config: Config, folder: Path) -> int:
    """Run in stretches, each stopped at its first chance; returns how many it took."""
    for count in range(1, 10_000):
        try:
            run(config, folder, report=stop_at_once)
        except InterruptedRun:
            continue
        return count
    raise AssertionError("never ended")


@pytest.mark.parametrize("scheme", ["forward_backward", "runge_kutta_3"])
def test_a_run_may_be_stopped_at_every_single_chance(scheme: str, tmp_path: Path) -> None:
    """Everything that carries over from stretch to stretch is in the restart point: the clock, the scheme's memory, moments,
    books, series, and a step that was shortened on the way because the ocean became faster than the one it was chosen for."""
    config = loads(TINY).with_changes(
        {
            "numerics.scheme": scheme,
            "layers.0.initial_temperature_degC": 28.0,
            "motion.viscosity_m2_per_s": 3.8e5,
            "numerics.deepest_layer_m": 150.0,
            "evolve.duration_days": 65.0,
            "evolve.snapshot_interval_days": 16.0,
            "equilibrium.window_years": 0.1,
            "output.sample_interval_days": 9.0,
            "output.series_interval_days": 20.0,
        }
    )
    # The longest step for 150 m of the warmest water is too long as soon as the wind has piled up more.
    limits = derive_scales(assemble_setup(config)).limits
    assert limits.smallest == limits.waves
    config = config.with_changes({"numerics.step_s": math.floor(limits.smallest)})
    whole = evolve(config, tmp_path / "whole")
    assert stretches(evolve, config, tmp_path / "stretches") > 10
    assert_same_run(tmp_path / "stretches", tmp_path / "whole")
    assert "step shortened" in whole.result.attrs["history"]
    assert "step shortened" in read_dataset(tmp_path / "stretches" / "result.nc").attrs["history"]


def test_a_restored_run_would_save_the_very_restart_point_it_came_from(tmp_path: Path) -> None:
    """Nothing is dropped on the way: arrays, counters, clock, notes, and the speeds for which the step was last checked."""
    config = loads(TINY)
    for _ in range(3):
        with pytest.raises(InterruptedRun):
            evolve(config, tmp_path, report=stop_at_once)
    arrays, attributes = load_checkpoint(tmp_path / "checkpoint.nc")
    run = Run(Model(assemble_setup(config)), evolution_plan(config), Quiet())
    run.restore(arrays, attributes)
    again = run.checkpoint_arrays()
    assert again.keys() == arrays.keys()
    assert all(again[name].tobytes() == arrays[name].tobytes() for name in arrays)
    assert run.checkpoint_attributes() == {name: attributes[name] for name in run.checkpoint_attributes()}
    assert run.model.total_steps > 0


@pytest.mark.parametrize(
    "acceleration",
    [
        pytest.param(None, id="plain"),
        pytest.param(
            {"pace_limit": 1.0, "lead_years": 0.1, "cycle_years": 0.05, "memory": 3, "longest_years": 0.2},
            id="extrapolated",
        ),
        pytest.param(
            {"pace_limit": 20.0, "lead_years": 0.1, "cycle_years": 0.05, "memory": 3, "longest_years": 0.2},
            id="hastened",
        ),
    ],
)
def test_a_search_for_equilibrium_may_be_stopped_at_every_single_chance(
    acceleration: dict[str, float] | None, tmp_path: Path
) -> None:
    """The judgement over windows carries over too, and what an extrapolation remembers."""
    config = loads(TINY).with_changes(
        {
            "output.sample_interval_days": 40.0,
            "output.series_interval_days": 50.0,
            "equilibrium.window_years": 0.15,
            "equilibrium.longest_years": 0.75,
            "equilibrium.acceleration": acceleration,
        }
    )
    whole = equilibrate(config, tmp_path / "whole")
    assert stretches(equilibrate, config, tmp_path / "stretches") > 7
    assert differences(tmp_path / "stretches" / "result.nc", tmp_path / "whole" / "result.nc") == []
    assert whole.outcome.ending is Ending.NOT_IN_EQUILIBRIUM
    extrapolated = "spin-up ended" in whole.result.attrs["history"]
    assert extrapolated is (acceleration is not None)
