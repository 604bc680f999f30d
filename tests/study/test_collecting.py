"""The collected dataset and its table say what the result files say, each number at the place of its case."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pytest
import xarray as xr

from oceanbox import names
from oceanbox.errors import ConfigError
from oceanbox.output.files import read_dataset
from oceanbox.study.collecting import collect, write_collected, write_table
from oceanbox.study.executing import execute
from oceanbox.study.loading import LoadedStudy
from oceanbox.study.run import study_attributes
from oceanbox.study.status import result_of, status_of
from tests.output.conventions import findings_of_strict_cf_check
from tests.study.oceans import TARGET, TARGETS, WIND, HereEngine, study_of

WINDS = {"name": "trades", "long_name": "trade wind stress", "key": WIND, "values": [-0.03, -0.04]}
PLAN = {"axes": [TARGETS, WINDS], "fields": ["thermocline_depth", "velocity_x"]}


@pytest.fixture(scope="module")
def done(tmp_path_factory: pytest.TempPathFactory) -> tuple[LoadedStudy, Path]:
    """A study of two axes, run, and its folder."""
    into = tmp_path_factory.mktemp("axes")
    loaded = study_of(into, PLAN)
    execute(loaded.cases, into, HereEngine())
    return loaded, into


def test_every_number_stands_at_the_place_of_its_case(done: tuple[LoadedStudy, Path]) -> None:
    loaded, into = done
    dataset = collect(loaded.study, loaded.cases, into)
    assert dataset["status"].dims == ("target", "trades")
    for case in loaded.cases:
        result = read_dataset(result_of(case, into))
        here = dataset.sel(case.coordinates)
        assert str(here["case_name"].values) == case.name
        assert into / str(here["result_path"].values) == result_of(case, into)
        for name in names.in_group("scalar"):
            np.testing.assert_array_equal(here[name], result[name])
            if f"{name}_std" in result:
                np.testing.assert_array_equal(here[f"{name}_std"], result[f"{name}_std"])
        for name in ("thermocline_depth", "velocity_x"):
            assert here[name].dims == result[name].dims
            np.testing.assert_array_equal(here[name], result[name])
            for dim in result[name].dims:
                np.testing.assert_array_equal(here[dim], result[dim])
    assert dataset["years"].values == pytest.approx(3.0 / 365.25, rel=1e-6)


def test_the_axes_have_the_words_and_units_of_their_keys(done: tuple[LoadedStudy, Path]) -> None:
    loaded, into = done
    dataset = collect(loaded.study, loaded.cases, into)
    assert (dataset["target"].attrs["units"], dataset["target"].attrs["long_name"]) == ("degC", "target")
    assert (dataset["trades"].attrs["units"], dataset["trades"].attrs["long_name"]) == ("N m-2", "trade wind stress")


def test_what_is_written_reads_back_lazily_as_it_was(done: tuple[LoadedStudy, Path], tmp_path: Path) -> None:
    loaded, into = done
    dataset = collect(loaded.study, loaded.cases, into, {"title": "trial"})
    path = write_collected(dataset, tmp_path)
    with xr.open_dataset(path) as opened:
        assert not opened["thermocline_depth"].variable._in_memory
        xr.testing.assert_identical(opened.load(), dataset)


def test_the_file_follows_the_conventions(done: tuple[LoadedStudy, Path], tmp_path: Path) -> None:
    loaded, into = done
    statuses = [status_of(case, into) for case in loaded.cases]
    dataset = collect(loaded.study, loaded.cases, into, study_attributes(loaded, statuses))
    # CF knows a vertical axis by units of pressure, which a stress has too: the checker then wonders about the order
    dataset = dataset.isel(trades=0, drop=True)
    assert findings_of_strict_cf_check(write_collected(dataset, tmp_path)) == ""


def test_the_table_has_a_row_for_each_case_and_a_unit_for_each_number(
    done: tuple[LoadedStudy, Path], tmp_path: Path
) -> None:
    loaded, into = done
    dataset = collect(loaded.study, loaded.cases, into)
    rows = list(csv.DictReader(write_table(dataset, tmp_path).open(encoding="utf-8")))
    assert [row["case_name"] for row in rows] == [case.name for case in loaded.cases]
    depth = dataset["thermocline_depth_equator_mean"].values.ravel()
    assert [float(row["thermocline_depth_equator_mean (m)"]) for row in rows] == list(depth)
    assert [(float(row["target (degC)"]), float(row["trades (N m-2)"])) for row in rows] == [
        tuple(case.coordinates.values()) for case in loaded.cases
    ]


def test_cases_that_have_not_run_are_waiting_and_nan(tmp_path: Path) -> None:
    loaded = study_of(tmp_path, {"sample": {"count": 4, "ranges": [{"key": TARGET, "lowest": 15.0, "highest": 25.0}]}})
    execute(loaded.cases[1:3], tmp_path, HereEngine())
    dataset = collect(loaded.study, loaded.cases, tmp_path)
    assert list(dataset["status"].values) == ["waiting", "done", "done", "waiting"]
    assert list(np.isnan(dataset["equatorial_tilt"].values)) == [True, False, False, True]
    assert list(dataset["target_temperature_degC"].values) == [case.changes[TARGET] for case in loaded.cases]
    assert dataset["target_temperature_degC"].dims == ("case",)


def test_keys_whose_last_parts_agree_are_told_apart(tmp_path: Path) -> None:
    ranges = [
        {"key": f"{part}.time_days", "lowest": 1.0, "highest": 2.0} for part in ("outcrop", "entrainment.shoaling")
    ]
    loaded = study_of(tmp_path, {"sample": {"count": 2, "ranges": ranges}})
    dataset = collect(loaded.study, loaded.cases, tmp_path)
    assert {"outcrop_time_days", "shoaling_time_days"} <= set(dataset.coords)


def test_fields_of_grids_that_differ_are_refused(tmp_path: Path) -> None:
    axis = {"name": "cells", "key": "basin.cells_x", "values": [12, 14]}
    study_of(tmp_path, {"axes": [axis]})
    with pytest.raises(ConfigError, match="fields: got cases on different grids"):
        study_of(tmp_path, {"axes": [axis], "fields": ["thermocline_depth"]})
