"""The result of a real run: it follows the conventions, its budgets close, and its two heat transports are one."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
import xarray as xr

from oceanbox.budgets.rates import BUDGETS
from oceanbox.config import loads
from oceanbox.experiment.api import evolve
from oceanbox.output.files import read_dataset
from tests.experiment.tiny_runs import TINY
from tests.output.conventions import findings_of_strict_cf_check


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    into = tmp_path_factory.mktemp("real")
    evolve(loads(TINY).with_changes({"evolve.duration_days": 400.0}), into)
    return into


@pytest.fixture(scope="module")
def result(folder: Path) -> xr.Dataset:
    return read_dataset(folder / "result.nc")


def test_result_and_snapshots_pass_the_strict_check_of_the_cf_conventions(folder: Path) -> None:
    """CF 1.11 with every finding counted, also those that are mere advice."""
    assert findings_of_strict_cf_check(folder / "result.nc", folder / "snapshots.nc") == ""


@pytest.mark.parametrize("budget", sorted(BUDGETS))
def test_storage_is_the_sum_of_the_named_terms_as_they_stand_in_the_file(result: xr.Dataset, budget: str) -> None:
    """To 1e-12 of the absolute terms over the basin; the residual that is reported is what is missing."""
    terms, storage, residual = BUDGETS[budget]
    total = sum(result[name] for name in terms)
    absolute = sum(float(np.abs(result[name]).sum()) for name in (*terms, storage))
    assert absolute > 0.0
    missing = result[storage] - total
    assert abs(float(missing.sum())) <= 1e-12 * absolute
    # A sum taken in another order differs by a rounding for each term.
    assert float(np.abs(missing - result[residual]).max()) <= len(terms) * np.finfo(float).eps * absolute


def test_northward_heat_transport_by_fluxes_is_that_by_surface_and_storage(result: xr.Dataset) -> None:
    """Across every row of y faces, to 1e-6 PW; both are zero on the walls."""
    by_fluxes, by_surface = result["northward_heat_transport"], result["northward_heat_transport_from_surface"]
    assert float(np.abs(by_fluxes).max()) > 1e13
    assert float(np.abs(by_fluxes - by_surface).max()) <= 1e9
    assert float(np.abs(by_fluxes[[0, -1]]).max()) == 0.0


def test_the_regions_add_up_to_the_basin(result: xr.Dataset) -> None:
    for terms, storage, _ in BUDGETS.values():
        for name in (*terms, storage):
            whole = float((result[name] * result["cell_area"]).sum())
            size = float((np.abs(result[name]) * result["cell_area"]).sum())
            assert abs(float(result[f"region_{name}"].sum()) - whole) <= 1e-12 * size, name


def test_the_configuration_in_the_file_makes_the_same_run_again(result: xr.Dataset, tmp_path: Path) -> None:
    config = loads(result.attrs["oceanbox_config"])
    again = evolve(config, tmp_path)
    assert again.result.attrs["oceanbox_config_identity"] == result.attrs["oceanbox_config_identity"]
    for name in ("thickness", "temperature", "velocity_x", "heat_residual"):
        assert np.array_equal(again.result[name], result[name]), name
