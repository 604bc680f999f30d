"""Coordinate variables of a file, with their bounds."""

from __future__ import annotations

import numpy as np
import xarray as xr
from numpy.typing import ArrayLike

from oceanbox import names
from oceanbox.output.axes import Axes, degrees

BOUNDS_DIM = "bounds"
BOUNDS_SUFFIX = "_bounds"
REGION_LABEL = "region_name"
"""Name of the coordinate `region` inside a file: CF keeps the name of a dimension for numbers in order."""

Coordinates = dict[str, xr.Variable]


def coordinate(name: str, values: ArrayLike) -> xr.Variable:
    """A coordinate variable as the table of variables describes it."""
    entry = names.coordinate(name)
    attributes = entry.cf_attributes() | {"coverage_content_type": "coordinate"}
    return xr.Variable(entry.dims, np.asarray(values), attributes)


def with_bounds(name: str, values: ArrayLike, lower: ArrayLike, upper: ArrayLike) -> Coordinates:
    """A coordinate variable and the variable of its bounds, which inherits all attributes and so has none."""
    main = coordinate(name, values)
    main.attrs["bounds"] = name + BOUNDS_SUFFIX
    edges = np.stack([np.asarray(lower, dtype=np.float64), np.asarray(upper, dtype=np.float64)], axis=-1)
    return {name: main, name + BOUNDS_SUFFIX: xr.Variable((*main.dims, BOUNDS_DIM), edges)}


def horizontal(axes: Axes) -> Coordinates:
    """Distances on the plane, and the latitudes and longitudes that stand for them."""
    found = with_bounds("x", axes.x, axes.x_face[:-1], axes.x_face[1:])
    found |= with_bounds("y", axes.y, axes.y_face[:-1], axes.y_face[1:])
    found["x_face"] = coordinate("x_face", axes.x_face)
    found["y_face"] = coordinate("y_face", axes.y_face)
    for longitude, x in (("lon", axes.x), ("lon_face", axes.x_face)):
        found[longitude] = coordinate(longitude, degrees(x))
    for latitude, y in (("lat", axes.y), ("lat_face", axes.y_face)):
        found[latitude] = coordinate(latitude, degrees(y))
    if axes.periodic_x:
        for name in ("x", "x_face"):
            found[name].attrs["comment"] += "; periodic, the last x face is the first one again"
    return found


def layers(axes: Axes) -> Coordinates:
    """Numbers of the layers, 1 at the surface."""
    return {"layer": coordinate("layer", np.arange(1, axes.layers + 1, dtype=np.int32))}


def window(start_days: float, end_days: float) -> Coordinates:
    """The averaging window of a result: its middle and its ends [days]."""
    return {
        "window": coordinate("window", 0.5 * (start_days + end_days)),
        "window_bounds": coordinate("window_bounds", [start_days, end_days]),
    }


def series_time(days: ArrayLike, start_days: float) -> Coordinates:
    """Ends of the intervals that a series is averaged over [days]; the first interval begins at `start_days`."""
    ends = np.asarray(days, dtype=np.float64)
    starts = np.concatenate([[start_days], ends])[: len(ends)]
    return with_bounds("time", ends, starts, ends)


def regions() -> Coordinates:
    """Names of the latitude bands."""
    return {"region": coordinate("region", np.array(names.REGIONS, dtype=object))}


def referred_to(entry: names.Variable) -> str:
    """Text of the CF attribute `coordinates` of a data variable: the auxiliary ones that its dimensions call for."""
    auxiliary = {"y": "lat", "x": "lon", "y_face": "lat_face", "x_face": "lon_face", "region": REGION_LABEL}
    wanted = [auxiliary[dim] for dim in entry.dims if dim in auxiliary]
    if "window:" in (entry.cell_methods or ""):
        wanted.append("window")
    return " ".join(wanted)
