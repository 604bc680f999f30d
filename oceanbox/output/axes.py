"""The coordinates of the interior cells, as files describe them."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from oceanbox import names
from oceanbox.constants import EARTH_RADIUS_M

Array = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class Axes:
    """Where the numbers of a file lie. Ghost cells have no place in a file.

    x, y             cell centres [m], (nx,) and (ny,), increasing
    x_face, y_face   cell faces [m], (nx+1,) and (ny+1,), each centre between its two faces
    cell_area        area of each cell [m2], (ny, nx)
    periodic_x       whether the last x face is the first one again
    layers           number of moving layers

    Raises ValueError if the sizes or the order do not fit together.
    """

    x: Array
    y: Array
    x_face: Array
    y_face: Array
    cell_area: Array
    periodic_x: bool
    layers: int = 1

    def __post_init__(self) -> None:
        for name, centres, faces in (("x", self.x, self.x_face), ("y", self.y, self.y_face)):
            _check_interleaved(name, np.asarray(centres), np.asarray(faces))
        expected = (len(self.y), len(self.x))
        if np.shape(self.cell_area) != expected:
            raise ValueError(f"cell_area: got shape {np.shape(self.cell_area)}; dims (y, x) need {expected}")
        if self.layers < 1:
            raise ValueError(f"layers: got {self.layers}; at least one layer is needed")

    @property
    def sizes(self) -> dict[str, int]:
        """Length of every dimension that does not depend on the length of a run."""
        return {
            "layer": self.layers,
            "y": len(self.y),
            "x": len(self.x),
            "y_face": len(self.y_face),
            "x_face": len(self.x_face),
            "region": len(names.REGIONS),
        }


def degrees(distance: Array) -> Array:
    """Distance along the earth's surface [m] as an angle [degrees]."""
    return np.degrees(np.asarray(distance, dtype=np.float64) / EARTH_RADIUS_M)


def _check_interleaved(name: str, centres: Array, faces: Array) -> None:
    if centres.ndim != 1 or faces.shape != (len(centres) + 1,):
        raise ValueError(
            f"{name}, {name}_face: got shapes {centres.shape} and {faces.shape}; "
            "n centres lie between n + 1 faces; leave ghost cells out"
        )
    if not ((faces[:-1] < centres).all() and (centres < faces[1:]).all()):
        raise ValueError(f"{name}: got centres that do not lie between their faces; both must increase, in m")
