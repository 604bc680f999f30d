"""Water lifted through the base of the mixed layer, against the model's own step and against what Ekman shear does."""

from __future__ import annotations

import numpy as np
import pytest
import xarray as xr
from numpy.typing import NDArray

from oceanbox import names
from oceanbox.diagnostics.labelled import array_of
from oceanbox.diagnostics.reference import CONFIG_ATTRIBUTE
from oceanbox.diagnostics.upwelling import MixedLayer, ekman_shear, lifted_water, mixed_layer_transport
from oceanbox.errors import UnreadableResult
from tests.building import box, set_state
from tests.synthetic import CONFIG

Array = NDArray[np.float64]
EPS = float(np.finfo(float).eps)
DEPTH, LENGTH, DAMPING_PER_DAY = 40.0, 30.0, 0.5
STRESS_X, STRESS_Y = -0.06, 0.02
STEP = 3600.0
CLOSURE = f"""
entrainment:
  upwelling: {{mixed_layer_depth_m: {DEPTH}, thermocline_half_thickness_m: {LENGTH}, shear_damping_per_day: {DAMPING_PER_DAY}}}
"""


def result(h: Array, u: Array, v: Array, dx: float, dy: float, f: Array, config: str = CONFIG + CLOSURE) -> xr.Dataset:
    """A file's worth of state and uniform wind; h (ny, nx), u (ny, nx+1), v (ny+1, nx), f (ny,)."""
    ny, nx = h.shape
    y0 = -0.5 * dy * ny
    values = {
        "thickness": h[None],
        "velocity_x": u[None],
        "velocity_y": v[None],
        "wind_stress_x": np.full((ny, nx + 1), STRESS_X),
        "wind_stress_y": np.full((ny + 1, nx), STRESS_Y),
        "coriolis": f,
    }
    coords = {
        "x_face": dx * np.arange(nx + 1),
        "y_face": y0 + dy * np.arange(ny + 1),
        "x": dx * (np.arange(nx) + 0.5),
        "y": y0 + dy * (np.arange(ny) + 0.5),
    }
    variables = {name: (names.lookup(name).dims, array) for name, array in values.items()}
    return xr.Dataset(variables, coords, {CONFIG_ATTRIBUTE: config})


def test_what_is_lifted_is_what_a_step_of_the_model_entrains_from() -> None:
    """The step solves h_t = exp(-(h - H_m)/l) w_up exactly; inverting that gives w_up back.

    The divergence is a difference of products that nearly cancel: its rounding is a few eps of M/dx, and inverting divides
    the rounding of the gain, a few eps of h, by the step and by the share that comes from below.
    """
    model = box(
        {
            "entrainment.upwelling.mixed_layer_depth_m": DEPTH,
            "entrainment.upwelling.thermocline_half_thickness_m": LENGTH,
            "entrainment.upwelling.shear_damping_per_day": DAMPING_PER_DAY,
            "surface.wind.zonal_stress_N_per_m2": STRESS_X,
            "surface.wind.meridional_stress_N_per_m2": STRESS_Y,
            "numerics.exchange_interval_days": 0.0,
            "numerics.step_s": STEP,
        }
    )
    grid, rng = model.grid, np.random.default_rng(3)
    h = rng.uniform(45.0, 160.0, (1, grid.ny, grid.nx))
    u, v = np.zeros((1, grid.ny, grid.nx + 1)), np.zeros((1, grid.ny + 1, grid.nx))
    u[..., 1:-1] = rng.uniform(-0.3, 0.3, (1, grid.ny, grid.nx - 1))
    v[:, 1:-1] = rng.uniform(-0.3, 0.3, (1, grid.ny - 1, grid.nx))
    set_state(model, thickness=h, velocity_x=u, velocity_y=v)
    model.advance(1)
    gained = grid.centres(model.ledger.entrainment_upwelling)
    moved = model.thickness[0] - gained
    share = np.where(moved > DEPTH, np.exp(-(moved - DEPTH) / LENGTH), 1.0)
    per_step = np.where(moved > DEPTH, LENGTH * np.expm1(gained / LENGTH), gained)
    expected = per_step / (share * STEP)
    found = lifted_water(result(moved, u[0], v[0], grid.dx, grid.dy, grid.coriolis(grid.y)))
    assert 0.2 < (found > 0.0).mean() < 0.8
    rounding = 50 * EPS * (DEPTH * 0.5 / grid.dx + moved.max() / (share * STEP))
    assert np.all(np.abs(found - expected) <= rounding)


