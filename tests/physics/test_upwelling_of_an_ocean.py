"""Upwelling through the base of the mixed layer, from the model's own currents and the referee's Ekman shear.

The shear solves r u_s - f v_s = tau_x/(rho0 H_m), r v_s + f u_s = tau_y/(rho0 H_m) (Zebiak and Cane 1987, Mon. Wea. Rev. 115,
2262): as one complex number (tau_x + i tau_y)/(rho0 H_m (r + i f)). What wells up is the divergence of the mixed layer's
transport M = H u + (H - H^2/h) u_s, H = min(H_m, h), with h and the shear at the faces.
"""

from __future__ import annotations

import numpy as np
import pytest
from numpy.typing import NDArray

from oceanbox.experiment.model import Model
from tests.building import box, set_state
from tests.physics.busy_ocean import EPS

Array = NDArray[np.float64]
DAY = 86400.0
MIXED_DEPTH, HALF_THICKNESS, DAMPING = 40.0, 30.0, 0.5 / DAY
STRESS_X, STRESS_Y = -0.06, 0.02

WINDY = {
    "entrainment.upwelling.mixed_layer_depth_m": MIXED_DEPTH,
    "entrainment.upwelling.thermocline_half_thickness_m": HALF_THICKNESS,
    "entrainment.upwelling.shear_damping_per_day": DAMPING * DAY,
    "surface.wind.zonal_stress_N_per_m2": STRESS_X,
    "surface.wind.meridional_stress_N_per_m2": STRESS_Y,
    "numerics.exchange_interval_days": 0.0,
    "numerics.step_s": 3600.0,
}


def shear(f: Array) -> tuple[Array, Array]:
    """u_s and v_s [m s-1] where the Coriolis parameter is f."""
    both = complex(STRESS_X, STRESS_Y) / (1025.0 * MIXED_DEPTH * (DAMPING + 1j * f))
    return both.real, both.imag


def mixed_transport(depth: Array, current: Array, ekman: Array) -> Array:
    inside = np.minimum(MIXED_DEPTH, depth)
    return inside * current + (inside - inside**2 / depth) * ekman


def welling_up(model: Model, h: Array, u: Array, v: Array) -> Array:
    """div M [m s-1] at centres of a closed basin, from thickness at centres and currents on faces."""
    grid = model.grid
    along_x = mixed_transport(0.5 * (h[:, 1:] + h[:, :-1]), u[:, 1:-1], shear(grid.coriolis(grid.y))[0][:, None])
    along_y = mixed_transport(0.5 * (h[1:] + h[:-1]), v[1:-1], shear(grid.coriolis(grid.y_face[1:-1]))[1][:, None])
    along_x, along_y = np.pad(along_x, ((0, 0), (1, 1))), np.pad(along_y, ((1, 1), (0, 0)))
    return np.diff(along_x, axis=1) / grid.dx + np.diff(along_y, axis=0) / grid.dy


def expected_gain(h: Array, up: Array, dt: float) -> Array:
    """The logarithmic law where h > H_m, all that wells up where h is less."""
    lifted = np.maximum(up, 0.0) * dt
    deep = HALF_THICKNESS * np.log1p(np.exp(-(h - MIXED_DEPTH) / HALF_THICKNESS) * lifted / HALF_THICKNESS)
    return np.where(h > MIXED_DEPTH, deep, lifted)


@pytest.mark.parametrize("moving", [False, True], ids=["at rest", "moving"])
def test_an_ocean_entrains_what_its_wind_and_currents_lift(moving: bool) -> None:
    """In every cell: at rest by the wind alone, in motion with the convergence of random currents below it.

    The divergence is a difference of products that nearly cancel: its rounding is that of M dt/dx, a few eps of it.
    """
    model = box(WINDY)
    grid, rng = model.grid, np.random.default_rng(7)
    h = rng.uniform(45.0, 160.0, (1, grid.ny, grid.nx)) if moving else model.thickness
    u, v = np.zeros((1, grid.ny, grid.nx + 1)), np.zeros((1, grid.ny + 1, grid.nx))
    if moving:
        u[..., 1:-1] = rng.uniform(-0.3, 0.3, (1, grid.ny, grid.nx - 1))
        v[:, 1:-1] = rng.uniform(-0.3, 0.3, (1, grid.ny - 1, grid.nx))
    set_state(model, thickness=h, velocity_x=u, velocity_y=v)
    model.advance(1)
    gained = grid.centres(model.ledger.entrainment_upwelling)
    # Water has moved before it exchanges with the abyss.
    moved = model.thickness[0] - gained
    up = welling_up(model, moved, u[0], v[0])
    expected = expected_gain(moved, up, 3600.0)
    largest = MIXED_DEPTH * (np.abs(u).max() + np.abs(v).max() + np.abs(shear(grid.coriolis(grid.y))).max())
    allowed = 16.0 * EPS * (largest * 3600.0 * (1.0 / grid.dx + 1.0 / grid.dy) + 160.0)
    assert np.abs(gained - expected).max() <= allowed
    assert gained.max() > 1e8 * allowed
    assert (gained[up <= 0.0] == 0.0).all() and (up <= 0.0).any()


def test_what_wells_up_comes_down_elsewhere() -> None:
    """The mixed layer's transport ends at the walls: its divergence sums to zero over the basin; all downwelling is ignored."""
    model = box(WINDY)
    up = welling_up(model, model.thickness[0], model.velocity_x[0], model.velocity_y[0])
    assert abs(up.sum()) <= 1e-12 * np.abs(up).sum()
    model.advance(1)
    assert model.ledger.entrainment_upwelling.min() == 0.0
    assert model.thickness.mean() > 150.0


def test_trades_lift_water_on_the_equator_and_a_deeper_thermocline_exposes_less_of_it() -> None:
    """Ekman flow parts at the equator under easterlies; 30 m more thickness leave e^-1 of the share (common practice)."""
    gained = {}
    for depth in (120.0, 150.0):
        model = box(WINDY | {"layers.0.initial_thickness_m": depth, "surface.wind.meridional_stress_N_per_m2": 0.0})
        model.advance(1)
        middle = model.grid.centres(model.ledger.entrainment_upwelling)[:, model.grid.nx // 2]
        gained[depth] = middle[np.abs(model.grid.y).argmin()]
        assert gained[depth] == middle.max()
    # M = (H_m - H_m^2/h) u_s also depends a little on h; the logarithm bends by the share of l gained in a step.
    by_shear = (MIXED_DEPTH - MIXED_DEPTH**2 / 150.0) / (MIXED_DEPTH - MIXED_DEPTH**2 / 120.0)
    assert gained[150.0] / gained[120.0] == pytest.approx(np.exp(-1.0) * by_shear, rel=gained[120.0] / HALF_THICKNESS)
