"""A NetCDF source gives the same map however its grid is laid out, and is refused where it does not fit."""

from collections.abc import Callable
from pathlib import Path
from typing import Any

import netCDF4
import numpy as np
import pytest
from numpy.typing import NDArray

from oceanbox.config.fields import FileField, SumOfFields
from oceanbox.errors import ConfigError
from tests.forcing.places import Array, centres

PLACES = centres(nx=10, ny=18)
LATITUDE = np.arange(-60.0, 60.1, 2.5)
LONGITUDE = np.arange(0.0, 360.0, 5.0)


def plane(latitude: Array, longitude: Array) -> Array:
    """A surface that bilinear interpolation reproduces exactly; east of 180 degrees it counts backwards."""
    east = np.mod(longitude + 180.0, 360.0) - 180.0
    return 0.5 + 0.01 * latitude[:, np.newaxis] - 0.002 * east + 3.0e-4 * latitude[:, np.newaxis] * east


EXPECTED = plane(PLACES.latitude, PLACES.longitude)
# values of order one, made of a handful of roundings
ROUND_OFF = 20 * float(np.finfo(float).eps)


def write(
    path: Path,
    axes: dict[str, tuple[NDArray[Any], dict[str, str]]],
    values: Array,
    units: str | None = "N m-2",
    **attributes: Any,
) -> Path:
    """A file with one variable, 'stress', on the axes in the order given."""
    with netCDF4.Dataset(path, "w") as dataset:
        for name, (coordinate, described) in axes.items():
            dataset.createDimension(name, len(coordinate))
            dataset.createVariable(name, coordinate.dtype, (name,))[:] = coordinate
            dataset[name].setncatts(described)
        variable = dataset.createVariable("stress", "f8", tuple(axes), fill_value=attributes.pop("fill_value", None))
        variable.setncatts(({} if units is None else {"units": units}) | attributes)
        variable.set_auto_maskandscale(False)
        variable[:] = values
    return path


def degrees(latitude: Array = LATITUDE, longitude: Array = LONGITUDE) -> dict[str, tuple[Array, dict[str, str]]]:
    return {"lat": (latitude, {"units": "degrees_north"}), "lon": (longitude, {"units": "degrees_east"})}


def read(path: Path, unit: str = "N m-2", **more: Any) -> Array:
    return PLACES.map_of(FileField(file=str(path), variable=more.pop("variable", "stress"), **more), unit, "wind")


def refusal(path: Path, **more: Any) -> str:
    with pytest.raises(ConfigError) as caught:
        read(path, **more)
    return str(caught.value)


def globe(path: Path) -> Path:
    return write(path, degrees(), plane(LATITUDE, LONGITUDE))


def falling_latitude(path: Path) -> Path:
    return write(path, degrees(LATITUDE[::-1]), plane(LATITUDE[::-1], LONGITUDE))


def falling_longitude(path: Path) -> Path:
    return write(path, degrees(LATITUDE, LONGITUDE[::-1]), plane(LATITUDE, LONGITUDE[::-1]))


def from_the_date_line(path: Path) -> Path:
    longitude = np.arange(-180.0, 180.0, 5.0)
    return write(path, degrees(LATITUDE, longitude), plane(LATITUDE, longitude))


def through_the_seam(path: Path) -> Path:
    longitude = np.mod(np.arange(340.0, 420.0, 5.0), 360.0)  # ..., 355, 0, 5, ...
    return write(path, degrees(LATITUDE, longitude), plane(LATITUDE, longitude))


def seam_in_the_basin(path: Path) -> Path:
    longitude = np.mod(np.arange(20.0, 380.0, 5.0), 360.0)  # the globe from 20 round to 15
    return write(path, degrees(LATITUDE, longitude), plane(LATITUDE, longitude))


def one_turn_away(path: Path) -> Path:
    longitude = np.arange(360.0, 400.0, 4.0)
    return write(path, degrees(LATITUDE, longitude), plane(LATITUDE, longitude))


def longitude_first(path: Path) -> Path:
    axes = dict(reversed(degrees().items()))
    return write(path, axes, plane(LATITUDE, LONGITUDE).T)


def uneven_spacing(path: Path) -> Path:
    latitude = 60.0 * np.sin(np.linspace(-np.pi / 2, np.pi / 2, 40))
    return write(path, degrees(latitude), plane(latitude, LONGITUDE))


def four_byte_axes_with_standard_names(path: Path) -> Path:
    axes: dict[str, tuple[NDArray[Any], dict[str, str]]] = {
        "j": (LATITUDE.astype(np.float32), {"standard_name": "latitude"}),
        "i": (LONGITUDE.astype(np.float32), {"standard_name": "longitude"}),
    }
    return write(path, axes, plane(LATITUDE, LONGITUDE))


