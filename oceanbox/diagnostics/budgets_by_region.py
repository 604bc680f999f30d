"""Every budget term integrated over regions and over bands of latitude.

Regions are bands of latitude labels: the tropics to 10 degrees, the subtropics to 30, the high latitudes
beyond. A row crossed by an edge is shared by area, so the regions add up to the basin.
"""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from oceanbox import names
from oceanbox.diagnostics.geometry import Geometry
from oceanbox.diagnostics.labelled import array_of, checked

if TYPE_CHECKING:
    import xarray as xr

__all__ = [
    "BUDGET_TERMS",
    "REGION_EDGES_DEG",
    "SUBTROPICS_TO_DEG",
    "TROPICS_TO_DEG",
    "band_integrals",
    "band_shares",
    "by_latitude_band",
    "by_region",
]

Array = NDArray[np.float64]

TROPICS_TO_DEG = 10.0
SUBTROPICS_TO_DEG = 30.0

REGION_EDGES_DEG = (
    -np.inf,
    -SUBTROPICS_TO_DEG,
    -TROPICS_TO_DEG,
    TROPICS_TO_DEG,
    SUBTROPICS_TO_DEG,
    np.inf,
)
"""Latitudes between the regions, from the south, in the order of `names.REGIONS`."""

BUDGET_TERMS = (
    *names.in_group("volume_budget"),
    *names.in_group("heat_budget"),
    *names.in_group("salt_budget"),
)


def band_shares(geometry: Geometry, edges_deg: tuple[float, ...]) -> Array:
    """Share of each row in each band between neighbouring edges, (band, ny)."""
    return np.array([geometry.rows_between(south, north) for south, north in pairwise(edges_deg)])


def band_integrals(per_area: Array, cell_area: Array, shares: Array) -> Array:
    """Integrals over bands, (band,), of a map per unit area (ny, nx); shares (band, ny). Trusts its input."""
    integrals: Array = shares @ (per_area * cell_area).sum(axis=1)
    return integrals


def by_region(dataset: xr.Dataset) -> xr.Dataset:
    """`region_<term>` (region) for each budget term: W, m3 s-1 or kg s-1, positive where the layer gains.

    A region outside the basin has integrals of zero. Raises UnreadableResult if a term is missing or not
    finite.
    """
    import xarray as xr

    area = array_of(dataset, "cell_area")
    shares = band_shares(Geometry.of(dataset), REGION_EDGES_DEG)
    integrals = {
        names.REGION_PREFIX + term: band_integrals(array_of(dataset, term), area, shares) for term in BUDGET_TERMS
    }
    return xr.Dataset(
        {name: (("region",), values, names.lookup(name).cf_attributes()) for name, values in integrals.items()},
        coords={"region": list(names.REGIONS)},
    )


def by_latitude_band(per_area: xr.DataArray, edges_deg: tuple[float, ...]) -> xr.DataArray:
    """Integrals of a map per unit area (y, x) over bands of latitude, (latitude_band,), in its unit times m2.

    edges_deg  latitudes between the bands, rising, degrees north

    Raises ValueError for edges that do not rise, UnreadableResult for other dimensions or values that are
    not finite.
    """
    import xarray as xr

    if len(edges_deg) < 2 or not np.all(np.diff(edges_deg) > 0):
        raise ValueError(f"edges_deg: got {edges_deg}; at least two rising latitudes are needed; sort them")
    geometry = Geometry.of(per_area)
    shares = band_shares(geometry, edges_deg)
    middle = 0.5 * (np.asarray(edges_deg[:-1]) + np.asarray(edges_deg[1:]))
    return xr.DataArray(
        band_integrals(checked(per_area, ("y", "x")), geometry.cell_area, shares),
        dims=("latitude_band",),
        coords={"latitude_band": ("latitude_band", middle, {"units": "degrees_north"})},
        name=per_area.name,
        attrs={"long_name": f"{per_area.attrs.get('long_name', per_area.name)}, integrated over the band"},
    )
