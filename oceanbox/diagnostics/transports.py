"""Heat and water carried northward, latitude by latitude.

Everything here is a function of the northward face coordinate, (ny+1,), zero at the southern wall where
nothing passes. A quantity *south of* a latitude is integrated from the southern wall.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from oceanbox import names
from oceanbox.diagnostics.geometry import Geometry
from oceanbox.diagnostics.labelled import array_of

if TYPE_CHECKING:
    import xarray as xr

__all__ = [
    "ENTRAINMENT_TERMS",
    "across_latitude",
    "exchange_by_latitude",
    "heat_transport_by_latitude",
    "heat_transport_from_surface",
    "integral_south_of",
]

Array = NDArray[np.float64]

ENTRAINMENT_TERMS = tuple(name for name in names.in_group("volume_budget") if name.startswith("entrainment_"))
"""Names of the volume-budget terms that make warm water, one for each closure."""


def across_latitude(flux_y: Array, dx: Array) -> Array:
    """Transport across each latitude, (ny+1,), of a flux per unit width on y faces (..., ny+1, nx).

    Leading axes, such as layers, are summed. dx: widths of the columns (nx,), m. Trusts its input.
    """
    per_layer: Array = flux_y @ dx
    total: Array = per_layer.reshape(-1, per_layer.shape[-1]).sum(axis=0)
    return total


def integral_south_of(per_area: Array, cell_area: Array) -> Array:
    """Integral from the southern wall to each latitude, (ny+1,), of a map per unit area (ny, nx)."""
    by_row: Array = (per_area * cell_area).sum(axis=1)
    return np.concatenate(([0.0], np.cumsum(by_row)))


def heat_transport_from_surface(
    surface_heat_flux: Array, outcrop_heat: Array, heat_storage: Array, cell_area: Array
) -> Array:
    """Northward heat transport implied by what enters south of each latitude and is not stored, (ny+1,), W.

    All maps (ny, nx), W m-2, positive where the layer gains; cell_area m2. Water that is destroyed takes no
    heat relative to the abyss, so no further term appears. Trusts its input.
    """
    return integral_south_of(surface_heat_flux + outcrop_heat - heat_storage, cell_area)


def heat_transport_by_latitude(dataset: xr.Dataset) -> xr.Dataset:
    """Northward heat transport (y_face), W, twice: from the face fluxes, and from the surface flux less
    storage.

    The two agree to the integral of `heat_residual` south of the latitude. Raises UnreadableResult if a
    variable is missing or not finite.
    """
    geometry = Geometry.of(dataset)
    carried = array_of(dataset, "heat_transport_y") + array_of(dataset, "heat_diffusion_y")
    from_surface = heat_transport_from_surface(
        array_of(dataset, "surface_heat_flux"),
        array_of(dataset, "outcrop_heat"),
        array_of(dataset, "heat_storage"),
        array_of(dataset, "cell_area"),
    )
    return _by_latitude(
        {
            "northward_heat_transport": across_latitude(carried, geometry.dx),
            "northward_heat_transport_from_surface": from_surface,
        },
        geometry,
    )


def exchange_by_latitude(dataset: xr.Dataset) -> xr.Dataset:
    """Warm water made and destroyed south of each latitude and carried across it, all (y_face), m3 s-1.

    `overturning` is the transport of all layers through the faces. In a steady state without outcrop it
    equals `entrainment_south_of` minus `transformation_south_of`. Raises UnreadableResult if a variable is
    missing or not finite.
    """
    geometry = Geometry.of(dataset)
    area = array_of(dataset, "cell_area")
    made = np.sum([array_of(dataset, term) for term in ENTRAINMENT_TERMS], axis=0)
    return _by_latitude(
        {
            "entrainment_south_of": integral_south_of(made, area),
            # The map has the sign of a tendency; the total is the rate of destruction.
            "transformation_south_of": integral_south_of(-array_of(dataset, "transformation"), area),
            "overturning": across_latitude(array_of(dataset, "transport_y"), geometry.dx),
        },
        geometry,
    )


def _by_latitude(values: dict[str, Array], geometry: Geometry) -> xr.Dataset:
    import xarray as xr

    return xr.Dataset(
        {name: (("y_face",), array, names.lookup(name).cf_attributes()) for name, array in values.items()},
        coords={"y_face": geometry.y_face},
    )
