"""The one table of variables: short name, long name, CF standard name or none, unit, place on the grid, sign.

Every writer, budget, diagnostic and figure looks a name up here, so a unit or a sign is stated once.
`lookup` also knows three rules that derive an entry from another one:

    <name>_std      standard deviation within the window, of a state field or a scalar
    series_<name>   a scalar as a function of time (mean over the interval that ends at each time)
    region_<name>   a budget map integrated over each region

Units are UDUNITS strings. Standard names are from the CF standard-name table, version 93; where that table has no
name for a quantity there is none here either.
"""

from __future__ import annotations

import difflib
from collections.abc import Mapping
from dataclasses import replace
from types import MappingProxyType

from oceanbox.names.budgets import (
    BY_LATITUDE,
    HEAT_BUDGET,
    HEAT_TRANSPORT,
    INTEGRAL_UNITS,
    SALT_BUDGET,
    VOLUME_BUDGET,
)
from oceanbox.names.coordinates import CALENDAR, COORDINATES, TIME_UNITS
from oceanbox.names.fields import FORCING, STATE
from oceanbox.names.scalars import SCALARS
from oceanbox.names.variable import DIFFERENCE, ON_SCALE, Group, Variable

__all__ = [
    "CALENDAR",
    "REGIONS",
    "TIME_UNITS",
    "VARIABLES",
    "Group",
    "UnknownVariableError",
    "Variable",
    "all_names",
    "at_one_time",
    "coordinate",
    "coordinate_names",
    "in_group",
    "lookup",
]

STD_SUFFIX = "_std"
SERIES_PREFIX = "series_"
REGION_PREFIX = "region_"

REGIONS = (
    "southern_high_latitudes",
    "southern_subtropics",
    "tropics",
    "northern_subtropics",
    "northern_high_latitudes",
)
"""Names of the latitude bands, from south to north: the order along the dimension `region`."""

VARIABLES: tuple[Variable, ...] = (
    STATE + FORCING + VOLUME_BUDGET + HEAT_BUDGET + SALT_BUDGET + HEAT_TRANSPORT + BY_LATITUDE + SCALARS
)
"""The entries from which the others are derived."""

_STATE_WITH_STD = ("thickness", "temperature", "salinity", "velocity_x", "velocity_y", "thermocline_depth")


class UnknownVariableError(KeyError):
    """A name that the table of variables does not hold; `near` lists the nearest ones."""

    def __init__(self, name: str, known: tuple[str, ...]) -> None:
        super().__init__(name)
        self.name = name
        self.near = tuple(difflib.get_close_matches(name, known, n=4, cutoff=0.5))

    def __str__(self) -> str:
        nearest = f"nearest names: {', '.join(self.near)}" if self.near else "no name is near it"
        return f"unknown variable: got {self.name!r}; {nearest}; the table is oceanbox.names"


def _std(base: Variable) -> Variable:
    """Standard deviation within the window; that of a temperature is a difference, in K."""
    on_scale = base.attributes == ON_SCALE
    return replace(
        base,
        name=base.name + STD_SUFFIX,
        long_name=f"{base.long_name}: standard deviation within the window",
        units="K" if on_scale else base.units,
        sign=None,
        cell_methods="window: standard_deviation",
        attributes=DIFFERENCE if on_scale else base.attributes,
    )


def _series(base: Variable) -> Variable:
    name = SERIES_PREFIX + base.name
    return replace(base, name=name, dims=("time",), group="series", cell_methods="time: mean")


def _region(base: Variable) -> Variable:
    return replace(
        base,
        name=REGION_PREFIX + base.name,
        long_name=f"{base.long_name}, integrated over the region",
        units=INTEGRAL_UNITS[base.group],
        dims=("region",),
        group="region",
        standard_name=None,
        cell_methods="window: mean",
    )


_WITH_STD = tuple(v for v in STATE if v.name in _STATE_WITH_STD) + SCALARS
_BUDGETS = VOLUME_BUDGET + HEAT_BUDGET + SALT_BUDGET
_TABLE: Mapping[str, Variable] = MappingProxyType(
    {v.name: v for v in (*VARIABLES, *map(_std, _WITH_STD), *map(_series, SCALARS), *map(_region, _BUDGETS))}
)
_COORDINATES: Mapping[str, Variable] = MappingProxyType({v.name: v for v in COORDINATES})


def all_names() -> tuple[str, ...]:
    """Every data variable a file may hold, base entries first, then the derived ones."""
    return tuple(_TABLE)


def in_group(group: Group) -> tuple[str, ...]:
    """Names of one group in table order, without their standard deviations."""
    return tuple(v.name for v in _TABLE.values() if v.group == group and not v.name.endswith(STD_SUFFIX))


def lookup(name: str) -> Variable:
    """The entry of a data variable, whether it stands in the table or is derived by a rule.

    Raises `UnknownVariableError`, a KeyError that lists the nearest names.
    """
    if name not in _TABLE:
        raise UnknownVariableError(name, all_names())
    return _TABLE[name]


def coordinate(name: str) -> Variable:
    """The entry of a coordinate; raises `UnknownVariableError` as `lookup` does."""
    if name not in _COORDINATES:
        raise UnknownVariableError(name, tuple(_COORDINATES))
    return _COORDINATES[name]


def coordinate_names() -> tuple[str, ...]:
    """Every coordinate a file may hold, their bounds left out."""
    return tuple(_COORDINATES)


def at_one_time(name: str) -> Variable:
    """The entry of a state field, budget term, flux or scalar as it stands in a file of snapshots: with a leading
    time dimension, and no mean over a window.

    Raises ValueError for a name that has no meaning at one time, such as a standard deviation.
    """
    base = lookup(name)
    methods = base.cell_methods or ""
    if not methods.startswith("window: mean"):
        raise ValueError(f"no snapshot of {name}: got a variable of group {base.group}; give a window mean's name")
    over_cells = methods.removeprefix("window: mean").strip()
    return replace(base, dims=("time", *base.dims), cell_methods=f"time: point {over_cells}".strip())
