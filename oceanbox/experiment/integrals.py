"""Basin integrals of a stretch of a run, from the ledger: for the time series and for the judgement of equilibrium."""

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from oceanbox.budgets.rates import BUDGETS, budget_maps
from oceanbox.budgets.units import Water
from oceanbox.diagnostics.exchange import heat_exchange
from oceanbox.diagnostics.geometry import Geometry
from oceanbox.equilibrium import WindowMeans
from oceanbox.experiment.model import Model
from oceanbox.physics.state import Ledger

__all__ = ["Exchanged", "added_contents", "contents", "exchange_series", "exchanged", "kinetic_energy", "window_means"]

Array = NDArray[np.float64]


def contents(model: Model) -> dict[str, float]:
    """Volume [m3], heat content [J], salt content [kg] of the warm water and its kinetic energy [J], now."""
    grid, water = model.grid, model.setup.water
    return {
        "warm_water_volume": float(model.thickness.sum()) * grid.cell_area,
        "heat_content": float(grid.centres(model.state.heat).sum()) * grid.cell_area * water.heat,
        "salt_content": float(grid.centres(model.state.salt).sum()) * grid.cell_area * water.salt,
        "kinetic_energy": kinetic_energy(model),
    }


def added_contents(model: Model) -> Array:
    """What came into the basin since the books were opened without being in them: volume, heat and salt, (3,), in m, K m and
    g kg-1 m summed over the cells.  Round-off, unless steps were hastened."""
    maps = budget_maps(model.grid, model.ledger, model.opening, model.state, 1.0, Water(1.0, 1.0))
    unit = np.array([1.0, 1.0, Water(1.0, 1.0).salt])
    return np.array([float(maps[residual].sum()) for _, _, residual in BUDGETS.values()]) / unit


def kinetic_energy(model: Model) -> float:
    """rho0 Int h (u^2 + v^2)/2 dA, J, the squares averaged from faces to centres."""
    u2, v2 = model.velocity_x**2, model.velocity_y**2
    mean = 0.5 * (u2[..., 1:] + u2[..., :-1] + v2[..., 1:, :] + v2[..., :-1, :])
    return float((0.5 * model.thickness * mean).sum()) * model.grid.cell_area * model.setup.water.density


def heating_map(model: Model, amounts: "Exchanged | Ledger", seconds: float) -> Array:
    """Mean surface heat flux of the stretch, (ny, nx), W m-2."""
    total = amounts.heat_prescribed + amounts.heat_restoring
    return model.grid.centres(total) * (model.setup.water.heat / seconds)


def _volume_flux(model: Model, entry: Array, seconds: float) -> float:
    return float(model.grid.centres(entry).sum()) * model.grid.cell_area / seconds


def entrainment(model: Model, amounts: "Exchanged | Ledger", seconds: float) -> float:
    """W_e by all closures, m3 s-1."""
    total = amounts.entrainment_upwelling + amounts.entrainment_diffusive
    return _volume_flux(model, total + amounts.entrainment_shoaling + amounts.entrainment_prescribed, seconds)


class Exchanged(NamedTuple):
    """The part of a ledger that the time series need, each (ny+4, nx+4)."""

    entrainment_upwelling: Array
    entrainment_diffusive: Array
    entrainment_shoaling: Array
    entrainment_prescribed: Array
    transformation: Array
    outcrop_volume: Array
    heat_prescribed: Array
    heat_restoring: Array
    outcrop_heat: Array


def exchanged(ledger: Ledger) -> Exchanged:
    """The present entries of the ledger, not copies."""
    return Exchanged(*(getattr(ledger, name) for name in Exchanged._fields))


def exchange_series(model: Model, geometry: Geometry, amounts: Exchanged, seconds: float) -> dict[str, float]:
    """Heat and volume exchange of the stretch which ``amounts`` books: the scalars of the time series."""
    grid = model.grid
    outcrop = grid.centres(amounts.outcrop_heat) * (model.setup.water.heat / seconds)
    area = np.full((grid.ny, grid.nx), grid.cell_area)
    heat = heat_exchange(heating_map(model, amounts, seconds), outcrop, area, geometry)
    return {
        "tropical_heat_gain": heat.tropical_gain,
        "total_heat_gain": heat.gain,
        "total_heat_loss": heat.loss,
        "applied_high_latitude_loss": heat.high_latitude_loss,
        "heat_imbalance": heat.imbalance,
        "entrainment_total": entrainment(model, amounts, seconds),
        "transformation_total": -_volume_flux(model, amounts.transformation, seconds),
        "outcrop_total": -_volume_flux(model, amounts.outcrop_volume, seconds),
    }


def window_means(model: Model, seconds: float, volume: float, heat_content: float) -> WindowMeans:
    """What the judgement needs of the window just ended: its mean contents and what its ledger booked."""
    grid = model.grid
    heating = heating_map(model, model.ledger, seconds)
    outcrop = grid.centres(model.ledger.outcrop_heat) * (model.setup.water.heat / seconds)
    lost = model.ledger.transformation + model.ledger.outcrop_volume
    return WindowMeans(
        volume=volume,
        heat_content=heat_content,
        net_heating=float((heating + outcrop).sum()) * grid.cell_area,
        absolute_heating=float(np.abs(heating).sum()) * grid.cell_area,
        entrainment=entrainment(model, model.ledger, seconds),
        destruction=-_volume_flux(model, lost, seconds),
    )
