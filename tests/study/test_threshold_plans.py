"""Branch, switch and sensitivity studies of a tiny ocean, from the study file to the dataset."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
import xarray as xr

from oceanbox import names
from oceanbox.errors import ConfigError
from oceanbox.output.files import read_dataset
from oceanbox.study.collecting import write_collected, write_table
from oceanbox.study.plan import folder_of
from oceanbox.study.schema import Study
from oceanbox.study.sensitivity_cases import sensitivity_dataset
from oceanbox.study.status import State
from oceanbox.study.switching import CONTROL
from oceanbox.study.threshold_plans import Gathered, gather, planned_cases
from oceanbox.study.threshold_specs import UNRECORDED
from tests.study.oceans import TARGET, TINY, WIND, HereEngine, study_of

MEASURE = "thermocline_depth_basin_mean"
BRANCH = {"branch": {"key": TARGET, "lowest": 24.0, "highest": 30.0, "steps": 2, "measure": MEASURE}}
SWITCHES = [
    {"name": "calm", "changes": {WIND: 0.0}},
    {"name": "cold", "changes": {TARGET: 15.0}, "duration_days": 12.0, "series_interval_days": 1.5},
]
SHORT = {"duration_days": 8.0, "series_interval_days": 1.0, "measures": [MEASURE, "heat_content"]}
QUICK = {"equilibrium.window_years": 0.01, "equilibrium.longest_years": 0.02, "equilibrium.acceleration": None}
SWITCH = {
    "changes": QUICK,
    "switch": {**SHORT, "switches": SWITCHES},
}


def gathered(folder: Path, plan: dict[str, object], base: str = TINY) -> tuple[Study, Gathered, HereEngine]:
    loaded, engine = study_of(folder, plan, base), HereEngine()
    return loaded.study, gather(loaded.study, loaded.base, folder / "out", engine), engine


@pytest.fixture(scope="module")
def branch(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, Gathered, HereEngine]:
    folder = tmp_path_factory.mktemp("branch")
    return folder, *gathered(folder, BRANCH)[1:]


@pytest.fixture(scope="module")
def switch(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, Gathered, HereEngine]:
    folder = tmp_path_factory.mktemp("switch")
    return folder, *gathered(folder, SWITCH)[1:]


def test_a_branch_goes_up_and_down_each_step_from_the_state_before(
    branch: tuple[Path, Gathered, HereEngine],
) -> None:
    folder, found, engine = branch
    assert found.dataset[MEASURE].dims == ("direction", "parameter")
    assert list(found.dataset["parameter"].values) == [24.0, 27.0, 30.0]
    assert found.dataset["parameter"].attrs["units"] == "degC"
    assert [task.start for task in engine.ran[1:]] == [task.folder / "state.nc" for task in engine.ran[:-1]]
    ways = [*found.dataset["result_path"].values[0], *found.dataset["result_path"].values[1][-2::-1]]
    assert ways == [f"cases/{task.folder.name}/result.nc" for task in engine.ran]
    for path, value in zip(
        ways, [*found.dataset[MEASURE].values[0], *found.dataset[MEASURE].values[1][-2::-1]], strict=True
    ):
        assert float(read_dataset(folder / "out" / path)[MEASURE]) == value


def test_the_way_down_remembers_the_way_up(branch: tuple[Path, Gathered, HereEngine]) -> None:
    """Three days are far from equilibrium: under one target the ocean is warmer when it has been under warmer ones."""
    _, found, _ = branch
    heat = found.dataset["heat_content"]
    assert heat.sel(direction="down", parameter=24.0) > heat.sel(direction="up", parameter=24.0)
    assert any("apart" in line for line in found.findings)


def test_a_finished_branch_is_not_run_again(branch: tuple[Path, Gathered, HereEngine]) -> None:
    folder, found, _ = branch
    _, again, engine = gathered(folder, BRANCH)
    assert engine.ran == []
    xr.testing.assert_identical(again.dataset, found.dataset)


def test_planned_steps_of_a_branch_are_those_that_run(
    branch: tuple[Path, Gathered, HereEngine], tmp_path: Path
) -> None:
    folder, _, engine = branch
    loaded = study_of(tmp_path, BRANCH)
    planned = planned_cases(loaded.study, loaded.base)
    assert [folder_of(case, folder / "out").resolve() for case in planned] == [task.folder for task in engine.ran]


def test_a_branch_can_be_written_and_read(branch: tuple[Path, Gathered, HereEngine], tmp_path: Path) -> None:
    _, found, _ = branch
    with xr.open_dataset(write_collected(found.dataset, tmp_path)) as read:
        assert np.array_equal(read[MEASURE], found.dataset[MEASURE])
        assert (read["status"] == "done").all()
        assert read.attrs["oceanbox_branch_findings"].splitlines() == list(found.findings)
    assert len(write_table(found.dataset, tmp_path).read_text(encoding="utf-8").splitlines()) == 1 + 6


def test_a_case_that_fails_is_a_gap_and_the_branch_goes_on(tmp_path: Path) -> None:
    """A time step beyond its stability limit fails the case; those before and after it are found."""
    spec = {"key": "numerics.step_s", "lowest": 3600.0, "highest": 345600.0, "steps": 2, "measure": MEASURE}
    _, found, engine = gathered(tmp_path, {"command": "equilibrate", "changes": QUICK, "branch": spec})
    status = found.dataset["status"].values
    assert list(status[:, 0]) == ["done", "done"]
    assert status[0, 2] == State.FAILED.value
    assert found.dataset["reason"].values[0, 2].startswith("numerics.step_s: got 345600")
    assert np.isnan(found.dataset[MEASURE].values[0, 2])
    assert found.dataset["result_path"].values[0, 2] == ""
    assert any("failed" in line for line in found.findings)
    # the first step down starts where the failed one had started
    assert engine.ran[-1].start == engine.ran[0].folder / "state.nc"


def test_an_ocean_that_starts_from_another_adjusts_at_its_own_pace(tmp_path: Path) -> None:
    """No extrapolation towards equilibrium, no wind rising from calm: only the very first case has them."""
    changes = {"surface.wind.ramp_days": 5.0}
    for plan in (BRANCH, {"switch": {**SHORT, "switches": SWITCHES}}):
        loaded = study_of(tmp_path, {**plan, "changes": changes})
        first, *later = (case.config for case in planned_cases(loaded.study, loaded.base))
        assert first.equilibrium.acceleration is not None and first.surface.wind.ramp_days == 5.0
        assert all(config.equilibrium.acceleration is None for config in later)
        assert all(config.surface.wind.ramp_days == 0.0 for config in later)


def test_all_switches_start_from_one_equilibrium_beside_a_control(switch: tuple[Path, Gathered, HereEngine]) -> None:
    _, found, engine = switch
    start, *runs = engine.ran
    assert start.command == "equilibrate" and start.start is None
    assert [run.command for run in runs] == ["evolve"] * 3
    assert {run.start for run in runs} == {start.folder / "state.nc"}
    assert list(found.dataset["switch"].values) == [CONTROL, "calm", "cold"]
    assert runs[1].config.surface.wind.zonal_stress_N_per_m2 == 0.0
    assert runs[2].config.evolve.duration_days == 12.0


def test_a_switch_changes_nothing_but_what_it_names(tmp_path: Path) -> None:
    """What sets the start apart from the base stays as it is afterwards."""
    loaded = study_of(tmp_path, {"switch": {**SHORT, "switches": SWITCHES, "start": {"changes": {WIND: -0.05}}}})
    winds = [case.config.surface.wind.zonal_stress_N_per_m2 for case in planned_cases(loaded.study, loaded.base)]
    assert winds == [-0.05, -0.05, 0.0, -0.05]


def test_series_share_one_time_axis(switch: tuple[Path, Gathered, HereEngine]) -> None:
    """Each begins with the value of the start; points that a switch does not have are NaN."""
    folder, found, _ = switch
    series = found.dataset[f"series_{MEASURE}"]
    assert series.dims == ("switch", "time")
    daily, slow = np.arange(9.0), np.arange(9) * 1.5
    assert np.array_equal(found.dataset["time"], np.union1d(daily, slow))
    assert (series.sel(time=0.0) == found.dataset[f"start_{MEASURE}"]).all()
    for name, days in (("calm", daily), ("cold", slow)):
        one = series.sel(switch=name).dropna("time")
        assert np.array_equal(one["time"], days)
        path = str(found.dataset["result_path"].sel(switch=name).item())
        result = read_dataset(folder / "out" / path)
        assert np.array_equal(one.values[1:], result[f"series_{MEASURE}"].values)


def test_every_adjustment_has_a_sentence_and_a_verdict(
    switch: tuple[Path, Gathered, HereEngine], tmp_path: Path
) -> None:
    _, found, _ = switch
    assert len(found.findings) >= 3 * 2
    assert all(found.dataset[f"trust_{measure}"].values.all() for measure in (MEASURE, "heat_content"))
    write_collected(found.dataset, tmp_path)


def test_scalars_without_series_are_known(switch: tuple[Path, Gathered, HereEngine]) -> None:
    folder, found, _ = switch
    result = read_dataset(folder / "out" / str(found.dataset["result_path"].values[0]))
    unrecorded = {name for name in names.in_group("scalar") if f"series_{name}" not in result}
    assert unrecorded == set(UNRECORDED)


def test_a_switch_whose_start_fails_is_told(tmp_path: Path) -> None:
    plan = {**SWITCH, "switch": {**SHORT, "switches": SWITCHES, "start": {"changes": {"numerics.step_s": 345600.0}}}}
    _, found, _ = gathered(tmp_path, plan)
    assert (found.dataset["status"] == State.FAILED.value).all()
    assert any(line.startswith("start: failed: numerics.step_s: got 345600") for line in found.findings)


ELASTICITIES = {
    "sensitivity": {"kind": "elasticities", "keys": ["layers.0.initial_thickness_m"], "measures": [MEASURE]}
}


def test_elasticities_come_from_four_runs_around_the_base(tmp_path: Path) -> None:
    """After three days the mean depth is nearly proportional to the depth at the start."""
    _, found, engine = gathered(tmp_path, ELASTICITIES)
    assert len(engine.ran) == 1 + 4
    thickness = [task.config.layers[0].initial_thickness_m for task in engine.ran]
    assert thickness == pytest.approx([150.0, *(150.0 * np.exp(step) for step in (-0.1, 0.1, -0.05, 0.05))])
    assert found.dataset[f"elasticity_{MEASURE}"].values == pytest.approx([1.0], abs=0.05)
    assert found.dataset[MEASURE].sizes == {"case": 5}
    assert list(found.dataset["key_value"].values) == [150.0]
    write_collected(found.dataset, tmp_path)
    write_table(found.dataset, tmp_path)


@pytest.mark.parametrize(
    ("key", "message"),
    [
        (TARGET, "the zero of this scale is a convention"),
        ("motion.drag_per_day", "a number other than 0"),
        ("basin.side_walls", "a number other than 0"),
    ],
)
def test_keys_without_a_logarithm_are_refused(key: str, message: str, tmp_path: Path) -> None:
    with pytest.raises(ConfigError, match=message):
        study_of(tmp_path, {"sensitivity": {"kind": "elasticities", "keys": [key]}})


def test_sobol_indices_are_those_of_the_cases_planned(tmp_path: Path) -> None:
    """A measure x + y^2, x and ln y uniform: its shares of variance by hand; a case without a result costs one row."""
    depth = "layers.0.initial_thickness_m"
    ranges = [
        {"key": depth, "lowest": 100.0, "highest": 200.0},
        {"key": WIND, "lowest": 0.01, "highest": 0.1, "scale": "logarithmic"},
    ]
    plan = {"sensitivity": {"kind": "sobol_indices", "ranges": ranges, "measures": [MEASURE], "base_samples": 256}}
    loaded = study_of(tmp_path, plan)
    cases = planned_cases(loaded.study, loaded.base)
    assert len(cases) == 256 * (2 + 2)
    # y^2 has an average of (b^2 - a^2)/(2 ln(b/a)) over ln y, and y^4 one of (b^4 - a^4)/(4 ln(b/a)).
    of_square = (1e-4 - 1e-8) / (4.0 * np.log(10.0)) - ((1e-2 - 1e-4) / (2.0 * np.log(10.0))) ** 2
    weight = np.sqrt(100.0**2 / 12.0 / of_square)  # both parts vary alike
    values = np.array([case.changes[depth] + weight * case.changes[WIND] ** 2 for case in cases])
    values[[3, 300, 600]] = np.nan
    found = sensitivity_dataset(loaded.study, loaded.base, xr.Dataset({MEASURE: ("case", values)}))
    # Additive, so first and total shares are equal; the tolerance is that of 256 independent draws, 1/sqrt(256).
    for kind in ("first", "total"):
        assert found[f"sobol_{kind}_{MEASURE}"].values == pytest.approx([0.5, 0.5], abs=1.0 / 16.0)
    assert "over 253 of 256 base points" in found.attrs["oceanbox_sensitivity_findings"]
    assert list(found["key"].values) == [depth, WIND]


def test_faults_of_a_threshold_study_are_found_before_anything_runs(tmp_path: Path) -> None:
    far = {"branch": {"key": "water.gravity_m_per_s2", "lowest": -1.0, "highest": 9.0}}
    with pytest.raises(ConfigError, match="gravity_m_per_s2"):
        study_of(tmp_path, far)
    with pytest.raises(ConfigError, match="did you mean thermocline_depth_basin_mean"):
        study_of(tmp_path, {"branch": {**BRANCH["branch"], "measure": "thermocline_depth_basin_meen"}})
    with pytest.raises(ConfigError, match="recorded as a series"):
        study_of(tmp_path, {"switch": {"switches": SWITCHES, "measures": ["wave_speed"]}})
