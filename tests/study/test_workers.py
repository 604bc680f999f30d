"""Worker processes change when a case is run, and nothing else; death of any process loses nothing that was finished."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

import pytest

from oceanbox.errors import ResultConflict
from oceanbox.study.engines.local import THREADS, LocalEngine
from oceanbox.study.executing import StudyProgress, execute
from oceanbox.study.locking import alone_in
from oceanbox.study.plan import folder_of
from oceanbox.study.status import State, status_of
from oceanbox.study.working import Task
from tests.study.oceans import TARGET, TARGETS, TINY, HereEngine, study_of, write_study
from tests.study.results import assert_same_results

PATIENCE = 120.0
# A case of the tiny ocean that never ends by itself within a test.
ENDLESS = TINY.replace("duration_days: 3.0", "duration_days: 3.0e5")


def wait_until(condition: Callable[[], bool], what: str) -> None:
    """Wait for something that takes a moment; fails the test where it takes for ever."""
    end = time.monotonic() + PATIENCE
    while not condition():
        assert time.monotonic() < end, f"{what}: not within {PATIENCE:g} s"
        time.sleep(0.05)


def test_two_workers_give_the_very_numbers_of_one(tmp_path: Path) -> None:
    loaded = study_of(tmp_path / "study", {"axes": [TARGETS]})
    execute(loaded.cases, tmp_path / "here", HereEngine())
    reports: list[StudyProgress] = []
    with LocalEngine(2) as engine:
        execute(loaded.cases, tmp_path / "two", engine, reports.append)
    assert max(len(report.running) for report in reports) == 2
    assert_same_results(tmp_path / "here", tmp_path / "two", 3)


def test_a_worker_has_one_thread_and_the_environment_of_the_parent_is_as_it_was(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    monkeypatch.setenv(THREADS[0], "7")
    monkeypatch.delenv(THREADS[1], raising=False)
    with LocalEngine(1) as engine:
        pool = engine._lanes[0]._living()
        assert [pool.submit(os.getenv, name).result() for name in THREADS] == ["1"] * len(THREADS)
    assert os.environ[THREADS[0]] == "7" and THREADS[1] not in os.environ


def test_a_worker_that_dies_is_replaced_and_its_case_is_run_again(tmp_path: Path) -> None:
    loaded = study_of(tmp_path, {"axes": [TARGETS]})
    killed: list[int] = []

    def kill_once(progress: StudyProgress) -> None:
        pid = engine._lanes[0].pid
        if progress.running and pid is not None and not killed:
            killed.append(pid)
            os.kill(pid, signal.SIGKILL)

    with LocalEngine(1) as engine:
        statuses = execute(loaded.cases, tmp_path, engine, kill_once)
        assert engine._lanes[0].pid not in (None, *killed)
    assert killed and [status.state for status in statuses] == [State.DONE] * 3


def test_a_case_that_kills_its_worker_every_time_fails_and_the_next_one_runs(tmp_path: Path) -> None:
    lengths = {"name": "length", "key": "evolve.duration_days", "values": [3.0e5, 3.0]}
    one, other = study_of(tmp_path, {"axes": [lengths]}).cases

    def kill_the_first(progress: StudyProgress) -> None:
        pid = engine._lanes[0].pid
        if one.name in progress.running and pid is not None and alive(pid):
            os.kill(pid, signal.SIGKILL)

    with LocalEngine(1) as engine:
        lost, done = execute([one, other], tmp_path, engine, kill_the_first)
    assert (lost.state, lost.failure, done.state) == (State.FAILED, "worker lost", State.DONE)
    assert "died 3 times" in lost.reason


def start_study(study: Path, into: Path) -> subprocess.Popen[str]:
    """The study command with two workers; what it says goes to a file, which no worker left behind can keep open."""
    command = [sys.executable, "-m", "oceanbox.cli", "study", str(study), "--into", str(into), "--workers", "2"]
    with study.with_suffix(".log").open("w") as log:
        return subprocess.Popen(command, stdout=log, stderr=subprocess.STDOUT, text=True)


def children_of(pid: int) -> set[int]:
    """The processes started by a process, by the kernel's own list."""
    try:
        return {int(child) for child in Path(f"/proc/{pid}/task/{pid}/children").read_text().split()}
    except FileNotFoundError:
        return set()


def alive(pid: int) -> bool:
    """Whether a process runs; one that is dead and not yet collected does not."""
    try:
        return Path(f"/proc/{pid}/stat").read_text().rpartition(")")[2].split()[0] != "Z"
    except FileNotFoundError:
        return False


