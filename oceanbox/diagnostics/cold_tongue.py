"""The cold tongue: water near the equator that is much colder than the equatorial warm pool.

Definitions. The *equatorial profile* is the surface temperature averaged within 2 degrees of the equator.
The *warm pool* temperature is the largest running mean of that profile over an eighth of the basin's width
(in columns: the nearest whole number, at least one). The *cold tongue* is every cell whose centre lies
within 10 degrees of the equator and which is colder than the warm pool by more than a contrast, 2 K unless
said otherwise. Its *reach* is the length of the unbroken run of columns, counted westward from the eastern
wall, whose equatorial profile is colder than the warm pool by more than the contrast. Its *deficits* are
warm pool minus temperature, area mean and largest. A basin without a cold tongue has zero area, reach and
deficits, which is an answer like any other.

The tongue of a mean temperature is not the mean of the tongues: an area is not linear in temperature.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from numpy.typing import NDArray

from oceanbox.diagnostics.geometry import Geometry
from oceanbox.diagnostics.labelled import checked, scalars
from oceanbox.diagnostics.thermocline import (
    OUTER_FRACTION,
    EquatorialWeights,
    equatorial_profile,
    equatorial_weights,
)

if TYPE_CHECKING:
    import xarray as xr

__all__ = [
    "DEFAULT_CONTRAST_K",
    "TONGUE_WITHIN_DEG",
    "ColdTongue",
    "TongueCells",
    "cold_tongue",
    "cold_tongue_of",
    "tongue_cells",
    "warm_pool_temperature",
]

Array = NDArray[np.float64]

DEFAULT_CONTRAST_K = 2.0
TONGUE_WITHIN_DEG = 10.0


class TongueCells(NamedTuple):
    """Where on one grid a cold tongue can be.

    rows     slice of the rows whose centres lie within 10 degrees of the equator
    area     areas of the cells in those rows, m2
    dx       widths of the columns, (nx,), m
    window   columns in the running mean that defines the warm pool
    equator  weights of equatorial means
    """

    rows: slice
    area: Array
    dx: Array
    window: int
    equator: EquatorialWeights


class ColdTongue(NamedTuple):
    """area m2, reach m, mean_deficit K, peak_deficit K, and the warm pool's temperature in the unit of the
    input.

    All are NaN where the basin holds no equator or the temperature near it is not finite.
    """

    area: float
    reach: float
    mean_deficit: float
    peak_deficit: float
    warm_pool: float


_NAN = float("nan")
_UNKNOWN = ColdTongue(_NAN, _NAN, _NAN, _NAN, _NAN)


def tongue_cells(geometry: Geometry) -> TongueCells:
    """The cells of one grid in which a cold tongue can be."""
    inside = np.flatnonzero(geometry.rows_centred_near_equator(TONGUE_WITHIN_DEG))
    rows = slice(int(inside[0]), int(inside[-1]) + 1) if inside.size else slice(0, 0)
    return TongueCells(
        rows=rows,
        area=geometry.cell_area[rows],
        dx=geometry.dx,
        window=max(1, round(OUTER_FRACTION * geometry.dx.size)),
        equator=equatorial_weights(geometry),
    )


def warm_pool_temperature(profile: Array, window: int) -> float:
    """Largest running mean over `window` columns of an equatorial temperature profile (nx,), in its unit."""
    # Deviations from one value, so that a uniform profile is its own running mean exactly.
    deviation = np.concatenate(([0.0], np.cumsum(profile - profile[0])))
    return float(profile[0] + (deviation[window:] - deviation[:-window]).max() / window)


def cold_tongue(temperature: Array, cells: TongueCells, contrast_K: float) -> ColdTongue:
    """The cold tongue of a surface temperature (ny, nx), degC or K. Trusts its input."""
    near = temperature[cells.rows]
    profile = equatorial_profile(temperature, cells.equator)
    if near.size == 0 or not (np.isfinite(near).all() and np.isfinite(profile).all()):
        return _UNKNOWN
    warm_pool = warm_pool_temperature(profile, cells.window)
    deficit = warm_pool - near
    cold = deficit > contrast_K
    area = float(cells.area[cold].sum())
    colder = deficit[cold]
    return ColdTongue(
        area=area,
        reach=_reach(warm_pool - profile > contrast_K, cells.dx),
        mean_deficit=float((cells.area[cold] * colder).sum() / area) if colder.size else 0.0,
        peak_deficit=float(colder.max()) if colder.size else 0.0,
        warm_pool=warm_pool,
    )


def cold_tongue_of(
    surface_temperature: xr.DataArray,
    contrast_K: float = DEFAULT_CONTRAST_K,
    geometry: Geometry | None = None,
) -> xr.Dataset:
    """Area, reach, mean and peak deficit of the cold tongue, as 0-d variables.

    surface_temperature  of the top layer (y, x), degC
    contrast_K           how much colder than the warm pool a cold cell is, K, positive
    geometry             of its grid; taken from the coordinates of the array when not given

    All NaN where the basin holds no equator. Raises ValueError for a contrast that is not positive, and
    UnreadableResult for other dimensions, values that are not finite, or coordinates that tell no cell faces.
    """
    if not contrast_K > 0:
        raise ValueError(f"contrast_K: got {contrast_K}; it must be positive; the usual choice is 2 K")
    where = geometry or Geometry.of(surface_temperature)
    tongue = cold_tongue(checked(surface_temperature, ("y", "x")), tongue_cells(where), contrast_K)
    return scalars(
        {
            "cold_tongue_area": tongue.area,
            "cold_tongue_reach": tongue.reach,
            "cold_tongue_mean_deficit": tongue.mean_deficit,
            "cold_tongue_peak_deficit": tongue.peak_deficit,
        }
    )


def _reach(cold: NDArray[np.bool_], dx: Array) -> float:
    warm_columns = np.flatnonzero(~cold)
    first_cold = int(warm_columns[-1]) + 1 if warm_columns.size else 0
    return float(dx[first_cold:].sum())
