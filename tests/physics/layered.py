r"""Oceans of one, two or three moving layers, their energy, and how fast the discrete equations change it.

Energy of N layers over a resting abyss, top first, m_i = h_i b_i:

    E = Int sum_i [ h_i |u_i|^2/2 + m_i h_i/2 + m_i sum_{j<i} h_j ] dA.

One layer: Ripa (1993), Geophys. Astrophys. Fluid Dyn. 70, 85 (from memory); several layers derived.  On the C-grid the kinetic
part is summed over faces, with the mean thickness of a face.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from oceanbox.experiment.assembly import assemble_setup
from oceanbox.experiment.model import Model
from oceanbox.grid import Grid
from oceanbox.physics.state import State, empty_ledger
from oceanbox.stepping.memory import empty_workspace
from oceanbox.stepping.runge_kutta import STRONG_3, Tableau, tendency
from tests.building import box_config, replace_constants, set_state

Array = NDArray[np.float64]
Draw = Callable[[tuple[int, ...]], Array]

# 31.25 km by 25 km: nothing that swaps x and y passes.
QUIET = {
    "basin.width_km": 1000.0,
    "basin.south_km": 0.0,
    "basin.north_km": 800.0,
    "basin.cells_x": 32,
    "basin.cells_y": 32,
    "basin.coriolis_at_origin_per_s": 5e-5,
    # Salt anomalies are carried along only where the salinity may differ from the abyss's, 35.
    "layers": [{"initial_thickness_m": 100.0, "initial_temperature_degC": 20.0, "initial_salinity_g_per_kg": 35.5}],
}


class Fields(NamedTuple):
    """Interior fields of all layers: h, T - T_a, S - S_a (L, ny, nx), u (L, ny, nx+1), v (L, ny+1, nx), zero on walls."""

    thickness: Array
    theta: Array
    sigma: Array
    velocity_x: Array
    velocity_y: Array


def layered_box(layers: int, changes: dict[str, Any] | None = None, tableau: Tableau = STRONG_3) -> Model:
    """A quiet box with ``layers`` equal moving layers and centred tracers; nothing forces or brakes it."""
    setup = assemble_setup(box_config(QUIET | (changes or {})))
    model = Model(
        replace(setup, initial=State(*(np.repeat(field, layers, axis=0) for field in setup.initial))), tableau
    )
    replace_constants(model, centred_tracers=True)
    return model


def fill(model: Model, fields: Fields) -> None:
    """Put ``fields`` into a model."""
    set_state(model, *fields)


def roughly(rng: np.random.Generator) -> Draw:
    """Noise that differs from cell to cell, between -1 and 1."""
    return lambda shape: rng.uniform(-1.0, 1.0, shape)


def smoothly(rng: np.random.Generator) -> Draw:
    """A few long waves with random phases, between -1 and 1."""

    def draw(shape: tuple[int, ...]) -> Array:
        y, x = (np.linspace(0.0, 2.0 * np.pi, n) for n in shape[-2:])
        field = np.zeros(shape)
        for layer in field:
            for k, n in ((1, 0), (0, 1), (1, 1), (2, 1), (1, 2)):
                layer += 0.2 * np.cos(k * x + n * y[:, np.newaxis] + rng.uniform(0.0, 2.0 * np.pi))
        return field

    return draw


def random_fields(grid: Grid, layers: int, draw: Draw, speed: float = 0.5) -> Fields:
    """Layers 60 to 140 m thick, Theta 5 to 15 K below 15 to 25 K, Sigma up to 1 g kg-1, currents up to ``speed`` m s-1."""
    thickness = 100.0 + 40.0 * draw((layers, grid.ny, grid.nx))
    warmth = 10.0 + 10.0 * np.arange(layers)[::-1].reshape(-1, 1, 1)
    theta = warmth + 5.0 * draw((layers, grid.ny, grid.nx))
    u = speed * draw((layers, grid.ny, grid.nx + 1))
    v = speed * draw((layers, grid.ny + 1, grid.nx))
    v[:, [0, -1]] = 0.0
    if grid.periodic_x:
        u[:, :, -1] = u[:, :, 0]
    else:
        u[:, :, [0, -1]] = 0.0
    return Fields(thickness, theta, draw(thickness.shape), u, v)


def buoyancy_content(model: Model) -> Array:
    """m = h b at interior centres, (L, ny, nx), m2 s-2; linear equation of state."""
    return buoyancy_of(model, model.grid.centres(model.state.heat), model.grid.centres(model.state.salt))


def buoyancy_of(model: Model, heat: Array, salt: Array) -> Array:
    """g (alpha heat - beta_S salt), of contents or of their rates."""
    c = model.constants
    assert c.expansion_slope == 0.0
    return c.gravity * (c.expansion_abyss * heat - c.contraction * salt)


def counted(grid: Grid, field: Array) -> Array:
    """A field on x faces without the second copy of the face that a periodic channel has."""
    return field[..., :-1] if grid.periodic_x else field


def energy(model: Model) -> float:
    """E per area of a cell, m5 s-2 / m2."""
    grid, h, m = model.grid, model.thickness, buoyancy_content(model)
    hx, hy = grid.average_centres_to_x_faces(h), grid.average_centres_to_y_faces(h)
    above = np.cumsum(h, axis=0) - h
    kinetic = counted(grid, 0.5 * hx * model.velocity_x**2).sum() + (0.5 * hy * model.velocity_y**2).sum()
    return float(kinetic + (m * (0.5 * h + above)).sum())


def rates(model: Model) -> Fields:
    """d/dt of h, h Theta, h Sigma, u, v at interior points, in that order; without column exchange or any limiter."""
    grid, layers = model.grid, model.state.thickness.shape[0]
    out = [np.zeros((layers, *grid.shape)) for _ in range(5)]
    ledger, work = empty_ledger(grid, layers), empty_workspace(grid, layers, grid.shape[0])
    tendency(model.state, model.setup.forcing, model.constants, 0.0, 0.0, 0.0, ledger, work, *out)
    dh, dheat, dsalt, du, dv = out
    return Fields(grid.centres(dh), grid.centres(dheat), grid.centres(dsalt), grid.x_faces(du), grid.y_faces(dv))


def energy_tendency(model: Model) -> tuple[float, float]:
    """dE/dt by the chain rule, and the sum of the absolute values of its terms, per area of a cell."""
    grid, h, m, rate = model.grid, model.thickness, buoyancy_content(model), rates(model)
    u, v = model.velocity_x, model.velocity_y
    hx, hy = grid.average_centres_to_x_faces(h), grid.average_centres_to_y_faces(h)
    K = 0.25 * (u[..., 1:] ** 2 + u[..., :-1] ** 2 + v[:, 1:] ** 2 + v[:, :-1] ** 2)
    dm = buoyancy_of(model, rate.theta, rate.sigma)
    above = np.cumsum(h, axis=0) - h
    below = m.sum(axis=0) - np.cumsum(m, axis=0)
    terms = (
        counted(grid, hx * u * rate.velocity_x),
        hy * v * rate.velocity_y,
        K * rate.thickness,
        (0.5 * m + below) * rate.thickness,
        (0.5 * h + above) * dm,
    )
    return float(sum(term.sum() for term in terms)), float(sum(np.abs(term).sum() for term in terms))
