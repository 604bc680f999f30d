"""A small basin on which fields are evaluated: nx differs from ny, the spacings differ, the origin is off centre."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from oceanbox.config.fields import FieldKind
from oceanbox.constants import EARTH_RADIUS_M
from oceanbox.forcing import evaluate

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Places:
    """Points on rows y and columns x [m] of a basin between two walls [m]."""

    y: Array
    x: Array
    walls: tuple[float, float]

    @property
    def latitude(self) -> Array:
        return np.degrees(self.y / EARTH_RADIUS_M)

    @property
    def longitude(self) -> Array:
        return np.degrees(self.x / EARTH_RADIUS_M)

    def map_of(self, field: float | FieldKind, unit: str = "1", key: str = "") -> Array:
        return evaluate(field, self.latitude, self.longitude, self.y, self.x, self.walls, unit, key)


def centres(nx: int = 12, ny: int = 30, south_km: float = -4000.0, north_km: float = 5000.0) -> Places:
    """Cell centres of a basin 3000 km wide."""
    dy = (north_km - south_km) / ny * 1.0e3
    y = south_km * 1.0e3 + dy * np.linspace(0.5, ny - 0.5, ny)
    return Places(y, 3.0e6 / nx * np.linspace(0.5, nx - 0.5, nx), (south_km * 1.0e3, north_km * 1.0e3))


def areas(places: Places) -> Array:
    """Uneven cell areas [m2], as on no grid here, so that a sum that forgets them is found out."""
    row = 1.0e9 * (1.0 + 0.3 * np.cos(np.radians(places.latitude)))
    return row[:, np.newaxis] * np.linspace(1.0, 1.5, places.x.size)
