"""The prescribed heat loss in a band of latitude."""

from __future__ import annotations

import numpy as np

from oceanbox.config.surface import LossBand
from oceanbox.constants import WATT_PER_PETAWATT
from oceanbox.errors import ConfigError, Fault
from oceanbox.forcing.fields import Array, bump


def loss_band_flux(band: LossBand, latitude: Array, cell_area: Array, key: str = "surface.heat.loss_band") -> Array:
    """Surface heat flux of the band, (ny, nx), W m-2, negative where the ocean loses heat.

    latitude     of the cell centres    (ny,)     degrees
    cell_area    of the cells           (ny, nx)  m2

    A bump of sin^2. With `total_PW` the bump is divided by its own sum over the cells, so that the total is met to
    round-off on every grid, however few rows the band has. Raises ConfigError where no cell lies in the band.
    """
    shape = np.broadcast_to(bump(band, latitude)[:, np.newaxis], cell_area.shape)
    area = float(np.sum(shape * cell_area))
    if area == 0.0:
        raise ConfigError([_empty(band, latitude, key)])
    if band.total_PW is not None:
        return -(band.total_PW * WATT_PER_PETAWATT / area) * shape
    if band.peak_W_per_m2 is None:
        raise ValueError("a loss band has a peak or a total; the configuration guarantees one")
    return -band.peak_W_per_m2 * shape


def _empty(band: LossBand, latitude: Array, key: str) -> Fault:
    return Fault(
        "",
        f"{key}.from_deg",
        f"{band.from_deg:g} to {band.to_deg:g} degrees ({band.hemispheres}), with no cell centre inside",
        f"the band must reach into the basin, whose rows lie between {latitude[0]:.2f} and {latitude[-1]:.2f} degrees",
        "move or widen the band, or use more cells in y",
    )
