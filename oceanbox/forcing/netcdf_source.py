"""Fields read from a variable of a NetCDF file and interpolated linearly to the points of a grid."""

from __future__ import annotations

from difflib import get_close_matches
from typing import TYPE_CHECKING, Any

import numpy as np

from oceanbox.config.fields import FileField
from oceanbox.errors import ConfigError, Fault
from oceanbox.forcing.netcdf_axes import (
    Array,
    Axis,
    AxisError,
    axis_meaning,
    closed_round_the_globe,
    places_on,
    read_axis,
    rising,
)
from oceanbox.forcing.units import accepted, conversion

if TYPE_CHECKING:
    from netCDF4 import Dataset, Variable

_HORIZONTAL = ({"latitude", "longitude"}, {"x", "y"}, {"latitude"}, {"y"})
_A_GRID = "must lie on latitude and longitude, on y and x, or on latitude or y alone, each a 1-D coordinate with units"


def interpolated(field: FileField, latitude: Array, longitude: Array, y: Array, x: Array, unit: str, key: str) -> Array:
    """The variable at every point of a grid, (ny, nx), in `unit`; arguments as for `evaluate`.

    The file's grid may run in either direction, start at any longitude and have either order of dimensions; a variable
    on latitude or y alone is the same at all longitudes. Raises ConfigError with one fault.
    """
    from netCDF4 import Dataset  # late, so that analytic forcing does not pay for it

    source = _Source(field, key)
    try:
        dataset = Dataset(field.file)
    except OSError as error:
        raise source.fault(
            "file", field.file, f"cannot be read as NetCDF ({error.strerror or error})", "give a NetCDF file"
        ) from None
    with dataset:
        variable = source.variable(dataset)
        scale, offset = source.conversion(variable, unit)
        values, axes = source.read(dataset, variable)
    wanted = {"latitude": latitude, "longitude": longitude, "y": y, "x": x}
    try:
        result = _interpolate(axes, values, wanted)
    except AxisError as error:
        raise source.fault("file", error.got, error.allowed, error.remedy) from None
    source.refuse_missing(result, latitude, longitude)
    return scale * np.broadcast_to(result, (latitude.size, longitude.size)) + offset


