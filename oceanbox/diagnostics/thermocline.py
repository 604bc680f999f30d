"""Depth of the thermocline on the equator and over the basin.

The thermocline depth is the base of the warm water, the thickness of all moving layers together. *On the
equator* means within 2 degrees of it; *west* and *east* are the outer eighths of the basin's width. All are
area means in which a cell crossed by the edge of a band counts by the share inside.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from numpy.typing import NDArray

from oceanbox.diagnostics.geometry import Geometry
from oceanbox.diagnostics.labelled import checked, scalars

if TYPE_CHECKING:
    import xarray as xr

__all__ = [
    "EQUATOR_WITHIN_DEG",
    "OUTER_FRACTION",
    "EquatorialDepths",
    "EquatorialWeights",
    "band_mean",
    "equatorial_depths",
    "equatorial_profile",
    "equatorial_weights",
    "thermocline_depths",
]

Array = NDArray[np.float64]

EQUATOR_WITHIN_DEG = 2.0
OUTER_FRACTION = 1.0 / 8.0


class EquatorialWeights(NamedTuple):
    """Weights of rows and columns in equatorial means; each set sums to one, or is NaN where it is empty.

    rows     slice of the rows that count at all; empty where the basin holds no equator
    row      weight of each of those rows
    column   weight of each column in a mean over longitude, (nx,)
    west     weight of each column in the western mean, (nx,)
    east     weight of each column in the eastern mean, (nx,)
    basin    weight of each row in a basin mean, (ny,)
    """

    rows: slice
    row: Array
    column: Array
    west: Array
    east: Array
    basin: Array


class EquatorialDepths(NamedTuple):
    """Thermocline depths, m; `tilt` is west minus east. NaN on the equator where the basin holds none."""

    west: float
    east: float
    mean: float
    tilt: float
    basin_mean: float


def equatorial_weights(geometry: Geometry) -> EquatorialWeights:
    """The weights of every equatorial mean on one grid."""
    share = geometry.rows_near_equator(EQUATOR_WITHIN_DEG) * geometry.dy
    inside = np.flatnonzero(share)
    rows = slice(int(inside[0]), int(inside[-1]) + 1) if inside.size else slice(0, 0)
    return EquatorialWeights(
        rows=rows,
        row=_normalised(share[rows]),
        column=_normalised(geometry.dx),
        west=_normalised(geometry.western_columns(OUTER_FRACTION) * geometry.dx),
        east=_normalised(geometry.eastern_columns(OUTER_FRACTION) * geometry.dx),
        basin=_normalised(geometry.dy),
    )


def equatorial_profile(field: Array, weights: EquatorialWeights) -> Array:
    """Mean over latitude of a (ny, nx) field on the equator, (nx,); NaN where the basin holds no equator."""
    if weights.row.size == 0:
        return np.full(field.shape[1], np.nan)
    profile: Array = weights.row @ field[weights.rows]
    return profile


def band_mean(profile: Array, column_weights: Array) -> float:
    """Weighted mean of an (nx,) profile."""
    return float(profile @ column_weights)


def equatorial_depths(depth: Array, weights: EquatorialWeights) -> EquatorialDepths:
    """Equatorial and basin-mean depths of a thermocline depth (ny, nx), m. Trusts its input."""
    profile = equatorial_profile(depth, weights)
    west = band_mean(profile, weights.west)
    east = band_mean(profile, weights.east)
    return EquatorialDepths(
        west=west,
        east=east,
        mean=band_mean(profile, weights.column),
        tilt=west - east,
        basin_mean=band_mean(weights.basin @ depth, weights.column),
    )


def thermocline_depths(thermocline_depth: xr.DataArray, geometry: Geometry | None = None) -> xr.Dataset:
    """Thermocline depth on the equator (west, east, mean, tilt) and over the basin, all m.

    thermocline_depth  base of the warm water (y, x), m
    geometry           of its grid; taken from the coordinates of the array when not given

    Returns 0-d variables. Those on the equator are NaN where the basin holds none. Raises UnreadableResult
    for other dimensions, values that are not finite, or coordinates that tell no cell faces.
    """
    where = geometry or Geometry.of(thermocline_depth)
    depths = equatorial_depths(checked(thermocline_depth, ("y", "x")), equatorial_weights(where))
    return scalars(
        {
            "thermocline_depth_equator_west": depths.west,
            "thermocline_depth_equator_east": depths.east,
            "thermocline_depth_equator_mean": depths.mean,
            "equatorial_tilt": depths.tilt,
            "thermocline_depth_basin_mean": depths.basin_mean,
        }
    )


def _normalised(weights: Array) -> Array:
    return weights / weights.sum() if weights.size else weights
