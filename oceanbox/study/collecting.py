"""All cases of a study in one dataset over the study's axes, and its scalars as a table."""

from __future__ import annotations

import csv
import math
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import xarray as xr

from oceanbox import names
from oceanbox.constants import DAYS_PER_YEAR
from oceanbox.output.coordinates import BOUNDS_DIM
from oceanbox.output.files import COMPRESSION, is_coordinate, read_dataset, whole_file
from oceanbox.study.places import Place, place_of_cases
from oceanbox.study.plan import Case
from oceanbox.study.schema import Study
from oceanbox.study.status import CaseStatus, State, result_of, status_of

__all__ = ["collect", "write_collected", "write_table"]

COLLECTED = "collected.nc"
TABLE = "scalars.csv"
_STD = "_std"


def collect(study: Study, cases: Sequence[Case], into: Path, attributes: Mapping[str, str] | None = None) -> xr.Dataset:
    """What is known of all cases, finished or not, over the study's axes, or over `case`.

    into          the folder of the study
    attributes    global attributes

    Every scalar of the result files and its standard deviation, the fields the study asks for, and of each case
    `case_name`, `status`, `reason`, `outcome`, `years`, `wall_seconds`, `result_path`, `started_from`.  Numbers of cases
    without a result are NaN.
    """
    place = place_of_cases(study, cases)
    statuses = [status_of(case, into) for case in cases]
    gathered = _Gathered(place, study.fields)
    for number, (case, status) in enumerate(zip(cases, statuses, strict=True)):
        if status.state is State.DONE:
            gathered.take(number, read_dataset(result_of(case, into)))
    variables = gathered.variables()
    variables |= _texts(place, cases, statuses, into)
    variables["years"] = place.spread(gathered.years, {"long_name": "model time that the case took", "units": "year"})
    variables["wall_seconds"] = place.spread(
        [status.seconds for status in statuses], {"long_name": "wall time that the case took", "units": "s"}
    )
    case_names = place.spread([case.name for case in cases], {"long_name": "name of the case"})
    coords = {**place.coordinates, "case_name": case_names, **gathered.coordinates}
    return xr.Dataset(variables, coords, dict(attributes or {}))


class _Gathered:
    """The numbers of the result files, as they come in."""

    def __init__(self, place: Place, fields: Sequence[str]) -> None:
        self._place, self._fields = place, fields
        self._scalars: dict[str, list[float]] = {}
        self._maps: dict[str, np.ndarray[Any, Any]] = {}
        self._map_dims: dict[str, tuple[str, ...]] = {}
        self.coordinates: dict[str, xr.Variable] = {}
        self.years = [math.nan] * place.count

    def take(self, number: int, result: xr.Dataset) -> None:
        """Take the result of one case."""
        count = self._place.count
        for name in (*names.in_group("scalar"), *(f"{name}{_STD}" for name in names.in_group("scalar"))):
            if name in result:
                self._scalars.setdefault(name, [math.nan] * count)[number] = float(result[name])
        self.years[number] = float(result["window_bounds"][-1]) / DAYS_PER_YEAR
        for name in self._fields:
            if name not in result:
                continue
            field = result[name]
            if name not in self._maps:
                self._maps[name] = np.full((count, *field.shape), np.nan)
                self._map_dims[name] = tuple(str(dim) for dim in field.dims)
                self._keep_coordinates(result, self._map_dims[name])
            self._maps[name][number] = field.values

    def _keep_coordinates(self, result: xr.Dataset, dims: Sequence[str]) -> None:
        # bounds belong to their coordinate; those of the window do not say where a field lies
        for name, variable in result.coords.items():
            if variable.dims and set(variable.dims) <= {*dims, BOUNDS_DIM} and set(variable.dims) & set(dims):
                self.coordinates.setdefault(str(name), variable.variable)

    def variables(self) -> dict[str, xr.Variable]:
        """Everything taken, over the axes of the study."""
        found = {name: self._place.spread(values, _attributes(name)) for name, values in self._scalars.items()}
        for name, values in self._maps.items():
            found[name] = self._place.spread(values, _attributes(name), self._map_dims[name])
        return found


