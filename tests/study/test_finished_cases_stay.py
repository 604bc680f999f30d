"""A finished case is never run again, whatever is done to the study around it."""

from __future__ import annotations

import shutil
from pathlib import Path
from typing import Any

import pytest

from oceanbox.study.executing import execute
from oceanbox.study.plan import folder_of
from oceanbox.study.status import State
from tests.study.oceans import TARGET, TARGETS, TINY, WIND, HereEngine, study_of

INTO = "results"


def run(folder: Path, plan: dict[str, Any], base: str = TINY) -> set[object]:
    """Run a study in a folder; the values of the target temperature in the cases that really ran."""
    loaded = study_of(folder, plan, base)
    engine = HereEngine()
    statuses = execute(loaded.cases, folder / INTO, engine)
    assert [status.state for status in statuses] == [State.DONE] * len(loaded.cases)
    return {task.config.surface.heat.restoring.target_temperature_degC for task in engine.ran}


@pytest.fixture(scope="module")
def first(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A folder in which the study of three targets has been run, not to be changed."""
    folder = tmp_path_factory.mktemp("first")
    assert run(folder, {"axes": [TARGETS]}) == {15.0, 20.0, 25.0}
    return folder


@pytest.fixture
def done(first: Path, tmp_path: Path) -> Path:
    """A copy of that folder."""
    return shutil.copytree(first, tmp_path / "copy")


def test_the_same_study_again_runs_nothing_and_leaves_the_results_as_they_are(done: Path) -> None:
    before = {path: path.stat().st_mtime_ns for path in done.rglob("result.nc")}
    assert len(before) == 3
    assert run(done, {"axes": [TARGETS]}) == set()
    assert {path: path.stat().st_mtime_ns for path in done.rglob("result.nc")} == before


def test_reordering_and_renaming_run_nothing(done: Path) -> None:
    axis = {"name": "warmth", "long_name": "warmth of the air", "key": TARGET, "values": [25.0, 15.0, 20.0]}
    assert run(done, {"name": "other", "description": "Other words.", "axes": [axis]}) == set()


def test_extending_runs_only_what_is_new(done: Path) -> None:
    assert run(done, {"axes": [TARGETS | {"values": [12.0, 15.0, 20.0, 25.0]}]}) == {12.0}


def test_another_kind_of_plan_finds_the_same_cases(done: Path) -> None:
    cases = [{"name": f"warm {value:g}", "changes": {TARGET: value}} for value in (25.0, 30.0)]
    assert run(done, {"cases": cases}) == {30.0}


def test_an_axis_that_repeats_the_base_finds_what_was_run_without_it(done: Path) -> None:
    wind = {"name": "wind", "key": WIND, "values": [-0.03, -0.05]}
    loaded = study_of(done, {"axes": [TARGETS, wind]})
    engine = HereEngine()
    execute(loaded.cases, done / INTO, engine)
    assert [task.config.surface.wind.zonal_stress_N_per_m2 for task in engine.ran] == [-0.05] * 3


def test_a_changed_base_reruns_only_the_cases_it_changes(done: Path) -> None:
    # the target of the base has no part in cases that set it; a viscosity has part in all
    assert (
        run(done, {"axes": [TARGETS]}, TINY.replace("target_temperature_degC: 20.0", "target_temperature_degC: 18.0"))
        == set()
    )
    cases = [{"name": "as it is", "changes": {}}, {"name": "warm", "changes": {TARGET: 25.0}}]
    assert run(
        done, {"cases": cases}, TINY.replace("target_temperature_degC: 20.0", "target_temperature_degC: 18.0")
    ) == {18.0}
    assert run(done, {"axes": [TARGETS]}, TINY.replace("8.0e4", "9.0e4")) == {15.0, 20.0, 25.0}


def test_another_command_or_a_warm_start_is_another_case(done: Path) -> None:
    plan = {"axes": [TARGETS]}
    cold = {case.identity for case in study_of(done, plan).cases}
    assert cold.isdisjoint(case.identity for case in study_of(done, plan | {"command": "equilibrate"}).cases)
    assert cold.isdisjoint(case.identity for case in study_of(done, plan | {"warm_start": "nearest"}).cases)


def test_a_result_that_was_taken_away_is_made_again(done: Path) -> None:
    case = study_of(done, {"axes": [TARGETS]}).cases[1]
    (folder_of(case, done / INTO) / "result.nc").unlink()
    assert run(done, {"axes": [TARGETS]}) == {20.0}
