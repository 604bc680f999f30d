"""Coordinates of a file."""

from __future__ import annotations

from oceanbox.names.variable import Attributes, Variable

CALENDAR = "julian"
TIME_UNITS = "days since 0001-01-01 00:00:00"

_PLANE = "distance on an idealised plane"


def _distance(name: str, what: str, axis: str) -> Variable:
    attributes = (("axis", axis.upper()),)
    standard_name = f"projection_{axis}_coordinate"
    return Variable(name, what, "m", (name,), "coordinate", standard_name, _PLANE, None, attributes)


def _latitude(name: str, dim: str, what: str) -> Variable:
    return Variable(name, what, "degrees_north", (dim,), "coordinate", "latitude")


def _longitude(name: str, dim: str, what: str) -> Variable:
    return Variable(name, what, "degrees_east", (dim,), "coordinate", "longitude")


def _time(name: str, what: str, dims: tuple[str, ...], attributes: Attributes = ()) -> Variable:
    calendar = (("calendar", CALENDAR), ("units_metadata", "leap_seconds: none"))
    return Variable(name, what, TIME_UNITS, dims, "coordinate", "time", attributes=(*attributes, *calendar))


COORDINATES: tuple[Variable, ...] = (
    _distance("x", "eastward distance of cell centres from the western edge", "x"),
    _distance("x_face", "eastward distance of x faces from the western edge", "x"),
    _distance("y", "northward distance of cell centres from the origin", "y"),
    _distance("y_face", "northward distance of y faces from the origin", "y"),
    _longitude("lon", "x", "longitude of cell centres from the western edge"),
    _longitude("lon_face", "x_face", "longitude of x faces from the western edge"),
    _latitude("lat", "y", "latitude of cell centres"),
    _latitude("lat_face", "y_face", "latitude of y faces"),
    Variable(
        "layer",
        "number of the layer, from the surface",
        "1",
        ("layer",),
        "coordinate",
        "model_level_number",
        attributes=(("axis", "Z"), ("positive", "down")),
    ),
    Variable("region", "name of the latitude band", "", ("region",), "coordinate"),
    _time("time", "model time", ("time",), (("axis", "T"),)),
    _time("window", "middle of the averaging window", ()),
    # CF lets a scalar coordinate have bounds, but checkers refuse them, so these describe themselves.
    _time("window_bounds", "start and end of the averaging window", ("bounds",)),
)