def kilometres(path: Path) -> Path:
    y, x = np.arange(-4200.0, 5300.0, 100.0), np.arange(-50.0, 3100.0, 50.0)
    values = plane(np.degrees(y / 6371.0), np.degrees(x / 6371.0))
    return write(path, {"y": (y, {"units": "km"}), "x": (x, {"units": "km"})}, values)


def metres_by_standard_name(path: Path) -> Path:
    y, x = np.arange(5.3e6, -4.2e6, -1.0e5), np.arange(-5.0e4, 3.1e6, 5.0e4)
    values = plane(np.degrees(y / 6.371e6), np.degrees(x / 6.371e6))
    axes = {
        "northing": (y, {"units": "m", "standard_name": "projection_y_coordinate"}),
        "easting": (x, {"units": "m", "standard_name": "projection_x_coordinate"}),
    }
    return write(path, axes, values)


def packed_in_two_bytes_with_time(path: Path) -> Path:
    values = plane(LATITUDE, LONGITUDE)
    axes = {"time": (np.arange(2.0), {"units": "days since 2001-01-01"}), "level": (np.zeros(1), {}), **degrees()}
    stacked = np.stack([np.full_like(values, -9.0), values])[:, np.newaxis]
    return write(path, axes, (stacked - 1.0) / 0.5, scale_factor=0.5, add_offset=1.0)


LAYOUTS = [
    globe,
    falling_latitude,
    falling_longitude,
    from_the_date_line,
    through_the_seam,
    seam_in_the_basin,
    one_turn_away,
    longitude_first,
    uneven_spacing,
    four_byte_axes_with_standard_names,
    kilometres,
    metres_by_standard_name,
]


@pytest.mark.parametrize("layout", LAYOUTS, ids=lambda layout: layout.__name__)
def test_the_map_does_not_depend_on_the_layout_of_the_file(layout: Callable[[Path], Path], tmp_path: Path) -> None:
    assert read(layout(tmp_path / "wind.nc")) == pytest.approx(EXPECTED, abs=ROUND_OFF, rel=0)


def test_a_record_is_picked_and_unpacked(tmp_path: Path) -> None:
    path = packed_in_two_bytes_with_time(tmp_path / "wind.nc")
    assert read(path, time_index=1) == pytest.approx(EXPECTED, abs=ROUND_OFF, rel=0)
    assert read(path) == pytest.approx(np.full_like(EXPECTED, -9.0), abs=ROUND_OFF * 9, rel=0)
    assert refusal(path, time_index=2) == ("wind.time_index: got 2; must be 0 to 1; give a record the file has")
    assert refusal(globe(tmp_path / "steady.nc"), time_index=1).startswith("wind.time_index: got 1; must be 0 to 0;")


def test_linear_interpolation_errs_by_the_square_of_the_spacing(tmp_path: Path) -> None:
    errors = []
    for spacing in (4.0, 2.0):
        latitude = np.arange(-60.0, 60.1, spacing)
        values = np.broadcast_to(np.cos(np.radians(4.0 * latitude))[:, np.newaxis], (latitude.size, LONGITUDE.size))
        result = read(write(tmp_path / f"{spacing}.nc", degrees(latitude), values))
        error = np.abs(result - np.cos(np.radians(4.0 * PLACES.latitude))[:, np.newaxis]).max()
        # de Boor: at most spacing^2/8 times the largest second derivative, (4 pi/180)^2
        assert error <= spacing**2 / 8.0 * np.radians(4.0) ** 2
        errors.append(error)
    assert errors[1] < errors[0] / 2.0


def test_a_variable_on_latitude_alone_is_the_same_at_all_longitudes(tmp_path: Path) -> None:
    path = write(tmp_path / "zonal.nc", {"lat": degrees()["lat"]}, 0.01 * LATITUDE)
    result = read(path)
    assert result == pytest.approx(0.01 * PLACES.latitude[:, np.newaxis] * np.ones(10), abs=ROUND_OFF)


def test_the_seam_of_a_globe_is_interpolated_across(tmp_path: Path) -> None:
    longitude = np.arange(2.5, 360.0, 5.0)  # the western wall lies between the last column and the first
    result = read(write(tmp_path / "wind.nc", degrees(LATITUDE, longitude), plane(LATITUDE, longitude)))
    assert PLACES.longitude[0] < 2.5
    assert result == pytest.approx(EXPECTED, abs=ROUND_OFF, rel=0)


