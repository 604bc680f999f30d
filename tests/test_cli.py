"""The command line as a person meets it: exit codes, messages, and how soon --help answers."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

import oceanbox
from oceanbox import cli
from oceanbox.output.checkpoint import load_checkpoint
from tests.experiment.tiny_runs import TINY
from tests.experiment.tiny_runs import oceanbox as command

DONE, OTHER_ERROR, BAD_CONFIG, NOT_IN_EQUILIBRIUM = 0, 1, 2, 3


@pytest.fixture
def config(tmp_path: Path) -> Path:
    path = tmp_path / "tiny.yaml"
    path.write_text(TINY.replace("duration_days: 600.0", "duration_days: 30.0"))
    return path


def run(capsys: pytest.CaptureFixture[str], *arguments: str | Path) -> tuple[int, str, str]:
    """Exit code, standard output and standard error of a command in this process."""
    try:
        code = cli.main([str(argument) for argument in arguments])
    except SystemExit as leaving:
        code = int(leaving.code or 0)
    told = capsys.readouterr()
    return code, told.out, told.err


def test_help_answers_within_half_a_second() -> None:
    """Of processor time, which other work on the machine does not lengthen: nothing heavy is imported for it."""
    process = subprocess.Popen([sys.executable, "-m", "oceanbox.cli", "--help"], stdout=subprocess.PIPE, text=True)
    assert process.stdout is not None
    out = process.stdout.read()
    _, status, usage = os.wait4(process.pid, 0)
    process.returncode = os.waitstatus_to_exitcode(status)
    assert process.returncode == DONE
    assert usage.ru_utime + usage.ru_stime < 0.5
    for word in ("scales", "equilibrate", "evolve", "figures", "keys", "exit codes:"):
        assert word in out


@pytest.mark.parametrize("name", ["scales", "equilibrate", "evolve", "figures", "keys"])
def test_every_command_explains_itself_and_its_exit_codes(capsys: pytest.CaptureFixture[str], name: str) -> None:
    code, out, _ = run(capsys, name, "--help")
    assert code == DONE
    assert out.startswith(f"usage: oceanbox {name}")
    for number in range(6):
        assert f"\n  {number}  " in out


def test_the_version_is_that_of_the_package(capsys: pytest.CaptureFixture[str]) -> None:
    assert run(capsys, "--version") == (DONE, f"oceanbox {oceanbox.__version__}\n", "")


@pytest.mark.parametrize("arguments", [(), ("sail",), ("evolve",), ("evolve", "a.yaml", "--quickly")])
def test_a_command_line_that_cannot_be_used_is_explained(
    capsys: pytest.CaptureFixture[str], arguments: tuple[str, ...]
) -> None:
    code, out, err = run(capsys, *arguments)
    assert (code, out) == (BAD_CONFIG, "")
    assert err.startswith("usage: oceanbox")


@pytest.mark.parametrize("name", ["scales", "equilibrate", "evolve"])
def test_a_configuration_with_faults_is_refused_with_all_of_them_and_their_lines(
    capsys: pytest.CaptureFixture[str], tmp_path: Path, name: str
) -> None:
    """One line per fault: file, line, key, what was got, what is allowed, what to do."""
    path = tmp_path / "faulty.yaml"
    path.write_text(
        "name: faulty\n"
        "basin:\n"
        "  cells_x: -4\n"
        "  widht_km: 3000.0\n"
        "motion:\n"
        "  viscosity_m2_per_s: much\n"
        "outcrop: {margin_K: 0.0}\n"
    )
    code, out, err = run(capsys, name, path)
    assert (code, out) == (BAD_CONFIG, "")
    lines = err.splitlines()
    assert [line.split(": got ")[0] for line in sorted(lines)] == [
        f"{path}:3: basin.cells_x",
        f"{path}:4: basin.widht_km",
        f"{path}:6: motion.viscosity_m2_per_s",
        f"{path}:7: outcrop.margin_K",
    ]
    assert all(line.count("; ") >= 2 for line in lines), err
    assert "width_km" in lines[[":4:" in line for line in lines].index(True)]
    assert not (tmp_path / "results").exists()


def test_a_configuration_that_makes_no_sense_on_its_grid_is_refused_with_its_lines(
    capsys: pytest.CaptureFixture[str], config: Path
) -> None:
    """Faults that only the assembled ocean shows are located too, all of them."""
    config.write_text(
        TINY.replace("viscosity_m2_per_s: 6.0e5", "viscosity_m2_per_s: 10.0") + "numerics: {step_s: 5.0e5}\n"
    )
    code, _, err = run(capsys, "evolve", config, "--into", config.parent / "run")
    assert code == BAD_CONFIG
    starts = {line.split(": got ")[0] for line in err.splitlines()}
    assert f"{config}:4: motion.viscosity_m2_per_s" in starts
    assert any(start.endswith("numerics.step_s") and start.startswith(f"{config}:") for start in starts)
    assert not (config.parent / "run").exists()


def test_a_map_that_cannot_be_used_is_refused_with_its_line(capsys: pytest.CaptureFixture[str], config: Path) -> None:
    """Only on the grid does a coefficient that falls southward become negative."""
    coefficient = "coefficient_W_per_m2_K: {shape: linear, value_at_origin: 9.0, slope_per_deg: 1.0}"
    config.write_text(TINY.replace("surface:\n", f"surface:\n  heat:\n    restoring:\n      {coefficient}\n"))
    code, out, err = run(capsys, "evolve", config, "--into", config.parent / "run")
    assert (code, out) == (BAD_CONFIG, "")
    assert err.startswith(f"{config}:8: surface.heat.restoring.coefficient_W_per_m2_K: got ")
    assert not (config.parent / "run").exists()


@pytest.mark.parametrize("name", ["scales", "equilibrate", "evolve", "figures"])
def test_a_file_that_is_not_there_is_named(capsys: pytest.CaptureFixture[str], tmp_path: Path, name: str) -> None:
    missing = tmp_path / "missing.file"
    code, out, err = run(capsys, name, missing)
    assert code in (OTHER_ERROR, BAD_CONFIG) and out == ""
    assert str(missing) in err
    assert "Traceback" not in err


def test_a_run_tells_where_its_result_is_and_how_it_ended(capsys: pytest.CaptureFixture[str], config: Path) -> None:
    """Results on standard output, warnings on standard error; a second time nothing is run."""
    into = config.parent / "run"
    code, out, err = run(capsys, "evolve", config, "--into", into)
    assert (code, out) == (DONE, f"{into / 'result.nc'}: ran for the 30 days asked for\n")
    assert all(line.startswith(("warning: ", "compiling ")) for line in err.splitlines()), err
    code, out, _ = run(capsys, "evolve", config, "--into", into)
    assert (code, out) == (DONE, f"{into / 'result.nc'} was finished before: ran for the 30 days asked for\n")


def test_a_result_goes_into_a_folder_of_its_name_if_no_other_is_given(
    capsys: pytest.CaptureFixture[str], config: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(config.parent)
    code, out, _ = run(capsys, "evolve", config)
    assert code == DONE
    assert out.startswith("results/tiny/result.nc: ")
    assert (config.parent / "results" / "tiny" / "result.nc").exists()


def test_the_folder_of_another_run_is_refused_with_the_way_out(
    capsys: pytest.CaptureFixture[str], config: Path
) -> None:
    into = config.parent / "run"
    run(capsys, "evolve", config, "--into", into)
    config.write_text(config.read_text() + "numerics: {scheme: runge_kutta_3}\n")
    code, out, err = run(capsys, "evolve", config, "--into", into)
    assert (code, out) == (OTHER_ERROR, "")
    assert err.splitlines()[-1].startswith(f"{into / 'result.nc'}: got a file of another run")
    assert "--into" in err


def test_a_search_that_finds_no_equilibrium_in_its_time_says_so_and_keeps_the_result(
    capsys: pytest.CaptureFixture[str], config: Path
) -> None:
    """The measures and which of them held; the exit code tells scripts."""
    short = "equilibrium: {window_years: 0.05, longest_years: 0.1, acceleration: null}"
    config.write_text(config.read_text().replace("equilibrium: {window_years: 0.25, longest_years: 1.0}", short))
    into = config.parent / "run"
    code, out, _ = run(capsys, "equilibrate", config, "--into", into)
    assert code == NOT_IN_EQUILIBRIUM
    assert out.startswith(f"{into / 'result.nc'}: not in equilibrium after 0.")
    assert "volume drift per decade" in out and "(not held)" in out
    assert (into / "result.nc").exists()


def test_a_run_can_start_from_the_state_of_another(capsys: pytest.CaptureFixture[str], config: Path) -> None:
    """evolve --from: two runs of 30 days, the second from the first's state, are not the first run again."""
    first, second = config.parent / "first", config.parent / "second"
    assert run(capsys, "evolve", config, "--into", first)[0] == DONE
    code, out, _ = run(capsys, "evolve", config, "--into", second, "--from", first / "state.nc")
    assert (code, out) == (DONE, f"{second / 'result.nc'}: ran for the 30 days asked for\n")
    before, after = (load_checkpoint(folder / "state.nc")[0]["state__thickness"] for folder in (first, second))
    assert abs(after - before).max() > 1.0


