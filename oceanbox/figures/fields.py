"""What panels plot, as plain arrays in the units of the axes."""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from numpy.typing import NDArray

from oceanbox import names
from oceanbox.constants import DAYS_PER_YEAR, EARTH_RADIUS_M
from oceanbox.diagnostics.geometry import Geometry
from oceanbox.diagnostics.labelled import array_of
from oceanbox.diagnostics.thermocline import equatorial_profile, equatorial_weights
from oceanbox.diagnostics.transports import integral_south_of
from oceanbox.errors import UnreadableResult

if TYPE_CHECKING:
    import xarray as xr

__all__ = [
    "PETA",
    "SVERDRUP",
    "Degrees",
    "Section",
    "arrows",
    "degrees_of",
    "equatorial_section",
    "exchange_south_of",
    "series",
    "years",
    "zonal_mean",
]

Array = NDArray[np.float64]

PETA = 1.0e15
SVERDRUP = 1.0e6


class Degrees(NamedTuple):
    """Centres and faces of the cells as longitude east of the western wall and latitude, degrees."""

    x: Array
    y: Array
    x_face: Array
    y_face: Array


class Section(NamedTuple):
    """Along the equator, (nx,): temperature degC, depth m, and their standard deviations within the window."""

    longitude: Array
    temperature: Array
    depth: Array
    temperature_spread: Array
    depth_spread: Array


class Arrows(NamedTuple):
    """Mean currents of blocks of cells, m s-1, at the middle of each block, degrees."""

    longitude: Array
    latitude: Array
    eastward: Array
    northward: Array


def degrees_of(geometry: Geometry) -> Degrees:
    """The degrees that stand for distances on the plane."""
    per_metre = np.degrees(1.0 / EARTH_RADIUS_M)
    return Degrees(
        geometry.x * per_metre, geometry.y * per_metre, geometry.x_face * per_metre, geometry.y_face * per_metre
    )


def zonal_mean(dataset: xr.Dataset, name: str) -> Array:
    """Mean over longitude of a map, (ny,), in its unit."""
    area = array_of(dataset, "cell_area")
    mean: Array = (array_of(dataset, name) * area).sum(axis=1) / area.sum(axis=1)
    return mean


def equatorial_section(dataset: xr.Dataset) -> Section:
    """Surface temperature and thermocline depth within 2 degrees of the equator.

    A spread is the mean over latitude of the standard deviations of the cells. Raises UnreadableResult where the basin
    holds no equator.
    """
    geometry = Geometry.of(dataset)
    weights = equatorial_weights(geometry)
    if weights.row.size == 0:
        raise UnreadableResult(
            "equatorial section: got a basin without an equator; the basin must reach within 2 degrees of it; "
            "leave this panel out"
        )
    return Section(
        degrees_of(geometry).x,
        equatorial_profile(array_of(dataset, "temperature")[0], weights),
        equatorial_profile(array_of(dataset, "thermocline_depth"), weights),
        equatorial_profile(array_of(dataset, "temperature_std")[0], weights),
        equatorial_profile(array_of(dataset, "thermocline_depth_std"), weights),
    )


def exchange_south_of(dataset: xr.Dataset) -> dict[str, Array]:
    """Warm water made, destroyed and lost by outcrop south of each latitude, and carried across it, (ny+1,), Sv."""
    names_in_file = ("entrainment_south_of", "transformation_south_of", "overturning")
    found = {name: array_of(dataset, name) for name in names_in_file}
    found["outcrop"] = integral_south_of(-array_of(dataset, "outcrop_volume"), array_of(dataset, "cell_area"))
    return {name: values / SVERDRUP for name, values in found.items()}


def arrows(dataset: xr.Dataset, across: int) -> Arrows:
    """Mean velocity of the top layer over blocks of cells, about `across` of them from west to east.

    Blocks are as tall as they are wide; cells left over at the northern and eastern edge have no arrow.
    """
    geometry = Geometry.of(dataset)
    place = degrees_of(geometry)
    u = array_of(dataset, "velocity_x")[0]
    v = array_of(dataset, "velocity_y")[0]
    wide = max(1, round(geometry.dx.size / across))
    tall = max(1, round(wide * float(geometry.dx.mean() / geometry.dy.mean())))
    return Arrows(
        _block_means(place.x[None, :], 1, wide)[0],
        _block_means(place.y[:, None], tall, 1)[:, 0],
        _block_means(0.5 * (u[:, 1:] + u[:, :-1]), tall, wide),
        _block_means(0.5 * (v[1:] + v[:-1]), tall, wide),
    )


def years(dataset: xr.Dataset) -> Array:
    """Model time of the series, (time,), years. Raises UnreadableResult if the file has no time in days."""
    time = dataset.coords.get("time")
    if time is None or not np.issubdtype(time.dtype, np.number):
        raise UnreadableResult(
            f"time: got {'nothing' if time is None else time.dtype}; numbers of days are needed; "
            "open the file without decoding times"
        )
    return np.asarray(time, dtype=float) / DAYS_PER_YEAR


def series(dataset: xr.Dataset, scalar: str) -> Array:
    """A scalar against time, (time,), in its unit; NaN where the run did not sample it."""
    name = names.SERIES_PREFIX + scalar
    if name not in dataset:
        raise UnreadableResult(
            f"{name}: got a dataset without it; it is needed here ({names.lookup(name).long_name}); "
            "use a result file whose run sampled it, or leave this panel out"
        )
    return np.asarray(dataset[name], dtype=float)


def _block_means(field: Array, tall: int, wide: int) -> Array:
    rows, columns = field.shape[0] // tall, field.shape[1] // wide
    kept = field[: rows * tall, : columns * wide].reshape(rows, tall, columns, wide)
    means: Array = kept.mean(axis=(1, 3))
    return means
