"""Where the cases of a study lie: over its axes, or in a row."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import xarray as xr
from numpy.typing import ArrayLike

from oceanbox.config import Config
from oceanbox.study.keys import describe, value_at
from oceanbox.study.plan import Case, axis_points
from oceanbox.study.schema import Axis, Study

__all__ = ["Place", "place_of_cases"]


@dataclass(frozen=True)
class Place:
    """The dimensions of a collected dataset, the cases in C order over them."""

    dims: tuple[str, ...]
    shape: tuple[int, ...]
    coordinates: Mapping[str, xr.Variable]

    @property
    def count(self) -> int:
        """The number of cases."""
        return int(np.prod(self.shape))

    def spread(self, values: ArrayLike, attributes: Mapping[str, str], dims: Sequence[str] = ()) -> xr.Variable:
        """One value of each case, or an array over `dims` of each, as a variable over the dimensions."""
        texts = isinstance(values, list) and any(isinstance(value, str) for value in values)
        array = np.asarray(values, dtype=object if texts else np.float64)
        return xr.Variable((*self.dims, *dims), array.reshape(*self.shape, *array.shape[1:]), dict(attributes))


def place_of_cases(study: Study, cases: Sequence[Case]) -> Place:
    """Over the axes of a study that has them; over `case` otherwise, with the numbers that vary as coordinates."""
    if study.axes is not None:
        coordinates = {axis.name: _along(axis, cases[0].config) for axis in study.axes}
        return Place(tuple(coordinates), tuple(variable.size for variable in coordinates.values()), coordinates)
    return Place(("case",), (len(cases),), _varied(cases))


def _along(axis: Axis, config: Config) -> xr.Variable:
    positions = [point.position for point in axis_points(axis)]
    words = describe(config, axis.all_keys[0])
    attributes = {
        "long_name": axis.long_name or axis.name.replace("_", " "),
        "comment": "key " + ", ".join(axis.all_keys),
    }
    if isinstance(positions[0], str):
        return xr.Variable(axis.name, np.array(positions, dtype=object), attributes)
    # positions that are not the values of a key have no unit unless the study says so
    own = words.unit if axis.positions is None else ""
    attributes["units"] = axis.unit if axis.unit is not None else own or "1"
    return xr.Variable(axis.name, np.array(positions, dtype=np.float64), attributes)


def _varied(cases: Sequence[Case]) -> dict[str, xr.Variable]:
    """The keys that differ between cases and are numbers in all of them."""
    keys = list(dict.fromkeys(key for case in cases for key in case.changes))
    columns: dict[str, list[Any]] = {}
    for key in keys:
        values = [value_at(case.config, key) for case in cases]
        if all(isinstance(value, int | float) and not isinstance(value, bool) for value in values):
            columns[key] = values
    short = _short_names(list(columns))
    found = {}
    for key, values in columns.items():
        words = describe(cases[0].config, key)
        attributes = {"long_name": words.sentence or key, "units": words.unit or "1", "comment": f"key {key}"}
        found[short[key]] = xr.Variable("case", np.array(values, dtype=np.float64), attributes)
    return found


def _short_names(keys: Sequence[str]) -> dict[str, str]:
    """The last parts of dotted keys, as many as tell them apart, as names that CF allows."""
    names: dict[str, str] = {}
    for key in keys:
        parts = key.split(".")
        count = 1
        while count < len(parts) and any(
            other != key and other.split(".")[-count:] == parts[-count:] for other in keys
        ):
            count += 1
        names[key] = re.sub(r"[^A-Za-z0-9_]", "_", "_".join(parts[-count:]))
    return {key: name if name[0].isalpha() else f"key_{name}" for key, name in names.items()}
