"""The cold tongue."""

from __future__ import annotations

import numpy as np
import pytest
import xarray as xr

from oceanbox.diagnostics import Geometry
from oceanbox.diagnostics.cold_tongue import (
    cold_tongue,
    cold_tongue_of,
    tongue_cells,
    warm_pool_temperature,
)

NX, NY = 32, 40
GEOMETRY = Geometry(np.linspace(0.0, 6.4e6, NX + 1), np.linspace(-5e6, 5e6, NY + 1))
CELLS = tongue_cells(GEOMETRY)
CELL_AREA = 2.0e5 * 2.5e5


def patched(rows: slice, columns: slice, temperature: float) -> np.ndarray:
    """28 degC everywhere but in a patch."""
    field = np.full((NY, NX), 28.0)
    field[rows, columns] = temperature
    return field


def test_uniform_temperature_has_no_cold_tongue() -> None:
    found = cold_tongue(np.full((NY, NX), 27.3), CELLS, 2.0)
    assert found[:4] == (0.0, 0.0, 0.0, 0.0)
    assert found.warm_pool == pytest.approx(27.3, rel=1e-15)


def test_the_tongue_is_exactly_the_cells_of_a_cold_patch() -> None:
    """Six rows astride the equator and nine columns at the eastern wall, 3.5 K colder."""
    found = cold_tongue(patched(slice(17, 23), slice(23, 32), 24.5), CELLS, 2.0)
    assert found.area == 6 * 9 * CELL_AREA
    assert found.reach == pytest.approx(9 * 2.0e5, rel=1e-15)
    assert found.mean_deficit == pytest.approx(3.5, rel=1e-14)
    assert found.peak_deficit == pytest.approx(3.5, rel=1e-14)


def test_a_deficit_of_the_contrast_itself_is_not_cold() -> None:
    assert cold_tongue(patched(slice(17, 23), slice(20, 32), 26.0), CELLS, 2.0).area == 0.0
    assert cold_tongue(patched(slice(17, 23), slice(20, 32), 25.999), CELLS, 2.0).area > 0.0


def test_mean_and_peak_deficits_differ_by_the_coldest_cell() -> None:
    field = patched(slice(19, 21), slice(28, 32), 25.0)
    field[20, 31] = 20.0
    found = cold_tongue(field, CELLS, 2.0)
    assert found.mean_deficit == pytest.approx((7 * 3.0 + 8.0) / 8, rel=1e-14)
    assert found.peak_deficit == pytest.approx(8.0, rel=1e-14)


def test_reach_stops_at_the_first_warm_column_from_the_eastern_wall() -> None:
    field = patched(slice(17, 23), slice(10, 32), 24.0)
    field[:, 25] = 28.0
    found = cold_tongue(field, CELLS, 2.0)
    assert found.reach == pytest.approx(6 * 2.0e5, rel=1e-15)
    assert found.area == 6 * 21 * CELL_AREA


def test_a_patch_that_does_not_touch_the_eastern_wall_has_area_but_no_reach() -> None:
    found = cold_tongue(patched(slice(17, 23), slice(10, 20), 24.0), CELLS, 2.0)
    assert (found.area, found.reach) == (6 * 10 * CELL_AREA, 0.0)


def test_cold_water_poleward_of_ten_degrees_is_no_cold_tongue() -> None:
    field = patched(slice(0, 16), slice(0, 32), 5.0)  # 10 degrees are 1112 km; row 16 has its centre at 875 km
    assert cold_tongue(field, CELLS, 2.0).area == 0.0
    field[16] = 5.0
    assert cold_tongue(field, CELLS, 2.0).area == NX * CELL_AREA


def test_one_hot_column_is_not_the_warm_pool() -> None:
    """The warm pool is an eighth of the basin wide: 4 columns here."""
    profile = np.full(NX, 27.0)
    profile[5] = 31.0
    assert warm_pool_temperature(profile, 4) == pytest.approx(28.0, rel=1e-15)
    profile[12:16] = 29.0
    assert warm_pool_temperature(profile, 4) == pytest.approx(29.0, rel=1e-15)


def test_a_temperature_that_blew_up_has_no_cold_tongue_and_not_a_zero_one() -> None:
    for row in (20, 17):  # on the equator, and within 10 degrees only
        field = np.full((NY, NX), 28.0)
        field[row, 3] = np.nan
        assert np.isnan(cold_tongue(field, CELLS, 2.0)).all()


def test_no_equator_in_the_basin_has_no_cold_tongue_to_measure() -> None:
    north = Geometry(GEOMETRY.x_face, np.linspace(2e6, 5e6, NY + 1))
    assert np.isnan(cold_tongue(np.full((NY, NX), 20.0), tongue_cells(north), 2.0)).all()


def test_the_labelled_door_checks_the_contrast() -> None:
    field = xr.DataArray(
        patched(slice(17, 23), slice(23, 32), 24.5),
        dims=("y", "x"),
        coords={"y": GEOMETRY.y, "x": GEOMETRY.x},
    )
    assert float(cold_tongue_of(field)["cold_tongue_area"]) == pytest.approx(54 * CELL_AREA, rel=1e-14)
    assert float(cold_tongue_of(field, contrast_K=4.0)["cold_tongue_area"]) == 0.0
    with pytest.raises(ValueError, match="contrast_K: got 0"):
        cold_tongue_of(field, contrast_K=0)
