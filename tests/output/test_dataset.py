"""A result follows the CF conventions, and wrong arrays are refused by name."""

from __future__ import annotations

from dataclasses import replace

import netCDF4
import numpy as np
import pytest
import xarray as xr

from oceanbox import names
from oceanbox.output.axes import Axes
from oceanbox.output.dataset import CELL_AREA, assemble
from oceanbox.output.files import read_dataset, write_dataset
from tests.output.conventions import findings_of_strict_cf_check
from tests.output.samples import WINDOW_DAYS, SampleResult, full_result, sample_attributes, sample_axes


@pytest.fixture
def result() -> SampleResult:
    return full_result()


def _batches(items: list[str], size: int) -> list[list[str]]:
    return [items[start : start + size] for start in range(0, len(items), size)]


@pytest.mark.slow
def test_a_result_with_every_variable_passes_the_strict_check_of_the_cf_conventions(result, tmp_path):
    """The time the checker takes grows with the cube of the number of variables: about a minute for all."""
    write_dataset(result.assemble(), tmp_path / "result.nc")
    assert findings_of_strict_cf_check(tmp_path / "result.nc") == ""


def test_every_variable_passes_the_strict_check_of_the_cf_conventions_among_some_others(result, tmp_path):
    """The same content as the slow test of one file, spread over several files."""
    pieces = _batches(sorted(set(names.all_names()) - {CELL_AREA}), 16)
    paths = [tmp_path / f"piece_{number}.nc" for number in range(len(pieces))]
    for piece, path in zip(pieces, paths, strict=True):
        write_dataset(result.only(piece).assemble(), path)
    assert findings_of_strict_cf_check(*paths) == ""


def test_the_check_of_the_conventions_notices_a_false_unit(result, tmp_path):
    """Without this a checker that never runs would look like success."""
    dataset = result.only(["thickness"]).assemble()
    dataset["thickness"].attrs["units"] = "kg"
    write_dataset(dataset, tmp_path / "result.nc")
    assert "thickness" in findings_of_strict_cf_check(tmp_path / "result.nc")


def test_every_variable_of_the_table_is_there_with_its_own_dimensions(result):
    dataset = result.assemble()
    assert set(dataset.data_vars) == set(names.all_names())
    for name in names.all_names():
        assert dataset[name].dims == names.lookup(name).dims


def test_a_written_result_reads_back_identical(result, tmp_path):
    dataset = result.assemble()
    write_dataset(dataset, tmp_path / "result.nc")
    xr.testing.assert_identical(read_dataset(tmp_path / "result.nc"), dataset)


def test_missing_values_survive(result, tmp_path):
    thickness = result.fields["thickness"].copy()
    thickness[0, 1, 2] = np.nan
    write_dataset(replace(result, fields={"thickness": thickness}).assemble(), tmp_path / "result.nc")
    np.testing.assert_array_equal(read_dataset(tmp_path / "result.nc")["thickness"], thickness)


def test_only_data_have_fill_values_and_no_coordinate_list_is_global(result, tmp_path):
    write_dataset(result.assemble(), tmp_path / "result.nc")
    with netCDF4.Dataset(tmp_path / "result.nc") as file:
        filled = {name for name, variable in file.variables.items() if "_FillValue" in variable.ncattrs()}
        assert "coordinates" not in file.ncattrs()
    assert filled == set(names.all_names())


def test_coordinates_refer_to_points_of_the_same_place_and_to_the_window_only_for_window_means(result, tmp_path):
    write_dataset(result.assemble(), tmp_path / "result.nc")
    with netCDF4.Dataset(tmp_path / "result.nc") as file:
        assert file["velocity_x"].coordinates == "lat lon_face window"
        assert file["transport_y"].coordinates == "lat_face lon window"
        assert file["wind_stress_x"].coordinates == "lat lon_face"
        assert file["heat_content"].coordinates == "window"
        assert file["region_heat_storage"].coordinates == "region_name window"
        assert "coordinates" not in file["series_heat_content"].ncattrs()


def test_bounds_of_cells_are_their_faces(result):
    dataset = result.assemble()
    for axis in ("x", "y"):
        faces = dataset[f"{axis}_face"].values
        np.testing.assert_array_equal(dataset[f"{axis}_bounds"], np.stack([faces[:-1], faces[1:]], axis=1))
    assert tuple(dataset["window_bounds"].values) == WINDOW_DAYS
    np.testing.assert_array_equal(dataset["time_bounds"], [[0.0, 30.0], [30.0, 60.0], [60.0, 90.0]])


def test_regions_are_selected_by_name(result, tmp_path):
    write_dataset(result.assemble(), tmp_path / "result.nc")
    tropics = read_dataset(tmp_path / "result.nc")["region_heat_storage"].sel(region="tropics")
    assert float(tropics) == result.fields["region_heat_storage"][names.REGIONS.index("tropics")]


def test_a_result_without_series_passes_the_check_too(result, tmp_path):
    fields = {"thickness": result.fields["thickness"]}
    dataset = assemble(fields, {}, {}, [], result.axes, WINDOW_DAYS, sample_attributes())
    write_dataset(dataset, tmp_path / "result.nc")
    assert findings_of_strict_cf_check(tmp_path / "result.nc") == ""


def test_a_wrong_shape_is_refused_by_name_and_dimensions(result):
    swapped = {"thermocline_depth": result.fields["thermocline_depth"].T}
    with pytest.raises(ValueError, match=r"thermocline_depth: got shape \(5, 4\); dims \(y, x\) need \(4, 5\)"):
        replace(result, fields=swapped).assemble()


def test_an_unknown_name_is_refused(result):
    with pytest.raises(KeyError, match=r"heat_contents.*heat_content"):
        replace(result, scalars={"heat_contents": 1.0}).assemble()


def test_a_scalar_among_the_fields_is_refused(result):
    with pytest.raises(ValueError, match="heat_content: got it among"):
        replace(result, fields={"heat_content": np.array(1.0)}).assemble()


def test_cell_areas_come_from_the_axes_alone(result):
    with pytest.raises(ValueError, match="cell_area: got it twice"):
        replace(result, fields={"cell_area": result.axes.cell_area}).assemble()


def test_axes_refuse_centres_that_do_not_lie_between_faces():
    axes = sample_axes()
    with pytest.raises(ValueError, match="x: got centres"):
        Axes(axes.x[::-1], axes.y, axes.x_face, axes.y_face, axes.cell_area, periodic_x=False)
    with pytest.raises(ValueError, match=r"y, y_face: got shapes \(4,\) and \(4,\)"):
        Axes(axes.x, axes.y, axes.x_face, axes.y_face[:-1], axes.cell_area, periodic_x=False)
    with pytest.raises(ValueError, match="cell_area"):
        Axes(axes.x, axes.y, axes.x_face, axes.y_face, axes.cell_area.T, periodic_x=False)
