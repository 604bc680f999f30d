"""Records appended to one file while a model runs."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from pathlib import Path
from types import TracebackType
from typing import Any, Literal, Self

import netCDF4
import numpy as np
import xarray as xr
from numpy.typing import ArrayLike

from oceanbox import names
from oceanbox.errors import UnreadableResult
from oceanbox.output import coordinates
from oceanbox.output.axes import Axes
from oceanbox.output.dataset import CELL_AREA, data_variable, geospatial_attributes
from oceanbox.output.files import COMPRESSION, DAMAGED, VALID_RECORDS, as_stored, encoding, part_of, publish

Precision = Literal["f4", "f8"]


class Snapshots:
    """A growing file of fields at single times: `<path>.part` until `finish` gives it its final name.

    Every appended record is handed to the operating system at once, so the file can be read up to the last record
    even if the process is killed. Make one with `create` or `resume`; as a context manager it closes the file and
    leaves the unfinished part for a later `resume`.
    """

    def __init__(self, path: Path, records: int) -> None:
        self.path = path
        self._part = part_of(path)
        try:
            self._file = netCDF4.Dataset(self._part, "a")
        except OSError as error:
            raise UnreadableResult(f"{self._part}: {DAMAGED} ({error}); start from the beginning") from error
        self._file.set_auto_maskandscale(False)
        self._variables = tuple(
            name for name, v in self._file.variables.items() if v.dimensions[:1] == ("time",) and name != "time"
        )
        self._records = records

    @classmethod
    def create(
        cls,
        path: Path,
        variables: Sequence[str],
        axes: Axes,
        attributes: Mapping[str, str],
        precision: Precision = "f4",
    ) -> Self:
        """A new file for the named variables, replacing an unfinished one of the same name.

        precision   of the fields; single numbers and coordinates are always double

        Raises KeyError for an unknown name, ValueError for one that has no meaning at a single time.
        """
        stored = as_stored(_without_records(variables, axes, attributes))
        storage = encoding(stored)
        for name in variables:
            storage[name] = {"_FillValue": math.nan} | _storage(stored[name], precision)
        stored.to_netcdf(part_of(path), format="NETCDF4", engine="netcdf4", encoding=storage, unlimited_dims=["time"])
        return cls(path, records=0)

    @classmethod
    def resume(cls, path: Path, records: int) -> Self:
        """Go on with an unfinished file after its first `records` records; later ones will be overwritten.

        Raises FileNotFoundError without an unfinished file, `UnreadableResult` if it is damaged or too short.
        """
        if not part_of(path).exists():
            raise FileNotFoundError(f"no unfinished file {part_of(path)}; start from the beginning")
        resumed = cls(path, records)
        held = resumed._held()
        if not 0 <= records <= held:
            resumed.close()
            raise UnreadableResult(
                f"{part_of(path)}: got {held} records; at least {records} are needed to go on; start from the beginning"
            )
        resumed.sync()
        return resumed

    @property
    def records(self) -> int:
        """Number of valid records: what a restart point must remember."""
        return self._records

    def append(self, time_days: float, fields: Mapping[str, ArrayLike]) -> None:
        """Write one record: the model time [days] and an array for every variable of the file.

        Raises ValueError if the time does not increase, a variable is missing or too many, or a shape is wrong; then
        nothing is written.
        """
        arrays = self._checked(time_days, fields)
        record = self._records
        for name, array in arrays.items():
            self._file[name][record] = array
        self._file["time"][record] = time_days
        self._records += 1
        self.sync()

    def sync(self) -> None:
        """Hand everything written so far to the operating system."""
        self._file.setncattr(VALID_RECORDS, np.int64(self._records))
        self._file.sync()

    def close(self) -> None:
        """Close the file and leave it unfinished."""
        if self._file.isopen():
            self.sync()
            self._file.close()

    def finish(self, attributes: Mapping[str, str]) -> Path:
        """Set the last global attributes and give the file its final name, with the valid records only."""
        if self._held() > self._records:
            self._drop_leftovers()
        self._file.setncatts(dict(attributes))
        self._file.delncattr(VALID_RECORDS)
        self._file.close()
        publish(self._part, self.path)
        return self.path

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.close()

    def _held(self) -> int:
        return len(self._file.dimensions["time"])

    def _checked(self, time_days: float, fields: Mapping[str, ArrayLike]) -> dict[str, np.ndarray[Any, Any]]:
        last = float(self._file["time"][self._records - 1]) if self._records else -math.inf
        if not last < time_days < math.inf:
            raise ValueError(f"time_days: got {time_days}; must be finite and after the last record, {last} days")
        if set(fields) != set(self._variables):
            raise ValueError(
                f"{self.path.name}: got {sorted(fields)}; a record needs {sorted(self._variables)}, no more and no less"
            )
        arrays = {name: np.asarray(values, dtype=np.float64) for name, values in fields.items()}
        for name, array in arrays.items():
            variable = self._file[name]
            expected = variable.shape[1:]
            if array.shape != expected:
                dims = ", ".join(variable.dimensions[1:])
                raise ValueError(f"{name}: got shape {array.shape}; dims ({dims}) need {expected}")
        return arrays

    def _drop_leftovers(self) -> None:
        """Replace the part by a copy of its valid records: NetCDF cannot shorten a file."""
        self._file.close()
        copy = part_of(self._part)
        with xr.open_dataset(
            self._part, engine="netcdf4", decode_times=False, decode_coords=False, mask_and_scale=False
        ) as source:
            # xarray would give a fill value to every variable that has none.
            bare = {name: {"_FillValue": None} for name, v in source.variables.items() if "_FillValue" not in v.attrs}
            source.isel(time=slice(0, 0)).to_netcdf(
                copy, format="NETCDF4", engine="netcdf4", encoding=bare, unlimited_dims=["time"]
            )
        with netCDF4.Dataset(self._part) as source, netCDF4.Dataset(copy, "a") as target:
            for file in (source, target):
                file.set_auto_maskandscale(False)
            for record in range(self._records):
                for name in (*self._variables, "time"):
                    target[name][record] = source[name][record]
        publish(copy, self._part)
        self._file = netCDF4.Dataset(self._part, "a")


def _without_records(variables: Sequence[str], axes: Axes, attributes: Mapping[str, str]) -> xr.Dataset:
    """The dataset of a file of snapshots, with all its coordinates and no record."""
    entries = [names.at_one_time(name) for name in variables]
    sizes = axes.sizes | {"time": 0}
    found = {CELL_AREA: data_variable(names.lookup(CELL_AREA), axes.cell_area, sizes)}
    for entry in entries:
        found[entry.name] = data_variable(entry, np.empty([sizes[dim] for dim in entry.dims]), sizes)
    coords = coordinates.horizontal(axes) | {"time": coordinates.coordinate("time", np.empty(0))}
    used = {dim for entry in entries for dim in entry.dims}
    if "layer" in used:
        coords |= coordinates.layers(axes)
    if "region" in used:
        coords |= coordinates.regions()
    return xr.Dataset(found, coords, {**attributes, **geospatial_attributes(axes)})


def _storage(variable: xr.DataArray, precision: Precision) -> dict[str, Any]:
    if variable.ndim == 1:
        return {"dtype": "f8"}
    # One chunk per record: appending touches nothing that is already on the disk.
    return {"dtype": precision, "chunksizes": (1, *variable.shape[1:]), **COMPRESSION}
