"""The horizontal axes of a NetCDF variable: finding them, and where points of the model lie on them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Meaning = Literal["latitude", "longitude", "y", "x", "time", "other"]

# Coordinates are often stored in 4 bytes: a relative 6e-8 of 90 degrees is 1e-4 of a 0.05 degree spacing.
_EDGE_TOLERANCE = 1.0e-3

_DEGREES = {"", "degree", "degrees"}  # what a coordinate may say whose standard name tells the direction
_NORTH = {"degrees_north", "degree_north", "degrees_N", "degree_N", "degreesN", "degreeN"}
_EAST = {"degrees_east", "degree_east", "degrees_E", "degree_E", "degreesE", "degreeE"}
_METRES = {"m": 1.0, "metre": 1.0, "metres": 1.0, "meter": 1.0, "meters": 1.0}
_METRES |= {"km": 1.0e3, "kilometre": 1.0e3, "kilometres": 1.0e3, "kilometer": 1.0e3, "kilometers": 1.0e3}


class AxisError(Exception):
    """An axis of a file does not fit; the parts of the fault to be made of it."""

    def __init__(self, got: str, allowed: str, remedy: str) -> None:
        self.got, self.allowed, self.remedy = got, allowed, remedy
        super().__init__(f"{got}; {allowed}; {remedy}")


@dataclass(frozen=True)
class Axis:
    """A coordinate of a file, in degrees or metres, in the order of the file.

    meaning    which direction it measures
    values     (n,), degrees or m
    """

    name: str
    meaning: Meaning
    values: Array


def axis_meaning(name: str, attributes: dict[str, Any]) -> Meaning:
    """What a coordinate variable measures, by CF: its units, its standard name, its axis, and its name at the last.

    Source: CF Metadata Conventions 1.11, chapters 4 and 5.6.
    """
    units = str(attributes.get("units", "")).strip()
    standard = str(attributes.get("standard_name", ""))
    letter = str(attributes.get("axis", "")) or name
    if standard == "time" or " since " in units or letter in ("T", "time"):
        return "time"
    if units in _NORTH or (standard == "latitude" and units in _DEGREES):
        return "latitude"
    if units in _EAST or (standard == "longitude" and units in _DEGREES):
        return "longitude"
    if units in _METRES:
        if standard == "projection_y_coordinate" or letter in ("Y", "y"):
            return "y"
        if standard == "projection_x_coordinate" or letter in ("X", "x"):
            return "x"
    return "other"


def read_axis(name: str, meaning: Meaning, values: Array, units: str) -> Axis:
    """An axis in degrees or metres; raises AxisError where it cannot be interpolated on."""
    if values.size < 2:
        raise AxisError(f"{values.size} value on {name}", "an axis needs at least 2", "give a file with a whole grid")
    if not np.all(np.isfinite(values)):
        raise AxisError(f"missing values on {name}", "coordinates must be complete", "mend the file's coordinates")
    if meaning == "longitude":
        values = np.unwrap(values, period=360.0)  # a file that starts at 350 goes on 360, not 0
    steps = np.diff(values)
    if not (np.all(steps > 0.0) or np.all(steps < 0.0)):
        raise AxisError(f"{name} that turns back", "must rise or fall throughout", "sort the file along this axis")
    scale = _METRES[units] if meaning in ("x", "y") else 1.0
    return Axis(name, meaning, values * scale)


def rising(axis: Axis, values: Array, dimension: int) -> tuple[Axis, Array]:
    """The axis, and the data along that dimension, turned round where the axis falls."""
    if axis.values[0] < axis.values[-1]:
        return axis, values
    return Axis(axis.name, axis.meaning, axis.values[::-1]), np.flip(values, dimension)


def closed_round_the_globe(axis: Axis, values: Array) -> tuple[Axis, Array]:
    """A rising longitude that goes all the way round, its last column repeated a turn before the first.

    Other axes come back as they are. Longitude is the last dimension of `values`.
    """
    longitude = axis.values
    gap = longitude[0] + 360.0 - longitude[-1]
    spacing = float(np.max(np.diff(longitude)))
    if axis.meaning != "longitude" or gap > spacing * (1.0 + _EDGE_TOLERANCE) or gap <= 0.0:
        return axis, values
    closed = np.concatenate([[longitude[-1] - 360.0], longitude])
    return Axis(axis.name, axis.meaning, closed), np.concatenate([values[..., -1:], values], axis=-1)


def _reach(axis: Axis) -> tuple[float, float]:
    """The outer edges of the outermost cells of a rising axis, degrees or m; the ends of one that closes on itself."""
    values = axis.values
    if axis.meaning == "longitude" and values[-1] - values[0] >= 360.0 * (1.0 - 1.0e-9):  # but for round-off
        return float(values[0]), float(values[0]) + 360.0
    first, last = 0.5 * (values[1] - values[0]), 0.5 * (values[-1] - values[-2])
    return float(values[0] - first * (1.0 + _EDGE_TOLERANCE)), float(values[-1] + last * (1.0 + _EDGE_TOLERANCE))


def places_on(axis: Axis, wanted: Array) -> Array:
    """Where the wanted points lie on a rising axis, (n,), degrees or m.

    The cells of the file reach half a spacing beyond its outermost centres; points there take the outermost value.
    Longitudes are moved by whole turns. Raises AxisError where a point lies outside the cells.
    """
    values = axis.values
    low, high = _reach(axis)
    places = low + np.mod(wanted - low, 360.0) if axis.meaning == "longitude" else wanted
    outside = (places < low) | (places > high)
    if np.any(outside):
        worst = wanted[outside][0]
        unit, scale = ("km", 1.0e-3) if axis.meaning in ("x", "y") else ("degrees", 1.0)
        span = f"{values[0] * scale:.6g} to {values[-1] * scale:.6g} {unit}"
        raise AxisError(
            f"{axis.name} from {span}",
            f"must cover the basin, which has {int(np.sum(outside))} points outside, one at {worst * scale:.6g} {unit}",
            "give a file that covers the basin",
        )
    return np.minimum(np.maximum(places, values[0]), values[-1])