def test_cells_reach_half_a_spacing_beyond_the_outermost_centres(tmp_path: Path) -> None:
    """A file on the model's own cells covers the walls too, where faces lie."""
    path = write(tmp_path / "own.nc", degrees(PLACES.latitude, PLACES.longitude), EXPECTED)
    faces = centres(nx=10, ny=18)
    on_faces = type(faces)(np.linspace(*faces.walls, 19), faces.x, faces.walls)
    field = FileField(file=str(path), variable="stress")
    result = on_faces.map_of(field, "N m-2", "wind")
    assert on_faces.latitude[0] == pytest.approx(np.degrees(PLACES.walls[0] / 6.371e6))
    assert result[0] == pytest.approx(EXPECTED[0], abs=ROUND_OFF, rel=0)
    assert result[1:-1] == pytest.approx((EXPECTED[1:] + EXPECTED[:-1]) / 2, abs=ROUND_OFF, rel=0)
    short = write(tmp_path / "short.nc", degrees(PLACES.latitude[1:], PLACES.longitude), EXPECTED[1:])
    with pytest.raises(ConfigError, match=r"must cover the basin, which has 1 points outside, one at -35\.97"):
        on_faces.map_of(FileField(file=str(short), variable="stress"), "N m-2", "wind")


@pytest.mark.parametrize(
    ("units", "unit", "scale", "offset"),
    [
        ("dyne cm-2", "N m-2", 0.1, 0.0),
        ("Pa", "N m-2", 1.0, 0.0),
        ("K", "degC", 1.0, -273.15),
        ("mm day-1", "m year-1", 0.36525, 0.0),
        ("kg m-2 s-1", "m year-1", 31557.6, 0.0),
        ("kg/kg", "g kg-1", 1000.0, 0.0),
    ],
)
def test_numbers_are_converted_to_the_unit_of_the_key(
    units: str, unit: str, scale: float, offset: float, tmp_path: Path
) -> None:
    path = write(tmp_path / "a.nc", degrees(), plane(LATITUDE, LONGITUDE), units)
    expected = scale * EXPECTED + offset
    assert read(path, unit) == pytest.approx(expected, abs=ROUND_OFF * np.abs(expected).max(), rel=0)


def test_a_wrong_unit_is_refused_with_those_that_would_do(tmp_path: Path) -> None:
    values = plane(LATITUDE, LONGITUDE)
    remedy = "set the units attribute of the variable to what its numbers are in"
    assert refusal(write(tmp_path / "a.nc", degrees(), values, "m s-1")) == (
        f"wind.variable: got stress in 'm s-1'; must be in N m-2 or Pa or dyne cm-2; {remedy}"
    )
    assert refusal(write(tmp_path / "b.nc", degrees(), values, None)) == (
        f"wind.variable: got stress without a units attribute; must be in N m-2 or Pa or dyne cm-2; {remedy}"
    )


def test_a_hole_in_the_basin_is_refused_and_one_outside_is_not(tmp_path: Path) -> None:
    values = plane(LATITUDE, LONGITUDE)
    values[:, LONGITUDE > 60.0] = np.nan
    values[LATITUDE > 50.0] = -1.0e30
    path = write(tmp_path / "land.nc", degrees(), values, fill_value=-1.0e30)
    assert read(path) == pytest.approx(EXPECTED, abs=ROUND_OFF, rel=0)
    values[LATITUDE == 0.0, LONGITUDE == 15.0] = -1.0e30
    path = write(tmp_path / "island.nc", degrees(), values, fill_value=-1.0e30)
    near = (np.abs(PLACES.latitude) < 2.5).sum() * (np.abs(PLACES.longitude - 15.0) < 5.0).sum()
    message = refusal(path)
    assert message.startswith(f"wind.variable: got missing values at {near} points of the grid, the first at latitude ")
    assert message.endswith(
        "must have a value everywhere in the basin; fill the gaps in the file (land has no place in this basin)"
    )


def test_a_missing_value_of_weight_zero_does_not_matter(tmp_path: Path) -> None:
    """Land just outside a basin whose own cells the file is on."""
    latitude = np.append(PLACES.latitude, PLACES.latitude[-1] + 4.5)
    values = np.vstack([EXPECTED, np.full((1, 10), np.nan)])
    path = write(tmp_path / "own.nc", degrees(latitude, PLACES.longitude), values)
    assert read(path) == pytest.approx(EXPECTED, abs=ROUND_OFF, rel=0)


