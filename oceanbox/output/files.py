"""Writing whole files or none, and reading them."""

from __future__ import annotations

import os
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

import xarray as xr

from oceanbox import names
from oceanbox.errors import UnreadableResult
from oceanbox.output.coordinates import BOUNDS_SUFFIX, REGION_LABEL

PART_SUFFIX = ".part"
DAMAGED = "cannot be read: damaged, not NetCDF-4, or open in another program"
VALID_RECORDS = "oceanbox_valid_records"
"""Global attribute of an unfinished file: records from this number on are left over from before a restart."""

# Measured on model fields: higher levels cost time and save 4 % of the size; zstd needs plugins at the reader.
COMPRESSION: dict[str, Any] = {"zlib": True, "complevel": 1, "shuffle": True}


def part_of(path: Path) -> Path:
    """The name a file has until it is whole."""
    return path.with_name(path.name + PART_SUFFIX)


@contextmanager
def whole_file(path: Path) -> Iterator[Path]:
    """The name to write to; on leaving, the file gets its final name `path`, or, after an exception, is removed.

    What stood under the final name stays intact until then, even if the process is killed.
    """
    part = part_of(path)
    try:
        yield part
    except BaseException:
        part.unlink(missing_ok=True)
        raise
    publish(part, path)


def publish(part: Path, path: Path) -> None:
    """Bring a written file to the disk, then give it its final name."""
    _sync(part)
    part.replace(path)
    _sync(path.parent)


def _sync(path: Path) -> None:
    descriptor = os.open(path, os.O_RDONLY)
    try:
        os.fsync(descriptor)
    finally:
        os.close(descriptor)


def write_dataset(dataset: xr.Dataset, path: Path) -> None:
    """Write a dataset from `dataset.assemble` as NetCDF-4, in double precision, lossless."""
    stored = as_stored(dataset)
    with whole_file(path) as part:
        stored.to_netcdf(part, format="NETCDF4", engine="netcdf4", encoding=encoding(stored))


def read_dataset(path: Path) -> xr.Dataset:
    """A result or a file of snapshots, in memory; times are numbers of days. Of an unfinished file, the valid records.

    Raises FileNotFoundError, or `UnreadableResult` if the file cannot be read as NetCDF-4.
    """
    if not path.exists():
        raise FileNotFoundError(f"no file {path}; give the path of a NetCDF file")
    try:
        # Model time begins at year 1 of a calendar without leap days: a count of days is what figures need.
        loaded = xr.load_dataset(path, engine="netcdf4", decode_times=False)
    except (OSError, ValueError, RuntimeError) as error:
        raise UnreadableResult(f"{path}: {DAMAGED} ({error}); run the model again to write it") from error
    if VALID_RECORDS in loaded.attrs:
        loaded = loaded.isel(time=slice(0, int(loaded.attrs[VALID_RECORDS])))
    return _from_stored(loaded)


def as_stored(dataset: xr.Dataset) -> xr.Dataset:
    """The dataset as a file holds it: `coordinates` attributes stand where `assemble` put them and nowhere else."""
    if "region" in dataset.indexes:
        dataset = dataset.reset_index("region").rename_vars(region=REGION_LABEL)
    return dataset.reset_coords([name for name in dataset.coords if name not in dataset.indexes])


def _from_stored(stored: xr.Dataset) -> xr.Dataset:
    if REGION_LABEL in stored:
        stored = stored.set_coords(REGION_LABEL).rename_vars({REGION_LABEL: "region"}).set_xindex("region")
    return stored.set_coords([name for name in stored.data_vars if is_coordinate(str(name))])


def encoding(stored: xr.Dataset) -> dict[str, dict[str, Any]]:
    """How each variable is stored. Coordinates are never missing, so they have no fill value; data may be (NaN)."""
    found: dict[str, dict[str, Any]] = {}
    for name, variable in stored.variables.items():
        if is_coordinate(str(name)):
            found[str(name)] = {"_FillValue": None}
        else:
            found[str(name)] = {"_FillValue": float("nan"), **(COMPRESSION if variable.ndim else {})}
    return found


def is_coordinate(name: str) -> bool:
    """Whether a variable of a file says where numbers lie, rather than being one of them."""
    return name == REGION_LABEL or name.endswith(BOUNDS_SUFFIX) or name in names.coordinate_names()