class _Source:
    """One variable of one file, and the dotted key that faults are reported at."""

    def __init__(self, field: FileField, key: str) -> None:
        self.field = field
        self.key = key

    def fault(self, subkey: str, got: str, allowed: str, remedy: str) -> ConfigError:
        key = f"{self.key}.{subkey}" if self.key else subkey
        return ConfigError([Fault("", key, got, allowed, remedy)])

    def variable(self, dataset: Dataset) -> Variable[Any]:
        """The variable itself."""
        name = self.field.variable
        if name in dataset.variables:
            return dataset.variables[name]
        names = [other for other in dataset.variables if other not in dataset.dimensions]
        close = get_close_matches(name, names, n=1, cutoff=0.6)
        remedy = f"did you mean '{close[0]}'?" if close else f"the file has {', '.join(names) or 'no variables'}"
        raise self.fault("variable", repr(name), f"no such variable in {self.field.file}", remedy)

    def conversion(self, variable: Variable[Any], unit: str) -> tuple[float, float]:
        """Scale and offset from the unit of the file to the wanted one."""
        got = getattr(variable, "units", None)
        factors = conversion(str(got), unit) if got is not None else None
        if factors is not None:
            return factors
        raise self.fault(
            "variable",
            f"{variable.name} in '{got}'" if got is not None else f"{variable.name} without a units attribute",
            f"must be in {' or '.join(accepted(unit)) or unit}",
            "set the units attribute of the variable to what its numbers are in",
        )

    def read(self, dataset: Dataset, variable: Variable[Any]) -> tuple[Array, list[Axis]]:
        """The data with only its horizontal dimensions, NaN where missing, and their axes in the same order."""
        index: list[int | slice] = []
        axes: list[Axis] = []
        has_time = False
        for dimension, size in zip(variable.dimensions, variable.shape, strict=True):
            coordinate = dataset.variables.get(dimension)
            attributes = (
                {} if coordinate is None else {name: coordinate.getncattr(name) for name in coordinate.ncattrs()}
            )
            meaning = axis_meaning(dimension, attributes)
            if meaning == "time":
                has_time = True
                index.append(self._record(size))
            elif meaning != "other" and coordinate is not None:
                index.append(slice(None))
                axes.append(self._axis(dimension, meaning, coordinate, attributes))
            elif size == 1:
                index.append(0)
            else:
                raise self.fault(
                    "variable", f"{variable.name} with the dimension {dimension} ({size})", _A_GRID, "select one level"
                )
        if not has_time:
            self._record(1)
        if {axis.meaning for axis in axes} not in _HORIZONTAL or len(axes) > 2:
            got = f"{variable.name} on ({', '.join(variable.dimensions)})"
            raise self.fault("variable", got, _A_GRID, "put the variable on such a grid")
        return _filled(variable[tuple(index)]), axes

    def _record(self, size: int) -> int:
        if self.field.time_index < size:
            return self.field.time_index
        raise self.fault(
            "time_index", f"{self.field.time_index}", f"must be 0 to {size - 1}", "give a record the file has"
        )

    def _axis(self, name: str, meaning: Any, coordinate: Variable[Any], attributes: dict[str, Any]) -> Axis:
        try:
            return read_axis(name, meaning, _filled(coordinate[:]), str(attributes.get("units", "")).strip())
        except AxisError as error:
            raise self.fault("file", error.got, error.allowed, error.remedy) from None

    def refuse_missing(self, result: Array, latitude: Array, longitude: Array) -> None:
        """Refuse a result with holes in it."""
        missing = np.argwhere(np.isnan(np.broadcast_to(result, (latitude.size, longitude.size))))
        if missing.size:
            row, column = missing[0]
            raise self.fault(
                "variable",
                f"missing values at {len(missing)} points of the grid, the first at latitude {latitude[row]:.2f}, "
                f"longitude {longitude[column]:.2f}",
                "must have a value everywhere in the basin",
                "fill the gaps in the file (land has no place in this basin)",
            )


def _filled(values: Any) -> Array:
    """Masked values as NaN, in double precision."""
    return np.ma.filled(np.ma.asarray(values, dtype=np.float64), np.nan)


def _interpolate(axes: list[Axis], values: Array, wanted: dict[str, Array]) -> Array:
    """Bilinear interpolation to (ny, nx), or to (ny, 1) for a variable without a zonal axis.

    A point that only touches a missing value with weight zero is not missing.
    """
    from scipy.interpolate import RegularGridInterpolator

    axes, values = _south_to_north(axes, values)
    places = [places_on(axis, wanted[axis.meaning]) for axis in axes]
    points = np.stack(np.meshgrid(*places, indexing="ij"), axis=-1)
    known = np.isfinite(values)
    grid = [axis.values for axis in axes]
    result = RegularGridInterpolator(grid, np.where(known, values, 0.0))(points)
    if not np.all(known):
        weight = RegularGridInterpolator(grid, known.astype(np.float64))(points)
        result = np.where(weight > 1.0 - 1.0e-9, result, np.nan)  # 1e-9: a weight of zero, but for round-off
    return np.asarray(result).reshape(places[0].size, -1)


def _south_to_north(axes: list[Axis], values: Array) -> tuple[list[Axis], Array]:
    """Dimensions in the order (y, x), both axes rising, longitudes closed where they go round the globe."""
    if axes[0].meaning in ("longitude", "x"):
        axes, values = axes[::-1], values.T
    ordered = []
    for dimension, axis in enumerate(axes):
        axis, values = rising(axis, values, dimension)
        if axis.meaning == "longitude":
            axis, values = closed_round_the_globe(axis, values)
        ordered.append(axis)
    return ordered, values
