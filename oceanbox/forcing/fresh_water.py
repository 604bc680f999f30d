"""Precipitation minus evaporation, balanced as the configuration says."""

from __future__ import annotations

import numpy as np

from oceanbox.config.fields import LatitudeBand
from oceanbox.config.surface import FreshWater
from oceanbox.constants import SECONDS_PER_YEAR
from oceanbox.errors import ConfigError, Fault
from oceanbox.forcing.fields import Array, bump, evaluate

KEY = "surface.fresh_water"


def fresh_water_flux(
    fresh_water: FreshWater,
    latitude: Array,
    longitude: Array,
    y: Array,
    x: Array,
    y_walls: tuple[float, float],
    cell_area: Array,
) -> Array:
    """Balanced precipitation minus evaporation at the cell centres, (ny, nx), m s-1; arguments as for `evaluate`."""
    name = "precipitation_minus_evaporation_m_per_year"
    field = fresh_water.precipitation_minus_evaporation_m_per_year
    per_year = evaluate(field, latitude, longitude, y, x, y_walls, "m year-1", f"{KEY}.{name}")
    return balanced(per_year / SECONDS_PER_YEAR, fresh_water, latitude, cell_area)


def balanced(flux: Array, fresh_water: FreshWater, latitude: Array, cell_area: Array) -> Array:
    """A fresh-water flux whose sum over the basin is zero to round-off, (ny, nx), m s-1.

    flux         before balancing      (ny, nx)  m s-1
    latitude     of the cell centres   (ny,)     degrees
    cell_area    of the cells          (ny, nx)  m2

    `refuse` returns the flux as it is and raises ConfigError where its net is more than the round-off of the sum;
    `uniform` subtracts the area mean; `band` spreads the compensation as a sin^2 bump over a band of both hemispheres.
    """
    if fresh_water.balance == "refuse":
        _refuse_net_flux(flux, cell_area)
        return flux
    if fresh_water.balance == "uniform":
        shape = np.ones_like(flux)
    else:
        shape = _compensation(fresh_water, latitude, flux.shape)
    return flux - shape * (float(np.sum(flux * cell_area)) / float(np.sum(shape * cell_area)))


def summation_round_off(flux: Array, cell_area: Array) -> float:
    """Bound on the error of summing flux times area over the cells, in the unit of their product.

    Each of n additions loses at most half a unit in the last place of the partial sum: n eps sum|flux area|
    (Higham 2002, Accuracy and Stability of Numerical Algorithms, section 4.2).
    """
    return flux.size * float(np.finfo(np.float64).eps) * float(np.sum(np.abs(flux) * cell_area))


def _refuse_net_flux(flux: Array, cell_area: Array) -> None:
    net = float(np.sum(flux * cell_area))
    if abs(net) <= summation_round_off(flux, cell_area):
        return
    mean = net / float(np.sum(cell_area)) * SECONDS_PER_YEAR
    raise ConfigError(
        [
            Fault(
                "",
                f"{KEY}.balance",
                f"refuse, with a net flux of {net:.4g} m3 s-1 ({mean:.4g} m/year averaged over the basin)",
                "a net flux of fresh water must be zero, or the salinity drifts for ever",
                "set balance to uniform or band, or add a field that makes the sum zero",
            )
        ]
    )


def _compensation(fresh_water: FreshWater, latitude: Array, shape: tuple[int, ...]) -> Array:
    """The bump that takes up the net flux, (ny, nx)."""
    first, last = fresh_water.balance_band_deg
    band = LatitudeBand(from_deg=first, to_deg=last, hemispheres="both")
    weights = bump(band, latitude)
    if not np.any(weights):
        got = f"[{first:g}, {last:g}], with no cell centre inside"
        rule = f"the band must reach into the basin, rows from {latitude[0]:.2f} to {latitude[-1]:.2f} degrees"
        raise ConfigError([Fault("", f"{KEY}.balance_band_deg", got, rule, "move or widen the band")])
    return np.broadcast_to(weights[:, np.newaxis], shape)
