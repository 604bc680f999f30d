"""A warm start is asked for, is from the nearest finished case, and is on record."""

from __future__ import annotations

from pathlib import Path

from oceanbox.experiment.store import file_digest
from oceanbox.output.files import read_dataset
from oceanbox.study.collecting import collect
from oceanbox.study.executing import execute
from oceanbox.study.plan import folder_of
from oceanbox.study.status import CaseStatus, State, result_of, state_of, write_status
from tests.study.oceans import TARGETS, HereEngine, study_of

WARM = {"axes": [TARGETS | {"values": [15.0, 25.0, 17.0]}], "warm_start": "nearest"}


def test_by_default_every_case_starts_from_its_own_initial_state(tmp_path: Path) -> None:
    loaded = study_of(tmp_path, {"axes": [TARGETS]})
    engine = HereEngine()
    statuses = execute(loaded.cases, tmp_path, engine)
    assert [task.start for task in engine.ran] == [None] * 3
    assert [status.started_from for status in statuses] == [""] * 3


def test_a_warm_start_is_from_the_nearest_finished_case_and_every_record_says_so(tmp_path: Path) -> None:
    loaded = study_of(tmp_path, WARM)
    engine = HereEngine()
    execute(loaded.cases, tmp_path, engine)
    cold, warmer, between = loaded.cases
    assert [task.start for task in engine.ran] == [None, state_of(cold, tmp_path), state_of(cold, tmp_path)]
    folder = folder_of(cold, tmp_path).relative_to(tmp_path).as_posix()
    dataset = collect(loaded.study, loaded.cases, tmp_path)
    assert list(dataset["started_from"].values) == ["", folder, folder]
    for case in (warmer, between):
        assert read_dataset(result_of(case, tmp_path)).attrs["oceanbox_start"] == file_digest(state_of(cold, tmp_path))
    again = HereEngine()
    execute(loaded.cases, tmp_path, again)
    assert again.ran == []


def test_an_interrupted_warm_case_goes_on_from_where_it_once_started(tmp_path: Path) -> None:
    """By then a nearer case may be finished; its state would not fit the checkpoint."""
    loaded = study_of(tmp_path, WARM)
    cold, warmer, between = loaded.cases
    execute([cold, warmer], tmp_path, HereEngine())
    far = folder_of(warmer, tmp_path).relative_to(tmp_path).as_posix()
    write_status(between, tmp_path, CaseStatus(State.WAITING, reason="interrupted", started_from=far))
    (folder_of(between, tmp_path) / "checkpoint.nc").touch()
    engine = HereEngine()
    execute(loaded.cases, tmp_path, engine)
    assert [task.start for task in engine.ran] == [state_of(warmer, tmp_path)]
