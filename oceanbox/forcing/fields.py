"""Fields of the configuration evaluated at the points of a grid."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from oceanbox.config.fields import (
    Band,
    Cosine,
    FieldKind,
    FileField,
    Gaussian,
    LatitudeBand,
    Linear,
    Points,
    SumOfFields,
    TropicsToPole,
)
from oceanbox.errors import ConfigError, Fault
from oceanbox.forcing.netcdf_source import interpolated

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Rows:
    """The rows of a grid: latitude [degrees] and y [m] of each, y of the two walls [m]."""

    latitude: Array
    y: Array
    walls: tuple[float, float]


def evaluate(
    field: float | FieldKind,
    latitude: Array,
    longitude: Array,
    y: Array,
    x: Array,
    y_walls: tuple[float, float],
    unit: str,
    key: str = "",
) -> Array:
    """A field at every point of a grid, (ny, nx), in `unit`.

    latitude     of the rows, increasing                         (ny,)  degrees
    longitude    of the columns, east of the western wall        (nx,)  degrees
    y, x         the same places as distances                    (ny,), (nx,)  m
    y_walls      y of the southern and the northern wall         m
    unit         unit of the key that holds the field, UDUNITS spelling; NetCDF sources are converted to it
    key          dotted key of the field, for messages

    Works for centres and faces alike. Raises ConfigError where a NetCDF source does not fit.
    """
    shape = (latitude.size, longitude.size)
    if isinstance(field, FileField):
        return interpolated(field, latitude, longitude, y, x, unit, key)
    if isinstance(field, SumOfFields):
        parts = enumerate(field.sum)
        terms = [
            evaluate(part, latitude, longitude, y, x, y_walls, unit, f"{key}.sum.{index}") for index, part in parts
        ]
        return np.sum(terms, axis=0)
    if isinstance(field, FieldKind):
        return np.broadcast_to(profile(field, Rows(latitude, y, y_walls))[:, np.newaxis], shape).copy()
    return np.full(shape, float(field))


def profile(field: FieldKind, rows: Rows) -> Array:
    """A field that depends on latitude alone, (ny,)."""
    match field:
        case Gaussian():
            return field.base + field.peak * np.exp(-(((rows.latitude - field.centre_deg) / field.width_deg) ** 2))
        case TropicsToPole():
            return _tropics_to_pole(field, rows.latitude)
        case Cosine():
            south, north = rows.walls
            angle = np.pi * field.half_waves * (rows.y - south) / (north - south) + np.radians(field.phase_deg_of_basin)
            return field.amplitude * np.cos(angle)
        case Band():
            return field.peak * bump(field, rows.latitude)
        case Linear():
            return field.value_at_origin + field.slope_per_deg * rows.latitude
        case Points():
            latitudes, values = np.array(field.points).T
            return np.interp(rows.latitude, latitudes, values)
    raise TypeError(f"no profile for a field of kind {type(field).__name__}")


def bump(band: LatitudeBand, latitude: Array) -> Array:
    """A bump of height 1 in a band of latitude: sin^2 of pi times the way across it, zero outside, (ny,)."""
    distance = np.abs(latitude)
    across = (distance - band.from_deg) / (band.to_deg - band.from_deg)
    inside = (across > 0.0) & (across < 1.0)
    if band.hemispheres == "north":
        inside &= latitude > 0.0
    elif band.hemispheres == "south":
        inside &= latitude < 0.0
    return np.where(inside, np.sin(np.pi * across) ** 2, 0.0)


def _tropics_to_pole(field: TropicsToPole, latitude: Array) -> Array:
    """Flat, half a cosine, flat; `across` is 0 at the edge of the tropics and 1 at the polar latitude."""
    across = (np.abs(latitude) - field.flat_to_deg) / (field.pole_deg - field.flat_to_deg)
    across = np.minimum(np.maximum(across, 0.0), 1.0)  # the two flat parts, by definition of the shape
    return field.polar + (field.tropical - field.polar) * 0.5 * (1.0 + np.cos(np.pi * across))


def require_above(values: Array, limit: float, unit: str, key: str) -> None:
    """Raise ConfigError unless a map exceeds `limit` everywhere."""
    if not np.all(values > limit):
        _refuse(values, f"must be > {limit:g} {unit} everywhere", key)


def require_at_least(values: Array, limit: float, unit: str, key: str) -> None:
    """Raise ConfigError where a map is less than `limit`."""
    if not np.all(values >= limit):
        _refuse(values, f"must be >= {limit:g} {unit} everywhere", key)


def _refuse(values: Array, allowed: str, key: str) -> None:
    row, column = np.unravel_index(int(np.argmin(values)), values.shape)
    got = f"{values[row, column]:g} in row {row}, column {column} of the grid"
    raise ConfigError([Fault("", key, got, allowed, "change the field so that its smallest value is allowed")])
