"""Horizontal circulation: streamfunction, gyre, western boundary current, and what the wind stress asks of
them.

The streamfunction is zero on the eastern wall and V = d(psi)/dx, so an anticyclonic gyre north of the
equator is positive. The warm water is also made and destroyed, so its transport has a divergence; psi then
holds, beside the gyre, the northward transport that the overturning carries between a point and the eastern
wall.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from oceanbox.diagnostics.geometry import Geometry
from oceanbox.diagnostics.labelled import array_of, scalars
from oceanbox.diagnostics.reference import Reference

if TYPE_CHECKING:
    import xarray as xr

__all__ = [
    "beta_of",
    "circulation",
    "largest_size",
    "streamfunction",
    "sverdrup_streamfunction",
    "western_boundary_currents",
]

Array = NDArray[np.float64]

# A western boundary current is looked for in this western part of the basin's width.
_BOUNDARY_FRACTION = 0.25


def streamfunction(transport_y: Array, dx: Array) -> Array:
    """Streamfunction at corners, (ny+1, nx+1), m3 s-1, zero on the eastern wall.

    transport_y  northward transport per unit width, all layers together, on y faces (ny+1, nx), m2 s-1
    dx           widths of the columns, (nx,), m
    """
    return _minus_integral_to_east(transport_y * dx)


def sverdrup_streamfunction(
    wind_stress_x: Array,
    wind_stress_y: Array,
    geometry: Geometry,
    beta: float,
    reference_density: float,
) -> Array:
    """Streamfunction of the Sverdrup transport, (ny-1, nx+1), m3 s-1, at corners between the zonal walls.

    wind_stress_x      on x faces (ny, nx+1), N m-2
    wind_stress_y      on y faces (ny+1, nx), N m-2
    beta               northward gradient of the Coriolis parameter, m-1 s-1, not zero
    reference_density  kg m-3

    The meridional transport is curl(stress)/(density beta) (Sverdrup 1947, PNAS 33, 318-326). On the zonal
    walls themselves the curl is not known. Beyond the outermost centres the meridional stress is taken as
    constant.
    """
    dx = geometry.dx
    between_faces = 0.5 * (wind_stress_x[:, 1:] + wind_stress_x[:, :-1]) * dx
    stress_east_of = -_minus_integral_to_east(between_faces)
    dy_between_centres = np.diff(geometry.y)[:, None]
    d_dy = np.diff(stress_east_of, axis=0) / dy_between_centres

    inner = wind_stress_y[1:-1]
    stress_y_at_corners = np.empty((inner.shape[0], inner.shape[1] + 1))
    stress_y_at_corners[:, 1:-1] = 0.5 * (inner[:, 1:] + inner[:, :-1])
    stress_y_at_corners[:, 0] = inner[:, 0]
    stress_y_at_corners[:, -1] = inner[:, -1]

    curl_east_of = stress_y_at_corners[:, -1:] - stress_y_at_corners - d_dy
    return -curl_east_of / (reference_density * beta)


def western_boundary_currents(transport_y: Array, geometry: Geometry) -> Array:
    """Transport of the western boundary current across each latitude, (ny+1,), m3 s-1, positive northward.

    The current reaches from the western wall to where the flow first turns round, at most a quarter of the
    basin's width. transport_y: all layers together, on y faces (ny+1, nx), m2 s-1.
    """
    columns = geometry.x <= geometry.x_face[0] + _BOUNDARY_FRACTION * geometry.width
    columns[0] = True
    near_wall = transport_y[:, columns]
    with_wall = np.logical_and.accumulate(np.sign(near_wall) == np.sign(near_wall[:, :1]), axis=1)
    current: Array = (near_wall * with_wall) @ geometry.dx[columns]
    return current


def largest_size(field: Array) -> float:
    """Largest absolute value of a field; 0 for an empty one."""
    return float(np.abs(field).max(initial=0.0))


def beta_of(coriolis: Array, y: Array) -> float:
    """Northward gradient of the Coriolis parameter, m-1 s-1; 0 where one row cannot tell it.

    coriolis  at cell centres, (ny,), s-1
    y         cell centres, (ny,), m
    """
    return float((coriolis[-1] - coriolis[0]) / (y[-1] - y[0])) if y.size > 1 else 0.0


def circulation(dataset: xr.Dataset, reference: Reference) -> xr.Dataset:
    """Sverdrup, gyre and western boundary transports, the largest size of each in the basin, m3 s-1, 0-d.

    All are NaN in a channel, which has no eastern wall to integrate from; the Sverdrup transport also on an
    f-plane. Raises UnreadableResult if a variable is missing or not finite.
    """
    geometry = Geometry.of(dataset)
    transport = array_of(dataset, "transport_y").sum(axis=0)
    beta = beta_of(array_of(dataset, "coriolis"), geometry.y)
    walls = reference.zonal_boundary == "walls"
    sverdrup = float("nan")
    if walls and beta != 0.0:
        wanted = sverdrup_streamfunction(
            array_of(dataset, "wind_stress_x"),
            array_of(dataset, "wind_stress_y"),
            geometry,
            beta,
            reference.reference_density_kg_per_m3,
        )
        sverdrup = largest_size(wanted)
    gyre = largest_size(streamfunction(transport, geometry.dx)) if walls else float("nan")
    boundary = largest_size(western_boundary_currents(transport, geometry)) if walls else float("nan")
    return scalars(
        {
            "sverdrup_transport": sverdrup,
            "gyre_transport": gyre,
            "western_boundary_transport": boundary,
        }
    )


def _minus_integral_to_east(per_column: Array) -> Array:
    """Minus the sum over the columns east of each x face: (n, nx) to (n, nx+1), zero at the eastern wall."""
    total = np.zeros((per_column.shape[0], per_column.shape[1] + 1))
    total[:, :-1] = -np.cumsum(per_column[:, ::-1], axis=1)[:, ::-1]
    return total
