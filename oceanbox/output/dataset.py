"""From named arrays to a dataset that follows the CF conventions."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
import xarray as xr
from numpy.typing import ArrayLike, NDArray

from oceanbox import names
from oceanbox.output import coordinates
from oceanbox.output.axes import Axes

Array = NDArray[np.float64]

CELL_AREA = "cell_area"
_FIELD_GROUPS = (
    "state",
    "forcing",
    "volume_budget",
    "heat_budget",
    "salt_budget",
    "heat_transport",
    "latitude",
    "region",
)


def assemble(
    fields: Mapping[str, ArrayLike],
    scalars: Mapping[str, float],
    series: Mapping[str, ArrayLike],
    series_time_days: ArrayLike,
    axes: Axes,
    window_days: tuple[float, float],
    attributes: Mapping[str, str],
    series_start_days: float = 0.0,
) -> xr.Dataset:
    """The dataset of a result. All keys are names of variables in the file, as `oceanbox.names` knows them.

    fields             arrays over the grid, by latitude or by region, interior points only
    scalars            single numbers
    series             arrays over time, each named series_<scalar>
    series_time_days   ends of the intervals that the series are averaged over [days]
    window_days        start and end of the window that fields and scalars are averaged over [days]
    attributes         global attributes, from `provenance.global_attributes`
    series_start_days  start of the first interval of the series [days]

    `cell_area` is taken from `axes`. Times stay numbers of days; units and calendar are attributes.
    Raises KeyError for an unknown name, ValueError for a shape that does not fit the dimensions of the name.
    """
    times = np.asarray(series_time_days, dtype=np.float64)
    _check_window(window_days)
    _check_times(times, series_start_days)
    sizes = axes.sizes | {"time": len(times)}
    variables = {CELL_AREA: data_variable(names.lookup(CELL_AREA), axes.cell_area, sizes)}
    for given, groups in ((fields, _FIELD_GROUPS), (scalars, ("scalar",)), (series, ("series",))):
        for name, values in given.items():
            entry = names.lookup(name)
            _check_place(entry, groups, already_there=name in variables)
            variables[name] = data_variable(entry, values, sizes)

    coords = coordinates.horizontal(axes) | coordinates.layers(axes) | coordinates.regions()
    coords |= coordinates.window(*window_days)
    if len(times):
        coords |= coordinates.series_time(times, series_start_days)
    extent = geospatial_attributes(axes) | {"time_coverage_duration": f"P{window_days[1] - window_days[0]:g}D"}
    return xr.Dataset(variables, coords, {**attributes, **extent})


def data_variable(entry: names.Variable, values: ArrayLike, sizes: Mapping[str, int]) -> xr.Variable:
    """One data variable with its attributes; raises ValueError if `values` do not have the entry's dimensions."""
    array = np.asarray(values, dtype=np.float64)
    expected = tuple(sizes[dim] for dim in entry.dims)
    if array.shape != expected:
        raise ValueError(
            f"{entry.name}: got shape {array.shape}; dims ({', '.join(entry.dims)}) need {expected}; "
            "give interior points only, layer axis first"
        )
    variable = xr.Variable(entry.dims, array, data_attributes(entry))
    referred = coordinates.referred_to(entry)
    # None, not absence: xarray would otherwise list every coordinate whose dimensions fit, scalars always.
    variable.encoding["coordinates"] = referred or None
    return variable


def data_attributes(entry: names.Variable) -> dict[str, str]:
    """Attributes of a data variable, including its relation to the cell areas of the file."""
    found = entry.cf_attributes() | {"coverage_content_type": _content_type(entry)}
    if entry.dims[-2:] == ("y", "x") and entry.name != CELL_AREA:
        found["cell_measures"] = f"area: {CELL_AREA}"
    return found


def geospatial_attributes(axes: Axes) -> dict[str, str]:
    """ACDD attributes for the extent of the basin."""
    south, north = coordinates.degrees(axes.y_face[[0, -1]])
    west, east = coordinates.degrees(axes.x_face[[0, -1]])
    return {
        "geospatial_lat_min": f"{south:g}",
        "geospatial_lat_max": f"{north:g}",
        "geospatial_lat_units": names.coordinate("lat").units,
        "geospatial_lon_min": f"{west:g}",
        "geospatial_lon_max": f"{east:g}",
        "geospatial_lon_units": names.coordinate("lon").units,
    }


def _content_type(entry: names.Variable) -> str:
    return "auxiliaryInformation" if entry.group == "forcing" else "modelResult"


def _check_place(entry: names.Variable, groups: tuple[str, ...], *, already_there: bool) -> None:
    if already_there:
        raise ValueError(f"{entry.name}: got it twice; {CELL_AREA} comes from the axes, all else from one mapping")
    if entry.group not in groups:
        raise ValueError(
            f"{entry.name}: got it among {' or '.join(groups)}; it is a {entry.group} variable "
            f"with dims ({', '.join(entry.dims)}); give it in the mapping for those"
        )


def _check_window(window_days: tuple[float, float]) -> None:
    start, end = window_days
    if not (np.isfinite([start, end]).all() and start <= end):
        raise ValueError(f"window_days: got {window_days}; the start must not be after the end")


def _check_times(times: Array, start_days: float) -> None:
    increasing = np.diff(np.concatenate([[start_days], times])) > 0
    if times.ndim != 1 or not increasing.all():
        raise ValueError(f"series_time_days: got {times}; must increase from series_start_days = {start_days:g}")
