"""Thermocline depth on the equator and over the basin."""

from __future__ import annotations

import numpy as np
import pytest
import xarray as xr

from oceanbox.diagnostics import Geometry
from oceanbox.diagnostics.thermocline import equatorial_depths, equatorial_weights, thermocline_depths
from oceanbox.errors import UnreadableResult

EPS = np.finfo(float).eps
GEOMETRY = Geometry(np.linspace(0.0, 6e6, 31), np.linspace(-5e6, 5e6, 41))


def on_grid(depth: np.ndarray) -> xr.DataArray:
    return xr.DataArray(
        depth,
        dims=("y", "x"),
        coords={"y": GEOMETRY.y, "x": GEOMETRY.x},
        name="thermocline_depth",
    )


def test_a_flat_thermocline_has_no_tilt_and_one_depth_everywhere() -> None:
    found = equatorial_depths(np.full((40, 30), 150.0), equatorial_weights(GEOMETRY))
    assert found.tilt == pytest.approx(0.0, abs=40 * EPS * 150)
    for depth in (found.west, found.east, found.mean, found.basin_mean):
        assert depth == pytest.approx(150.0, rel=40 * EPS)


def test_a_linear_slope_tilts_by_seven_eighths_of_the_whole_drop() -> None:
    """The centres of the outer eighths lie 7/8 of the width apart."""
    depth = 200.0 - 100.0 * GEOMETRY.x[None, :] / GEOMETRY.width + np.zeros((40, 1))
    found = equatorial_depths(depth, equatorial_weights(GEOMETRY))
    # Of 30 columns the eighth is 3.75. The crossed one counts with the depth of its centre, an eighth of a
    # column further in than the middle of its share: 0.75/3.75 of that at either end, 100/30 m a column.
    crossed = 2 * (0.75 / 3.75) / 8 * 100 / 30
    assert found.tilt == pytest.approx(87.5 - crossed, rel=1e-12)
    assert found.mean == pytest.approx(150.0, rel=1e-13)


def test_water_beyond_two_degrees_does_not_count_on_the_equator() -> None:
    depth = np.full((40, 30), 100.0)
    depth[np.abs(GEOMETRY.y) > 3.5e5] = 300.0  # rows that end 250 km from the equator lie beyond 2 degrees
    found = equatorial_depths(depth, equatorial_weights(GEOMETRY))
    assert found.mean == pytest.approx(100.0, rel=40 * EPS)
    assert found.basin_mean == pytest.approx(300.0 - 200.0 * 2 / 40, rel=1e-13)


def test_no_equator_in_the_basin_gives_no_equatorial_depth() -> None:
    north = Geometry(GEOMETRY.x_face, np.linspace(2e6, 5e6, 41))
    found = equatorial_depths(np.full((40, 30), 150.0), equatorial_weights(north))
    assert np.isnan([found.west, found.east, found.mean, found.tilt]).all()
    assert found.basin_mean == pytest.approx(150.0)


def test_the_labelled_door_gives_the_bare_numbers_with_units() -> None:
    depth = 150.0 + np.random.default_rng(1).normal(size=(40, 30))
    bare = equatorial_depths(depth, equatorial_weights(GEOMETRY))
    found = thermocline_depths(on_grid(depth))
    assert float(found["equatorial_tilt"]) == pytest.approx(bare.tilt, rel=1e-12)
    assert found["equatorial_tilt"].attrs["units"] == "m"
    assert set(found) == {
        "thermocline_depth_equator_west",
        "thermocline_depth_equator_east",
        "thermocline_depth_equator_mean",
        "equatorial_tilt",
        "thermocline_depth_basin_mean",
    }


def test_missing_cells_and_other_dimensions_are_refused() -> None:
    depth = np.full((40, 30), 150.0)
    depth[3, 4] = np.nan
    with pytest.raises(UnreadableResult, match="1 of 1200 values that are not finite"):
        thermocline_depths(on_grid(depth))
    with pytest.raises(UnreadableResult, match="dimensions"):
        thermocline_depths(on_grid(np.zeros((40, 30))).rename(x="longitude"), GEOMETRY)