def test_a_file_that_does_not_cover_the_basin_is_refused(tmp_path: Path) -> None:
    latitude, longitude = LATITUDE[LATITUDE <= 40.0], LONGITUDE[LONGITUDE <= 20.0]
    outside = int((PLACES.latitude > 41.25).sum())
    assert refusal(write(tmp_path / "a.nc", degrees(latitude), plane(latitude, LONGITUDE))).startswith(
        f"wind.file: got lat from -60 to 40 degrees; must cover the basin, which has {outside} points outside, one at 42."
    )
    assert refusal(write(tmp_path / "b.nc", degrees(LATITUDE, longitude), plane(LATITUDE, longitude))).startswith(
        "wind.file: got lon from 0 to 20 degrees; must cover the basin"
    )
    y, x = np.arange(-4200.0, 5300.0, 100.0), np.arange(0.0, 2000.0, 50.0)
    axes = {"y": (y, {"units": "km"}), "x": (x, {"units": "km"})}
    assert refusal(write(tmp_path / "c.nc", axes, np.zeros((y.size, x.size)))).startswith(
        "wind.file: got x from 0 to 1950 km; must cover the basin, which has 3 points outside, one at 2250 km; "
    )


def test_what_is_no_rectilinear_grid_is_refused(tmp_path: Path) -> None:
    def message(name: str, axes: dict[str, tuple[Array, dict[str, str]]]) -> str:
        sizes = [len(coordinate) for coordinate, _ in axes.values()]
        return refusal(write(tmp_path / f"{name}.nc", axes, np.zeros(sizes)))

    on_a_grid = (
        "must lie on latitude and longitude, on y and x, or on latitude or y alone, each a 1-D coordinate with units"
    )
    assert message("bare", {"lat": (LATITUDE, {}), "lon": (LONGITUDE, {})}) == (
        f"wind.variable: got stress with the dimension lat (49); {on_a_grid}; select one level"
    )
    assert message("deep", {"level": (np.arange(3.0), {}), **degrees()}) == (
        f"wind.variable: got stress with the dimension level (3); {on_a_grid}; select one level"
    )
    assert message("east", {"lon": degrees()["lon"]}) == (
        f"wind.variable: got stress on (lon); {on_a_grid}; put the variable on such a grid"
    )
    mixed = {"lat": degrees()["lat"], "x": (np.arange(0.0, 4000.0, 100.0), {"units": "km"})}
    assert message("mixed", mixed) == (
        f"wind.variable: got stress on (lat, x); {on_a_grid}; put the variable on such a grid"
    )
    assert message("radians", {"lat": (LATITUDE, {"units": "radian", "standard_name": "latitude"})}) == (
        f"wind.variable: got stress with the dimension lat (49); {on_a_grid}; select one level"
    )


def test_an_axis_that_cannot_be_interpolated_on_is_refused(tmp_path: Path) -> None:
    def message(name: str, latitude: Array) -> str:
        return refusal(write(tmp_path / f"{name}.nc", degrees(latitude), np.zeros((latitude.size, LONGITUDE.size))))

    assert message("back", np.array([-60.0, 0.0, 0.0, 60.0])) == (
        "wind.file: got lat that turns back; must rise or fall throughout; sort the file along this axis"
    )
    assert message("one", np.array([0.0])) == (
        "wind.file: got 1 value on lat; an axis needs at least 2; give a file with a whole grid"
    )
    assert message("hole", np.array([-60.0, np.nan, 60.0])) == (
        "wind.file: got missing values on lat; coordinates must be complete; mend the file's coordinates"
    )


def test_a_wrong_name_or_file_is_refused(tmp_path: Path) -> None:
    path = globe(tmp_path / "wind.nc")
    assert refusal(path, variable="stres") == (
        f"wind.variable: got 'stres'; no such variable in {path}; did you mean 'stress'?"
    )
    assert refusal(path, variable="q") == f"wind.variable: got 'q'; no such variable in {path}; the file has stress"
    text = tmp_path / "wind.txt"
    text.write_text("not a NetCDF file, only long enough to be taken for one")
    assert refusal(text).startswith(f"wind.file: got {text}; cannot be read as NetCDF (")
    assert refusal(tmp_path / "gone.nc").startswith(f"wind.file: got {tmp_path / 'gone.nc'}; cannot be read")


def test_a_source_inside_a_sum_is_named_by_its_place(tmp_path: Path) -> None:
    source = FileField(file=str(globe(tmp_path / "wind.nc")), variable="stress")
    field = SumOfFields(sum=(1.0, source))
    assert PLACES.map_of(field, "N m-2", "wind") == pytest.approx(1.0 + EXPECTED, abs=ROUND_OFF * 2, rel=0)
    with pytest.raises(
        ConfigError, match=r"^wind\.sum\.1\.variable: got stress in 'N m-2'; must be in W m-2 or J m-2 s-1;"
    ):
        PLACES.map_of(field, "W m-2", "wind")