@pytest.mark.skipif(not Path("/proc/self/task").exists(), reason="looks at processes through /proc")
def test_killing_the_study_loses_nothing_finished_and_leaves_no_worker_behind(tmp_path: Path) -> None:
    """One short case and two that never end: the study is killed outright while those run."""
    cases = [
        {"name": "short", "changes": {"evolve.duration_days": 3.0}},
        {"name": "endless", "changes": {TARGET: 25.0}},
        {"name": "endless too", "changes": {TARGET: 15.0}},
    ]
    study, into = write_study(tmp_path, {"cases": cases}, ENDLESS), tmp_path / "results"
    short, *endless = study_of(tmp_path, {"cases": cases}, ENDLESS).cases
    process = start_study(study, into)
    try:
        wait_until(lambda: status_of(short, into).state is State.DONE, "the short case")
        wait_until(lambda: all(status_of(case, into).state is State.RUNNING for case in endless), "the others")
        workers = children_of(process.pid)
        assert len(workers) >= 2
    finally:
        process.kill()
        process.wait()
    wait_until(lambda: not any(map(alive, workers)), "the end of the workers")
    written = (folder_of(short, into) / "result.nc").stat().st_mtime_ns

    # shorter endless cases are other cases; the short one is found
    plan = [case | {"changes": case["changes"] | {"evolve.duration_days": 3.0}} for case in cases]  # type: ignore[operator]
    loaded = study_of(tmp_path, {"cases": plan}, ENDLESS)
    engine = HereEngine()
    statuses = execute(loaded.cases, into, engine)
    assert [status.state for status in statuses] == [State.DONE] * 3
    assert len(engine.ran) == 2 and (folder_of(short, into) / "result.nc").stat().st_mtime_ns == written


def test_a_stopped_study_saves_its_cases_and_ends_with_the_results_of_one_that_was_not(tmp_path: Path) -> None:
    """Ctrl-C or a batch system's SIGTERM: checkpoints are written, and going on from them changes no bit."""
    plan = {"axes": [TARGETS | {"values": [20.0, 25.0]}], "changes": {"evolve.duration_days": 2000.0}}
    study, into = write_study(tmp_path, plan), tmp_path / "results"
    cases = study_of(tmp_path, plan).cases
    process = start_study(study, into)
    try:
        # the last thing a run does before it begins to step
        wait_until(lambda: all((folder_of(case, into) / "config.yaml").exists() for case in cases), "the cases")
        process.send_signal(signal.SIGTERM)
        process.wait(PATIENCE)
    finally:
        process.kill()
    assert process.returncode == 5 and "the same command goes on" in study.with_suffix(".log").read_text()
    noted = [json.loads((folder_of(case, into) / "status.json").read_text()) for case in cases]
    assert {entry["state"] for entry in noted} == {"waiting"}
    assert all((folder_of(case, into) / "checkpoint.nc").exists() for case in cases)
    execute(cases, into, HereEngine())
    execute(cases, tmp_path / "straight", HereEngine())
    assert_same_results(into, tmp_path / "straight", 2)


def test_a_study_killed_outright_is_gone_on_with_by_the_same_command_and_ends_as_if_nothing_had_happened(
    tmp_path: Path,
) -> None:
    """`kill -9` of the study while one case is done and the next ones run: the done one stays, the others are the same."""
    plan = {"axes": [TARGETS | {"values": [15.0, 20.0, 25.0]}], "changes": {"evolve.duration_days": 800.0}}
    study, into = write_study(tmp_path, plan), tmp_path / "results"
    cases = study_of(tmp_path, plan).cases
    process = start_study(study, into)
    try:
        wait_until(lambda: any(status_of(case, into).state is State.DONE for case in cases), "the first case")
        assert process.poll() is None
        workers = children_of(process.pid)
    finally:
        process.kill()
        process.wait()
    wait_until(lambda: not any(map(alive, workers)), "the end of the workers")
    done = [case for case in cases if status_of(case, into).state is State.DONE]
    written = {case.name: (folder_of(case, into) / "result.nc").stat().st_mtime_ns for case in done}
    assert 1 <= len(done) < 3
    again = start_study(study, into)
    assert again.wait(PATIENCE) == 0
    assert {case.name: (folder_of(case, into) / "result.nc").stat().st_mtime_ns for case in done} == written
    execute(cases, tmp_path / "straight", HereEngine())
    assert_same_results(into, tmp_path / "straight", 3)


def test_a_folder_in_which_a_study_runs_is_refused_to_another_one(tmp_path: Path) -> None:
    with (
        alone_in(tmp_path),
        pytest.raises(ResultConflict, match="another process is running a study there"),
        alone_in(tmp_path),
    ):
        pass
    with alone_in(tmp_path):
        pass


def test_more_tasks_than_workers_are_refused(tmp_path: Path) -> None:
    case = study_of(tmp_path, {"cases": [{"name": "a"}]}, ENDLESS).cases[0]
    task = Task(case.identity, case.config, "evolve", tmp_path / "case")
    with LocalEngine(1) as engine:
        engine.submit(task)
        with pytest.raises(ValueError, match="wait for an answer first"):
            engine.submit(task)
        (answer,) = engine.stop()
    assert answer.failure == "interrupted"