def test_a_state_of_another_grid_is_refused(capsys: pytest.CaptureFixture[str], config: Path) -> None:
    first = config.parent / "first"
    run(capsys, "evolve", config, "--into", first)
    config.write_text(config.read_text().replace("cells_x: 8", "cells_x: 9"))
    code, out, err = run(capsys, "evolve", config, "--into", config.parent / "second", "--from", first / "state.nc")
    assert (code, out) == (OTHER_ERROR, "")
    last = err.splitlines()[-1]
    assert last.startswith(
        f"{first / 'state.nc'}: thickness: got shape (1, 44, 12); this configuration needs (1, 44, 13)"
    )
    assert "give the state of a run of the same grid" in last


def test_scales_are_told_without_a_run(capsys: pytest.CaptureFixture[str], config: Path) -> None:
    before = set(config.parent.iterdir())
    code, out, err = run(capsys, "scales", config)
    assert code == DONE
    assert "Munk" in out
    assert "warning: " in err and f"{config}:" in err
    assert set(config.parent.iterdir()) == before


def test_keys_are_explained_with_unit_and_default(capsys: pytest.CaptureFixture[str]) -> None:
    code, out, _ = run(capsys, "keys", "outcrop.margin_K")
    assert code == DONE
    assert "outcrop.margin_K" in out and "K" in out
    code, out, _ = run(capsys, "keys", "--json-schema")
    assert code == DONE
    assert out.lstrip().startswith("{")


def test_the_command_is_also_a_module(config: Path) -> None:
    """python -m oceanbox.cli, the way that needs no installed script."""
    done = command("keys", "basin")
    assert done.returncode == DONE
    assert "basin.cells_x" in done.stdout
