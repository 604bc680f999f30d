"""Restart points: named arrays and attributes that come back bit for bit, attributes that come back equal."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import netCDF4
import numpy as np
from numpy.typing import NDArray

from oceanbox.errors import UnreadableResult
from oceanbox.output.files import DAMAGED, whole_file

Arrays = dict[str, NDArray[Any]]
Attributes = dict[str, str | int | float]

_DTYPES = ("float64", "int64")
_ATTRIBUTES = "oceanbox_checkpoint_attributes"
_DIGEST = "oceanbox_checkpoint_digest"


def save_checkpoint(
    path: Path, arrays: Mapping[str, NDArray[Any]], attributes: Mapping[str, str | int | float]
) -> None:
    """Write a restart point; under its final name it is either the old one or the new one, and on the disk.

    arrays      float64 or int64, of any shape, also 0-d or empty; names without '/'
    attributes  text and numbers; a NaN stays a NaN, but unlike one in an array it loses its sign and payload

    Raises TypeError for any other type, ValueError for a name that cannot be stored.
    """
    for name, array in arrays.items():
        _check_array(name, array)
    text = _attributes_text(attributes)
    with whole_file(path) as part, netCDF4.Dataset(part, "w", format="NETCDF4") as file:
        for name, array in arrays.items():
            _write(file, name, array)
        # One JSON text, because NetCDF attributes lose what Python distinguishes (empty text, large integers).
        file.setncattr_string(_ATTRIBUTES, text)
        file.setncattr_string(_DIGEST, _digest(arrays, text))


def load_checkpoint(path: Path) -> tuple[Arrays, Attributes]:
    """Arrays and attributes of a restart point, exactly as they were saved.

    Raises FileNotFoundError, or `UnreadableResult` if the file is damaged or is not a restart point.
    """
    if not path.exists():
        raise FileNotFoundError(f"no restart point {path}; give the path of one, or start from the beginning")
    remedy = "start from the beginning or from an older restart point"
    try:
        with netCDF4.Dataset(path, "r") as file:
            file.set_auto_maskandscale(False)
            text, digest = (str(getattr(file, name, "")) for name in (_ATTRIBUTES, _DIGEST))
            arrays = {name: np.asarray(variable[...]) for name, variable in file.variables.items()}
    except (OSError, RuntimeError, UnicodeDecodeError) as error:
        raise UnreadableResult(f"{path}: {DAMAGED} ({error}); {remedy}") from error
    if not digest:
        raise UnreadableResult(f"{path}: got a NetCDF file that is not a restart point; {remedy}")
    if digest != _digest(arrays, text):
        raise UnreadableResult(f"{path}: the file is damaged (its contents differ from their digest); {remedy}")
    return arrays, json.loads(text)


def _check_array(name: str, array: NDArray[Any]) -> None:
    if not isinstance(array, np.ndarray) or array.dtype not in _DTYPES:
        got = getattr(array, "dtype", type(array).__name__)
        raise TypeError(f"{name}: got {got}; a restart point holds arrays of {' or '.join(_DTYPES)}; convert it")
    if not name.isidentifier() or not name.isascii():
        raise ValueError(f"array name: got {name!r}; letters, digits and underscores are allowed; rename it")


def _attributes_text(attributes: Mapping[str, str | int | float]) -> str:
    for name, value in attributes.items():
        if not isinstance(value, str | int | float) or isinstance(value, bool):
            raise TypeError(f"attribute {name}: got {value!r}; text and numbers are allowed; convert it")
    return json.dumps(dict(attributes))


def _write(file: netCDF4.Dataset, name: str, array: NDArray[Any]) -> None:
    dims = [f"{name}_{axis}" for axis in range(array.ndim)]
    for dim, size in zip(dims, array.shape, strict=True):
        file.createDimension(dim, size)
    # Without a fill value nothing is masked when it is read.
    variable = file.createVariable(name, array.dtype, dims, fill_value=False)
    variable.set_auto_maskandscale(False)
    variable[...] = array


def _digest(arrays: Mapping[str, NDArray[Any]], text: str) -> str:
    found = hashlib.sha256(text.encode())
    for name in sorted(arrays):
        array = arrays[name]
        found.update(f"\n{name} {array.dtype.name} {array.shape}\n".encode())
        found.update(np.ascontiguousarray(array).tobytes())
    return found.hexdigest()
