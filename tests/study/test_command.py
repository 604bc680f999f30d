"""The study command: what it prints, what it leaves behind, and its exit codes."""

from __future__ import annotations

import subprocess
import sys
from contextlib import nullcontext
from pathlib import Path

import pytest
import xarray as xr

from oceanbox.cli import main
from oceanbox.study.executing import StudyProgress
from oceanbox.study.run import OverAll, dry_run, run_study
from tests.study.oceans import TARGETS, HereEngine, write_study

BURNING = {"name": "burning", "changes": {"surface.heat.prescribed_W_per_m2": 1.0e9}}
SOUND = {"name": "sound", "changes": {}}


@pytest.fixture
def here(monkeypatch: pytest.MonkeyPatch) -> HereEngine:
    """Runs the cases of a study in this process instead of in workers."""
    engine = HereEngine(2)
    monkeypatch.setattr("oceanbox.study.run._engine", lambda *_: nullcontext(engine))
    return engine


def test_a_study_leaves_its_dataset_its_table_its_methods_and_itself(
    here: HereEngine, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    study, into = write_study(tmp_path, {"axes": [TARGETS]}), tmp_path / "into"
    assert main(["study", str(study), "--into", str(into)]) == 0
    out, err = capsys.readouterr()
    assert out.splitlines()[0] == f"{into}: 3 of 3 cases done"
    assert "3 of 3 done" in err
    for name in ("collected.nc", "scalars.csv", "methods.txt"):
        assert str(into / name) in out and (into / name).stat().st_size > 0
    assert (into / "study.yaml").read_text() == study.read_text()
    with xr.open_dataset(into / "collected.nc") as dataset:
        assert dataset.sizes["target"] == 3
        assert dataset.attrs["oceanbox_study"] == study.read_text()
        assert "cells_x: 12" in dataset.attrs["oceanbox_config"]


def test_a_failed_case_is_named_with_its_reason_and_sets_the_exit_code(
    here: HereEngine, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    study = write_study(tmp_path, {"cases": [BURNING, SOUND]})
    assert main(["study", str(study), "--into", str(tmp_path / "into")]) == 6
    out, err = capsys.readouterr()
    assert "1 of 2 cases done, 1 failed" in out
    assert any(line.startswith("failed: burning: ") for line in err.splitlines())


def test_a_case_that_is_not_in_equilibrium_sets_the_exit_code(here: HereEngine, tmp_path: Path) -> None:
    quick = {
        "equilibrium.acceleration": None,
        "equilibrium.window_years": 0.01,
        "equilibrium.longest_years": 0.02,
        "equilibrium.heat_drift_per_decade": 1.0e-9,
    }
    study = write_study(tmp_path, {"command": "equilibrate", "changes": quick, "cases": [SOUND]})
    assert main(["study", str(study), "--into", str(tmp_path / "into")]) == 3


def test_a_study_that_cannot_be_run_leaves_nothing(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    study = write_study(tmp_path, {"cases": [{"name": "a", "changes": {"basin.cells_x": 1}}]})
    assert main(["study", str(study), "--into", str(tmp_path / "into")]) == 2
    assert "study.yaml:7: basin.cells_x: got 1 in case a; must be a whole number >= 4" in capsys.readouterr().err
    assert not (tmp_path / "into").exists()


def test_a_dry_run_lists_the_cases_and_what_they_cost_and_runs_nothing(
    here: HereEngine, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    study, into = write_study(tmp_path, {"axes": [TARGETS]}), tmp_path / "into"
    run_study(write_study(tmp_path, {"axes": [TARGETS | {"values": [20.0]}]}), into)
    here.ran.clear()
    write_study(tmp_path, {"axes": [TARGETS]})
    assert main(["study", str(study), "--into", str(into), "--dry", "--workers", "2"]) == 0
    out = capsys.readouterr().out.splitlines()
    assert here.ran == []
    assert [line.split()[0] for line in out[:3]] == ["waiting", "done", "waiting"]
    assert [line.split()[-1] for line in out[:3]] == ["target=15", "target=20", "target=25"]
    assert out[3].startswith("2 of 3 cases to run: about ")
    found = dry_run(study, into)
    assert found.seconds[1] == 0.0 and found.seconds[0] == found.seconds[2] > 0.0
    assert found.total_seconds(2) == found.seconds[0]
    assert found.total_seconds(8) == found.total_seconds(2)


def test_without_a_finished_case_the_cost_is_that_of_timed_steps(tmp_path: Path) -> None:
    lengths = {"name": "length", "key": "evolve.duration_days", "values": [10.0, 20.0]}
    short, long = dry_run(write_study(tmp_path, {"axes": [lengths]}), tmp_path / "into").seconds
    assert long == pytest.approx(2.0 * short, rel=1e-12) and short > 0.0


@pytest.mark.parametrize("count", ["0", "-1", "two"])
def test_workers_are_counted_from_one(count: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit) as ended:
        main(["study", "study.yaml", "--workers", count])
    assert ended.value.code == 2
    assert count == "-1" or "must be a whole number >= 1" in capsys.readouterr().err


def test_a_missing_study_file_is_told(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["study", str(tmp_path / "none.yaml")]) == 2
    assert "a study file must be readable (No such file or directory)" in capsys.readouterr().err


def test_help_needs_none_of_the_heavy_libraries() -> None:
    code = (
        "import sys, contextlib\nfrom oceanbox.cli import main\n"
        "with contextlib.suppress(SystemExit): main(['study', '--help'])\n"
        "print([name for name in ('numpy', 'numba', 'xarray', 'pydantic', 'rich', 'dask') if name in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.splitlines()[-1] == "[]"


def test_progress_of_one_case_after_another_adds_up() -> None:
    seen: list[StudyProgress] = []
    report = OverAll(3, seen.append)
    nan = float("nan")
    report(StudyProgress(1, 1, 0, 0, (), nan))  # found
    report(StudyProgress(1, 0, 0, 0, ("b",), nan))
    report(StudyProgress(1, 0, 1, 0, (), nan))  # done
    report(StudyProgress(1, 0, 0, 0, ("c",), nan))
    report(StudyProgress(1, 0, 0, 1, (), nan))  # failed
    assert [(item.total, item.found, item.done, item.failed) for item in seen] == [
        (3, 1, 0, 0), (3, 1, 0, 0), (3, 1, 1, 0), (3, 1, 1, 0), (3, 1, 1, 1),
    ]  # fmt: skip
    assert seen[-1].seconds_left == 0.0
    report(StudyProgress(1, 0, 0, 0, ("one more than expected",), nan))
    assert seen[-1].total == 4
