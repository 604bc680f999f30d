"""Between files and arrays: check what goes into a diagnostic, label what comes out of it."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from oceanbox import names
from oceanbox.errors import UnreadableResult

if TYPE_CHECKING:
    import xarray as xr

__all__ = ["array_of", "checked", "scalars"]

Array = NDArray[np.float64]


def array_of(dataset: xr.Dataset, name: str) -> Array:
    """The values of a variable in the dimension order of the table of variables.

    Raises UnreadableResult if the variable is missing, has other dimensions, or is not finite everywhere.
    """
    if name not in dataset:
        raise UnreadableResult(
            f"{name}: got a dataset without it; it is needed here ({names.lookup(name).long_name}, "
            f"{names.lookup(name).units}); use a result file, or add the variable"
        )
    return checked(dataset[name], names.lookup(name).dims)


def checked(array: xr.DataArray, dims: tuple[str, ...]) -> Array:
    """The values of an array as floats, in the order of `dims`.

    Raises UnreadableResult if the array has other dimensions or is not finite everywhere.
    """
    if set(array.dims) != set(dims) or array.ndim != len(dims):
        raise UnreadableResult(
            f"{array.name}: got dimensions {array.dims}; {dims} are needed; select or rename until they match"
        )
    values = np.asarray(array.transpose(*dims), dtype=float)
    missing = int(values.size - np.isfinite(values).sum())
    if missing:
        raise UnreadableResult(
            f"{array.name}: got {missing} of {values.size} values that are not finite; "
            "a basin has no missing cells; look for where the run that wrote them went wrong"
        )
    return values


def scalars(values: Mapping[str, float]) -> xr.Dataset:
    """A dataset of 0-d variables, each with the attributes of the table."""
    import xarray as xr

    return xr.Dataset({name: ((), float(value), names.lookup(name).cf_attributes()) for name, value in values.items()})
