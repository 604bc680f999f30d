"""How much heat passes the surface, and how much warm water is made and destroyed.

Regions are those of `budgets_by_region`; the imbalances are those by which an equilibrium is judged.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from numpy.typing import NDArray

from oceanbox.diagnostics.budgets_by_region import SUBTROPICS_TO_DEG, TROPICS_TO_DEG
from oceanbox.diagnostics.geometry import Geometry
from oceanbox.diagnostics.labelled import array_of, scalars
from oceanbox.diagnostics.transports import ENTRAINMENT_TERMS

if TYPE_CHECKING:
    import xarray as xr

__all__ = ["HeatExchange", "heat_exchange", "heat_exchange_of", "relative_imbalance", "volume_exchange_of"]

Array = NDArray[np.float64]


class HeatExchange(NamedTuple):
    """Integrals of the surface heat flux, W; losses are positive.

    `imbalance` is |gain - loss + outcrop| / (gain + loss): what the outcrop hands to the abyss is heat lost too.
    """

    tropical_gain: float
    gain: float
    loss: float
    high_latitude_loss: float
    imbalance: float


def relative_imbalance(difference: float, size: float) -> float:
    """|difference| / size; NaN where the size is zero and there is nothing to be out of balance."""
    return abs(difference) / size if size > 0.0 else float("nan")


def heat_exchange(surface_heat_flux: Array, outcrop_heat: Array, cell_area: Array, geometry: Geometry) -> HeatExchange:
    """Integrals of a surface heat flux and of the outcrop's (never positive), (ny, nx), W m-2. Trusts its input."""
    flux = surface_heat_flux * cell_area
    gain = float(np.maximum(flux, 0.0).sum())
    loss_by_row = np.maximum(-flux, 0.0).sum(axis=1)
    loss = float(loss_by_row.sum())
    high = 1.0 - geometry.rows_between(-SUBTROPICS_TO_DEG, SUBTROPICS_TO_DEG)
    return HeatExchange(
        tropical_gain=float(geometry.rows_between(-TROPICS_TO_DEG, TROPICS_TO_DEG) @ flux.sum(axis=1)),
        gain=gain,
        loss=loss,
        high_latitude_loss=float(high @ loss_by_row),
        imbalance=relative_imbalance(gain - loss + float((outcrop_heat * cell_area).sum()), gain + loss),
    )


def heat_exchange_of(dataset: xr.Dataset) -> xr.Dataset:
    """Tropical gain, total gain and loss, high-latitude loss, all W, and the heat imbalance; 0-d variables.

    The tropical gain is net. The imbalance is NaN where no heat passes the surface. Raises UnreadableResult
    if a variable is missing or not finite.
    """
    flux, outcrop = array_of(dataset, "surface_heat_flux"), array_of(dataset, "outcrop_heat")
    found = heat_exchange(flux, outcrop, array_of(dataset, "cell_area"), Geometry.of(dataset))
    return scalars(
        {
            "tropical_heat_gain": found.tropical_gain,
            "total_heat_gain": found.gain,
            "total_heat_loss": found.loss,
            "applied_high_latitude_loss": found.high_latitude_loss,
            "heat_imbalance": found.imbalance,
        }
    )


def volume_exchange_of(dataset: xr.Dataset) -> xr.Dataset:
    """Warm water made, destroyed and handed over, m3 s-1, and their imbalance; 0-d variables.

    Made by each closure and in all. What the outcrop hands to the abyss counts among the losses. The imbalance is NaN where
    no water is made. Raises UnreadableResult if a variable is missing or not finite.
    """
    area = array_of(dataset, "cell_area")
    made = {f"{term}_total": float((array_of(dataset, term) * area).sum()) for term in ENTRAINMENT_TERMS}
    total = sum(made.values())
    destroyed = -float((array_of(dataset, "transformation") * area).sum())
    handed_over = -float((array_of(dataset, "outcrop_volume") * area).sum())
    return scalars(
        made
        | {
            "outcrop_total": handed_over,
            "entrainment_total": total,
            "transformation_total": destroyed,
            "exchange_imbalance": relative_imbalance(total - destroyed - handed_over, total),
        }
    )
