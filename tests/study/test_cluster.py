"""The workers of a cluster give what one process gives, with a shared folder or without, also when one of them dies."""

from __future__ import annotations

import os
import signal
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from oceanbox.errors import OceanboxError
from oceanbox.study.executing import StudyProgress, execute
from oceanbox.study.plan import folder_of
from oceanbox.study.status import State
from oceanbox.study.working import TOKEN, Task, run_task
from tests.study.oceans import TARGETS, HereEngine, study_of
from tests.study.results import assert_same_results

dask = pytest.importorskip("dask")
distributed = pytest.importorskip("distributed")

from oceanbox.study.engines.cluster import ClusterEngine  # noqa: E402

PLAN = {"axes": [TARGETS | {"values": [14.0, 16.0, 18.0, 20.0]}], "changes": {"evolve.duration_days": 400.0}}


@pytest.fixture
def cluster() -> Iterator[Any]:
    """A scheduler with two worker processes of one thread."""
    settings = {"distributed.scheduler.allowed-failures": 3, "distributed.comm.timeouts.connect": "30s"}
    with (
        dask.config.set(settings),
        distributed.LocalCluster(n_workers=2, threads_per_worker=1, processes=True, dashboard_address=None) as found,
    ):
        yield found


def in_the_middle(case: Path) -> bool:
    """Whether a run has begun to step, which it does when its configuration is written, and has no result yet."""
    return (case / "config.yaml").exists() and not (case / "result.nc").exists()


def test_a_killed_worker_of_a_cluster_loses_nothing_and_changes_no_number(cluster: Any, tmp_path: Path) -> None:
    loaded = study_of(tmp_path, PLAN)
    execute(loaded.cases, tmp_path / "here", HereEngine())
    killed: list[int] = []

    folders = {case.name: folder_of(case, tmp_path / "there") for case in loaded.cases}

    def kill_one_in_the_middle(progress: StudyProgress) -> None:
        """Once a case is done and both workers are in the middle of one, so that whichever dies takes a case with it."""
        begun = [name for name in progress.running if in_the_middle(folders[name])]
        if not killed and progress.done >= 1 and len(begun) == 2:
            worker = next(iter(cluster.workers.values()))
            killed.append(worker.pid)
            os.kill(killed[0], signal.SIGKILL)

    with ClusterEngine(cluster.scheduler_address, tmp_path / "there") as engine:
        engine.await_workers(2, 60.0)
        statuses = execute(loaded.cases, tmp_path / "there", engine, kill_one_in_the_middle)
    assert killed and killed[0] not in {worker.pid for worker in cluster.workers.values()}
    assert [status.state for status in statuses] == [State.DONE] * 4
    assert_same_results(tmp_path / "here", tmp_path / "there", 4)


@pytest.mark.slow
def test_workers_that_do_not_see_the_folder_send_their_results(
    cluster: Any, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """The second case starts from the end of the first, which must then travel too."""
    loaded = study_of(tmp_path, {"axes": [TARGETS | {"values": [15.0, 25.0]}], "warm_start": "nearest"})
    execute(loaded.cases, tmp_path / "here", HereEngine())
    with ClusterEngine(cluster.scheduler_address, tmp_path / "there") as engine:
        engine._token = "a folder of another machine"
        monkeypatch.setattr(ClusterEngine, "slots", 1)
        statuses = execute(loaded.cases, tmp_path / "there", engine)
    assert [status.state for status in statuses] == [State.DONE] * 2
    assert statuses[1].started_from
    assert_same_results(tmp_path / "here", tmp_path / "there", 2)


def test_a_worker_knows_the_folder_by_its_token(tmp_path: Path) -> None:
    case = study_of(tmp_path, {"axes": [TARGETS]}).cases[0]
    folder = tmp_path / "into" / "cases" / "one"
    (tmp_path / "into").mkdir()
    (tmp_path / "into" / TOKEN).write_text("word")
    seen = run_task(Task(case.identity, case.config, "evolve", folder, token="word"))
    assert seen.files == {} and (folder / "result.nc").exists()
    unseen = run_task(Task(case.identity, case.config, "evolve", folder.with_name("other"), token="other word"))
    assert set(unseen.files) == {"result.nc", "state.nc", "config.yaml"}
    assert not folder.with_name("other").exists()


def test_a_worker_with_another_version_of_the_program_refuses(tmp_path: Path) -> None:
    case = study_of(tmp_path, {"axes": [TARGETS]}).cases[0]
    answer = run_task(Task(case.identity, case.config, "evolve", tmp_path / "case", version="0.0.0"))
    assert answer.failure == "WrongVersion" and "install the same version everywhere" in answer.reason


def test_an_address_where_nobody_answers_is_told(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("oceanbox.study.engines.cluster.PATIENCE_SECONDS", 0.5)
    with pytest.raises(OceanboxError, match=r"tcp://127\.0\.0\.1:9: no scheduler answers there"):
        ClusterEngine("tcp://127.0.0.1:9", tmp_path)
