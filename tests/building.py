"""Small oceans for tests: a closed box in which nothing happens until a test switches something on."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from oceanbox.budgets import Closure, closure
from oceanbox.config import Config, loads
from oceanbox.experiment.assembly import assemble_setup
from oceanbox.experiment.model import Model
from oceanbox.physics.state import Constants
from oceanbox.stepping.runge_kutta import STRONG_3, Tableau

Array = NDArray[np.float64]

# Linear equation of state with alpha = 2e-4 K-1 and g = 10 m s-2: 1 K makes 2e-3 m s-2.
REDUCED_GRAVITY_PER_K = 2e-3
ABYSS_DEGC = 5.0

QUIET_BOX = """
name: box
basin: {width_km: 1000.0, south_km: -400.0, north_km: 400.0, cells_x: 20, cells_y: 16, beta_per_m_s: 2.28e-11}
water:
  equation_of_state: linear
  abyss_temperature_degC: 5.0
  thermal_expansion_per_K: 2.0e-4
  reference_density_kg_per_m3: 1025.0
  gravity_m_per_s2: 10.0
layers: [{initial_thickness_m: 150.0, initial_temperature_degC: 25.0, initial_salinity_g_per_kg: 35.0}]
motion: {viscosity_m2_per_s: 0.0, drag_per_day: 0.0}
mixing: {lateral_diffusivity_m2_per_s: 0.0}
entrainment: {upwelling: null, diffusive: null, shoaling: null, prescribed: null}
transformation: null
outcrop: null
surface:
  heat: {restoring: null, prescribed_W_per_m2: null, loss_band: null}
  fresh_water: null
  wind: {zonal_stress_N_per_m2: 0.0, meridional_stress_N_per_m2: 0.0}
"""


def box_config(changes: dict[str, Any] | None = None) -> Config:
    """The quiet box with dotted keys changed."""
    config = loads(QUIET_BOX)
    return config.with_changes(changes) if changes else config


def temperature_for(reduced_gravity: float) -> float:
    """The temperature [degC] that gives the quiet box's water a reduced gravity [m s-2]."""
    return ABYSS_DEGC + reduced_gravity / REDUCED_GRAVITY_PER_K


def box(changes: dict[str, Any] | None = None, tableau: Tableau = STRONG_3) -> Model:
    """A model of the quiet box with dotted keys changed; no consistency rules are applied."""
    return Model(assemble_setup(box_config(changes)), tableau)


def replace_constants(model: Model, **changes: Any) -> None:
    """Change numbers a configuration cannot reach, such as ``centred_tracers``."""
    model.constants = Constants(**(model.constants._asdict() | changes))


def set_state(
    model: Model,
    thickness: Array | None = None,
    theta: Array | None = None,
    sigma: Array | None = None,
    velocity_x: Array | None = None,
    velocity_y: Array | None = None,
) -> None:
    """Put interior fields into a model, ghost cells filled as walls ask, and open its books.

    thickness (L, ny, nx) m; theta = T - T_a, sigma = S - S_a likewise; velocity_x (L, ny, nx+1), velocity_y (L, ny+1, nx),
    zero on walls.  What is None stays.
    """
    grid, state = model.grid, model.state
    h = model.thickness if thickness is None else thickness
    warm = model.theta if theta is None else theta
    salty = grid.centres(state.salt) / model.thickness if sigma is None else sigma
    state.thickness[...] = grid.embed_centres(h)
    state.heat[...] = grid.embed_centres(h * warm)
    state.salt[...] = grid.embed_centres(h * salty)
    if velocity_x is not None:
        state.velocity_x[...] = grid.embed_x_faces(velocity_x)
    if velocity_y is not None:
        state.velocity_y[...] = grid.embed_y_faces(velocity_y)
    fill_velocity_edges(model)
    model.open_books()


def fill_velocity_edges(model: Model) -> None:
    """Ghost cells of the velocities."""
    from oceanbox.stepping.forward_backward import fill_velocity_edges

    for u, v in zip(model.state.velocity_x, model.state.velocity_y, strict=True):
        fill_velocity_edges(2, u.shape[0] - 2, u, v, model.constants)


def run_days(model: Model, days: float) -> None:
    """Step to the step nearest to ``days`` from now."""
    model.advance(round(days * 86400.0 / model.clock.dt))


def books(model: Model) -> dict[str, Closure]:
    """How well the budgets since the books were opened close."""
    return closure(model.grid, model.ledger, model.opening, model.state)