def _attributes(name: str) -> dict[str, str]:
    """CF attributes of a variable of a result.  Each case has its own window, which no single coordinate can tell, so the
    mean over it is told in words.
    """
    entry = names.lookup(name)
    window = "window: mean"
    methods = entry.cell_methods or ""
    if methods.startswith(window):
        entry = replace(entry, sign="; ".join(filter(None, (entry.sign, "mean over the window of each case"))))
    kept = methods.removeprefix(window).removeprefix("window: standard_deviation").strip()
    return replace(entry, cell_methods=kept or None).cf_attributes()


def _texts(place: Place, cases: Sequence[Case], statuses: Sequence[CaseStatus], into: Path) -> dict[str, xr.Variable]:
    def paths() -> Iterable[str]:
        for case, status in zip(cases, statuses, strict=True):
            yield result_of(case, into).relative_to(into).as_posix() if status.state is State.DONE else ""

    texts: dict[str, tuple[str, Iterable[str]]] = {
        "status": ("where the case is: waiting, running, done or failed", (item.state.value for item in statuses)),
        "reason": ("why the case failed", (item.reason for item in statuses)),
        "outcome": ("how the run ended, in its own words", (item.outcome for item in statuses)),
        "ending": ("how the run ended", (item.ending for item in statuses)),
        "started_from": ("folder of the case it started from", (item.started_from for item in statuses)),
        "result_path": ("result file, from the folder of the study", paths()),
    }
    return {name: place.spread(list(values), {"long_name": words}) for name, (words, values) in texts.items()}


def write_collected(dataset: xr.Dataset, into: Path) -> Path:
    """Write `collected.nc`, whole or not at all; its path."""
    path = into / COLLECTED
    stored = dataset.copy()
    encoding: dict[str, dict[str, Any]] = {}
    for name, variable in stored.variables.items():
        if variable.dtype.kind == "O":
            encoding[str(name)] = {"dtype": str}
        elif name in stored.coords or is_coordinate(str(name)):
            encoding[str(name)] = {"_FillValue": None}
        else:
            encoding[str(name)] = {"_FillValue": np.nan, **(COMPRESSION if variable.size > 1 else {})}
    with whole_file(path) as part:
        stored.to_netcdf(part, format="NETCDF4", engine="netcdf4", encoding=encoding)
    return path


def write_table(dataset: xr.Dataset, into: Path) -> Path:
    """Write `scalars.csv`, one row for each case, units in the header; its path."""
    path = into / TABLE
    dims = dataset["status"].dims
    columns = [name for name in _ordered(dataset) if dataset[name].dims and set(dataset[name].dims) <= set(dims)]
    shape = dataset["status"].shape
    flat = {name: dataset[name].broadcast_like(dataset["status"]).transpose(*dims).values.ravel() for name in columns}
    with whole_file(path) as part, part.open("w", encoding="utf-8", newline="") as file:
        writer = csv.writer(file)
        writer.writerow([_heading(name, dataset) for name in columns])
        for row in range(math.prod(shape)):
            writer.writerow([_cell(flat[name][row]) for name in columns])
    return path


def _ordered(dataset: xr.Dataset) -> list[str]:
    """Names of variables: which case it is, what became of it, numbers."""
    first = ["case_name", *(str(name) for name in dataset.coords if name != "case_name")]
    texts = [str(name) for name, variable in dataset.data_vars.items() if variable.dtype.kind == "O"]
    return list(dict.fromkeys([*first, *texts, *(str(name) for name in dataset.data_vars)]))


def _heading(name: str, dataset: xr.Dataset) -> str:
    units = dataset[name].attrs.get("units", "")
    return f"{name} ({units})" if units not in ("", "1") else name


def _cell(value: Any) -> str:
    if isinstance(value, str):
        return " ".join(value.split())
    return "" if math.isnan(value) else repr(float(value))