def test_the_ekman_shear_is_down_the_wind_on_the_equator_and_to_its_right_far_north() -> None:
    layer = MixedLayer(50.0, 30.0, 5e-6)
    f = np.array([0.0, 1e-4])
    along = ekman_shear(np.full(2, 0.05), np.zeros(2), f, layer, 1000.0)
    across = ekman_shear(np.zeros(2), np.full(2, -0.05), f, layer, 1000.0)
    np.testing.assert_allclose(along[0], 0.05 / (1000.0 * 50.0 * 5e-6), rtol=4 * EPS)
    assert across[0] == 0.0
    assert across[1] < 0.0
    assert abs(along[1]) < 0.06 * abs(across[1])


def test_a_layer_thinner_than_the_mixed_layer_has_no_shear_of_its_own() -> None:
    thin = mixed_layer_transport(np.array([30.0]), np.array([0.2]), np.array([5.0]), 50.0)
    assert thin[0] == pytest.approx(30.0 * 0.2, rel=4 * EPS)


def test_trades_lift_water_on_the_equator_and_none_in_a_channel_without_coriolis() -> None:
    """A uniform stress has a divergent Ekman drift only where f varies, or at walls."""
    ny, nx = 20, 8
    h, u, v = np.full((ny, nx), 100.0), np.zeros((ny, nx + 1)), np.zeros((ny + 1, nx))
    f = 2.28e-11 * 1e5 * (np.arange(ny) - 0.5 * ny + 0.5)
    lifted = lifted_water(result(h, u, v, 1.5e5, 1e5, f))[:, 1:-1]
    rows = lifted.mean(axis=1)
    assert rows.argmax() in (ny // 2 - 1, ny // 2)
    assert rows[2] < 0.05 * rows.max()
    channel = CONFIG.replace("walls", "periodic") + CLOSURE
    inner = lifted_water(result(h, u, v, 1.5e5, 1e5, 0.0 * f, channel))[1:-1]
    np.testing.assert_array_equal(inner, 0.0)


def test_a_channel_has_no_seam() -> None:
    """The same channel seen from one column further east lifts the same water, one column further west."""
    random, (ny, nx) = np.random.default_rng(5), (9, 7)
    h = random.uniform(60.0, 150.0, (ny, nx))
    u = random.uniform(-0.3, 0.3, (ny, nx))
    v = random.uniform(-0.3, 0.3, (ny + 1, nx))
    f = 2.28e-11 * 1e5 * (np.arange(ny) - 4.0)
    channel = CONFIG.replace("walls", "periodic") + CLOSURE

    def lifted(turn: int) -> Array:
        east = np.roll(u, turn, axis=1)
        faces = np.hstack((east, east[:, :1]))
        return lifted_water(result(np.roll(h, turn, axis=1), faces, np.roll(v, turn, axis=1), 1.5e5, 1e5, f, channel))

    np.testing.assert_array_equal(lifted(1), np.roll(lifted(0), 1, axis=1))


def test_a_run_without_wind_driven_entrainment_is_refused_by_name() -> None:
    h, u, v = np.full((4, 3), 100.0), np.zeros((4, 4)), np.zeros((5, 3))
    off = result(h, u, v, 1e5, 1e5, np.zeros(4), CONFIG + "entrainment: {upwelling: null}\n")
    with pytest.raises(UnreadableResult, match="without wind-driven entrainment"):
        lifted_water(off)
    with pytest.raises(UnreadableResult, match=r"no configuration with entrainment\.upwelling"):
        lifted_water(result(h, u, v, 1e5, 1e5, np.zeros(4), CONFIG))
    assert array_of(off, "thickness").shape == (1, 4, 3)
