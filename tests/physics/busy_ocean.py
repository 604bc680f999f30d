"""A small ocean in which everything is switched on and happens at once, and how exactly its books must close."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from oceanbox.budgets import Water, budget_maps, face_fluxes
from oceanbox.budgets.rates import BUDGETS
from oceanbox.config import Config, loads
from oceanbox.experiment.assembly import assemble_setup
from oceanbox.experiment.model import Model
from oceanbox.physics.state import State

Array = NDArray[np.float64]
EPS = float(np.finfo(float).eps)
UNITY = Water(density=1.0, heat_capacity=1.0)

# Polar water below the abyss's temperature outcrops, the thin west shoals, rain and wind act everywhere.
BUSY = """
name: busy
basin: {width_km: 1600.0, south_km: -4000.0, north_km: 5000.0, cells_x: 16, cells_y: 45}
layers:
  - initial_thickness_m: {sum: [90.0, {shape: gaussian, peak: -60.0, centre_deg: -20.0, width_deg: 6.0}]}
    initial_temperature_degC: {shape: tropics_to_pole, tropical: 27.0, polar: 3.0, flat_to_deg: 5.0, pole_deg: 40.0}
    initial_salinity_g_per_kg: {shape: linear, value_at_origin: 35.5, slope_per_deg: 0.02}
motion: {viscosity_m2_per_s: 5.0e4, drag_per_day: 0.02, sponge: {sides: [east], width_km: 300.0, rate_per_day: 0.3}}
mixing: {lateral_diffusivity_m2_per_s: 2000.0}
entrainment:
  upwelling: {mixed_layer_depth_m: 40.0}
  diffusive: {diffusivity_m2_per_s: 1.0e-4}
  shoaling: {minimum_thickness_m: 50.0, time_days: 0.5}
  prescribed: {velocity_m_per_day: {shape: band, peak: 0.5, from_deg: 5.0, to_deg: 15.0, hemispheres: north}}
transformation: {efficiency: {kind: cooling, scale_K: 8.0}, floor_thickness_m: 40.0}
outcrop: {margin_K: 1.5, time_days: 5.0}
surface:
  heat:
    restoring:
      target_temperature_degC: {shape: tropics_to_pole, tropical: 29.0, polar: -2.0}
    prescribed_W_per_m2: {shape: linear, value_at_origin: 10.0, slope_per_deg: -1.0}
    loss_band: {from_deg: 25.0, to_deg: 40.0, peak_W_per_m2: 120.0}
  fresh_water:
    precipitation_minus_evaporation_m_per_year: {shape: band, peak: 4.0, from_deg: 30.0, to_deg: 44.0}
    balance: band
  wind:
    zonal_stress_N_per_m2: {sum: [{shape: gaussian, peak: -0.08, width_deg: 15.0}, 0.02]}
    meridional_stress_N_per_m2: {shape: linear, value_at_origin: 0.02, slope_per_deg: 0.001}
    ramp_days: 0.5
numerics: {step_s: 5400.0}
"""


def busy_config(changes: dict[str, Any] | None = None) -> Config:
    """The busy ocean with dotted keys changed."""
    config = loads(BUSY)
    return config.with_changes(changes) if changes else config


def busy_ocean(changes: dict[str, Any] | None = None) -> Model:
    """A model of the busy ocean; no consistency rules are applied."""
    return Model(assemble_setup(busy_config(changes)))


def round_off(model: Model, budget: str, steps: int) -> tuple[Array, Array]:
    """|residual| of a budget in each cell over what the ledger covers, and its bound from round-off, (ny, nx) each.

    A step adds at most seven amounts to a content (three stages, mixing, surface, transformation, outcrop) and to the
    ledger, each time rounding a sum of the size of the content or of the terms by eps/2; the amounts themselves are
    products of a few rounded numbers. Together at most 8 eps (content + sum of absolute terms) in each step.
    """
    maps = budget_maps(model.grid, model.ledger, model.opening, model.state, 1.0, UNITY)
    terms, storage, residual = BUDGETS[budget]
    before, after = (np.abs(model.grid.centres(content(state, budget))[0]) for state in (model.opening, model.state))
    absolute = sum(np.abs(maps[name]) for name in (*terms, storage)) + through_faces(model, budget)
    scale = {"volume": 1.0, "heat": UNITY.heat, "salt": UNITY.salt}[budget]
    allowed = 8.0 * EPS * steps * (scale * np.maximum(before, after) + absolute)
    return np.abs(maps[residual]), allowed


def content(state: State, budget: str) -> Array:
    """The field whose budget it is."""
    return {"volume": state.thickness, "heat": state.heat, "salt": state.salt}[budget]


def through_faces(model: Model, budget: str) -> Array:
    """Absolute amounts through the four faces of each cell, per area, (ny, nx), in the units of the budget's maps."""
    flux = face_fluxes(model.grid, model.ledger, 1.0, UNITY)
    grid, ledger = model.grid, model.ledger
    pairs = {
        "volume": [(flux["transport_x"][0], flux["transport_y"][0])],
        "heat": [(flux[f"heat_{kind}_x"], flux[f"heat_{kind}_y"]) for kind in ("transport", "diffusion")],
        "salt": [
            (UNITY.salt * grid.x_faces(x)[0], UNITY.salt * grid.y_faces(y)[0])
            for x, y in (
                (ledger.salt_advection_x, ledger.salt_advection_y),
                (ledger.salt_mixing_x, ledger.salt_mixing_y),
            )
        ],
    }[budget]
    total = np.zeros((grid.ny, grid.nx))
    for x, y in pairs:
        west_east, south_north = np.abs(x) / grid.dx, np.abs(y) / grid.dy
        total += west_east[:, 1:] + west_east[:, :-1] + south_north[1:] + south_north[:-1]
    return total
