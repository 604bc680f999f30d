"""A case that fails is a row with its reason and stops nothing."""

from __future__ import annotations

import math
from dataclasses import replace
from pathlib import Path

import pytest

from oceanbox.study.collecting import collect
from oceanbox.study.executing import StudyProgress, execute
from oceanbox.study.status import State, status_of, write_status
from tests.study.oceans import TARGET, TARGETS, HereEngine, study_of

# No current stands a heat flux like this: the run breaks down and says where.
BURNING = {"name": "burning", "changes": {"surface.heat.prescribed_W_per_m2": 1.0e9}}
SOUND = {"name": "sound", "changes": {}}


def test_a_failed_case_is_a_row_with_its_reason_and_the_others_run(tmp_path: Path) -> None:
    loaded = study_of(tmp_path, {"cases": [BURNING, SOUND]})
    reports: list[StudyProgress] = []
    broken, sound = execute(loaded.cases, tmp_path, HereEngine(), reports.append)
    assert (broken.state, sound.state) == (State.FAILED, State.DONE)
    assert broken.reason
    assert (reports[-1].done, reports[-1].failed, reports[-1].running) == (1, 1, ())
    dataset = collect(loaded.study, loaded.cases, tmp_path)
    assert list(dataset["status"].values) == ["failed", "done"]
    assert dataset["reason"].values[0] == broken.reason
    depth = dataset["thermocline_depth_equator_mean"].values
    assert math.isnan(depth[0]) and depth[1] > 0.0


def test_an_unstable_case_is_not_run_again_by_the_same_program_but_by_another_version(tmp_path: Path) -> None:
    loaded = study_of(tmp_path, {"cases": [BURNING]})
    (status,) = execute(loaded.cases, tmp_path, HereEngine())
    assert status.failure == "UnstableRun"
    again = HereEngine()
    execute(loaded.cases, tmp_path, again)
    assert again.ran == []
    write_status(loaded.cases[0], tmp_path, replace(status, version="0.0.0"))
    execute(loaded.cases, tmp_path, again)
    assert len(again.ran) == 1


def test_a_case_whose_failure_is_not_its_own_is_tried_again(tmp_path: Path) -> None:
    loaded = study_of(tmp_path, {"axes": [TARGETS]})
    lost = replace(status_of(loaded.cases[0], tmp_path), state=State.FAILED, failure="worker lost", reason="it died")
    write_status(loaded.cases[0], tmp_path, lost)
    statuses = execute(loaded.cases, tmp_path, HereEngine())
    assert [status.state for status in statuses] == [State.DONE] * 3
    assert statuses[0].reason == ""


def test_a_case_whose_start_fails_fails_with_its_reason_and_one_whose_start_is_done_waits_for_it(
    tmp_path: Path,
) -> None:
    broken, sound = study_of(tmp_path, {"cases": [BURNING, SOUND]}).cases
    after_broken = replace(sound, name="after broken", start=broken)
    after_sound = replace(sound, name="after sound", start=sound)
    engine = HereEngine(slots=4)
    statuses = execute([after_broken, after_sound, broken, sound], tmp_path, engine)
    assert [status.state for status in statuses] == [State.FAILED, State.DONE, State.FAILED, State.DONE]
    assert broken.name in statuses[0].reason and statuses[2].reason in statuses[0].reason
    assert [task.key for task in engine.ran] == [broken.identity, sound.identity, after_sound.identity]
    assert engine.ran[-1].start is not None and engine.ran[-1].start.parent.name == sound.identity[:16]


def test_an_unforeseen_error_leaves_its_trace_beside_the_case(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def burst(*_: object) -> None:
        raise ZeroDivisionError("out of the blue")

    monkeypatch.setattr("oceanbox.experiment.api.evolve", burst)
    loaded = study_of(tmp_path, {"cases": [SOUND, {"name": "warm", "changes": {TARGET: 25.0}}]})
    statuses = execute(loaded.cases, tmp_path, HereEngine())
    assert [status.reason for status in statuses] == ["ZeroDivisionError: out of the blue"] * 2
    traces = [path.read_text() for path in tmp_path.rglob("failure.txt")]
    assert len(traces) == 2 and all("burst" in trace for trace in traces)
