"""Coordinates of the Arakawa C-grid on a Cartesian beta-plane.

Points of cell (j, i), j northward, i eastward::

    corner(j+1,i) -- v(j+1,i) -- corner(j+1,i+1)
        |                            |
     u(j,i)        centre(j,i)    u(j,i+1)
        |                            |
    corner(j,i) ---- v(j,i) ---- corner(j,i+1)

Compute arrays of every kind have one shape, ``(..., ny + 2*HALO, nx + 2*HALO)``: index (j, i) holds the centre, the west
face, the south face or the south-west corner of cell (j, i), so a kernel needs no offset tables.  Interior cells are
``HALO .. HALO + n - 1``; the eastern and northern walls are the face ``HALO + n``.  Two ghost cells suffice for the
five-point flux limiter.
"""

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from oceanbox.constants import EARTH_RADIUS_M

if TYPE_CHECKING:
    from oceanbox.config import Config

__all__ = ["HALO", "Grid", "build_grid", "to_degrees"]

HALO = 2
Array = NDArray[np.float64]


def to_degrees(distance: Array) -> Array:
    """Distance from the origin [m] as degrees of arc on the earth."""
    return np.degrees(distance / EARTH_RADIUS_M)


@dataclass(frozen=True)
class Grid:
    """A rectangular basin, ``nx`` by ``ny`` cells of ``dx`` by ``dy`` metres.

    ``y_south`` [m] is the southern wall measured from the origin of the beta-plane, x = 0 the western wall,
    f = ``coriolis_origin`` [s-1] + ``beta`` [m-1 s-1] * y.
    """

    nx: int
    ny: int
    dx: float
    dy: float
    y_south: float
    coriolis_origin: float
    beta: float
    periodic_x: bool
    no_slip: bool

    @property
    def x(self) -> Array:
        """Cell centres, eastward, (nx,), m."""
        return (np.arange(self.nx, dtype=np.float64) + 0.5) * self.dx

    @property
    def y(self) -> Array:
        """Cell centres, northward, (ny,), m."""
        return self.y_south + (np.arange(self.ny, dtype=np.float64) + 0.5) * self.dy

    @property
    def x_face(self) -> Array:
        """West and east faces, (nx+1,), m."""
        return np.arange(self.nx + 1, dtype=np.float64) * self.dx

    @property
    def y_face(self) -> Array:
        """South and north faces, (ny+1,), m."""
        return self.y_south + np.arange(self.ny + 1, dtype=np.float64) * self.dy

    @property
    def latitude(self) -> Array:
        """Latitude of the centres, y/a, (ny,), degrees."""
        return to_degrees(self.y)

    @property
    def longitude(self) -> Array:
        """Longitude of the centres east of the western wall, x/a, (nx,), degrees."""
        return to_degrees(self.x)

    @property
    def cell_area(self) -> float:
        """Area of one cell, m2."""
        return self.dx * self.dy

    @property
    def shape(self) -> tuple[int, int]:
        """Shape of a compute array, ghost cells included."""
        return self.ny + 2 * HALO, self.nx + 2 * HALO

    def coriolis(self, y: Array) -> Array:
        """f at distance ``y`` [m] from the origin of the beta-plane, s-1."""
        return self.coriolis_origin + self.beta * y

    def coriolis_at_corners(self) -> Array:
        """f on corner rows, ghost rows included, (ny + 2*HALO,), s-1."""
        rows = np.arange(self.ny + 2 * HALO, dtype=np.float64) - HALO
        return self.coriolis(self.y_south + rows * self.dy)

    # Moving between the plain arrays of files and forcing, and the compute arrays with ghost cells.
    def embed_centres(self, field: Array) -> Array:
        """A plain (..., ny, nx) field in a compute array, ghost cells repeating their neighbour (walls) or wrapped."""
        wide = np.empty((*field.shape[:-2], *self.shape))
        wide[..., HALO:-HALO, HALO:-HALO] = field
        if self.periodic_x:
            wide[..., :HALO] = wide[..., self.nx : self.nx + HALO]
            wide[..., self.nx + HALO :] = wide[..., HALO : 2 * HALO]
        else:
            wide[..., :HALO] = wide[..., HALO : HALO + 1]
            wide[..., self.nx + HALO :] = wide[..., self.nx + HALO - 1 : self.nx + HALO]
        wide[..., :HALO, :] = wide[..., HALO : HALO + 1, :]
        wide[..., self.ny + HALO :, :] = wide[..., self.ny + HALO - 1 : self.ny + HALO, :]
        return wide

    def embed_x_faces(self, field: Array) -> Array:
        """A plain (..., ny, nx+1) field on x faces in a compute array, zero in the ghost cells."""
        wide = np.zeros((*field.shape[:-2], *self.shape))
        wide[..., HALO:-HALO, HALO : HALO + self.nx + 1] = field
        return wide

    def embed_y_faces(self, field: Array) -> Array:
        """A plain (..., ny+1, nx) field on y faces in a compute array, zero in the ghost cells."""
        wide = np.zeros((*field.shape[:-2], *self.shape))
        wide[..., HALO : HALO + self.ny + 1, HALO:-HALO] = field
        return wide

    def centres(self, wide: Array) -> Array:
        """The (..., ny, nx) interior of a compute array at centres, a copy."""
        return wide[..., HALO:-HALO, HALO:-HALO].copy()

    def x_faces(self, wide: Array) -> Array:
        """The (..., ny, nx+1) west and east faces of a compute array, a copy."""
        return wide[..., HALO:-HALO, HALO : HALO + self.nx + 1].copy()

    def y_faces(self, wide: Array) -> Array:
        """The (..., ny+1, nx) south and north faces of a compute array, a copy."""
        return wide[..., HALO : HALO + self.ny + 1, HALO:-HALO].copy()

    def average_centres_to_x_faces(self, field: Array) -> Array:
        """Arithmetic mean of the two neighbours, (..., ny, nx) to (..., ny, nx+1); at a wall the one neighbour."""
        wide = self.embed_centres(field)
        mean = 0.5 * (wide + np.roll(wide, 1, axis=-1))
        return self.x_faces(mean)

    def average_centres_to_y_faces(self, field: Array) -> Array:
        """Arithmetic mean of the two neighbours, (..., ny, nx) to (..., ny+1, nx); at a wall the one neighbour."""
        wide = self.embed_centres(field)
        mean = 0.5 * (wide + np.roll(wide, 1, axis=-2))
        return self.y_faces(mean)


def build_grid(config: "Config") -> Grid:
    """The grid of the ``basin`` section of a configuration."""
    basin = config.basin
    return Grid(
        nx=basin.cells_x,
        ny=basin.cells_y,
        dx=1e3 * basin.width_km / basin.cells_x,
        dy=1e3 * (basin.north_km - basin.south_km) / basin.cells_y,
        y_south=1e3 * basin.south_km,
        coriolis_origin=basin.coriolis_at_origin_per_s,
        beta=basin.beta_per_m_s,
        periodic_x=basin.zonal_boundary == "periodic",
        no_slip=basin.side_walls == "no_slip",
    )
