"""Terms that would be faster than the step do not overshoot, however absurd the step: they stop where they stop in nature.

Explicit stepping of such terms overshoots as soon as the step passes their own time scale. Here steps are up to a century.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from oceanbox.experiment.model import Model
from oceanbox.physics.buoyancy import buoyancy
from oceanbox.physics.column import surface_heating, transformed_thickness
from oceanbox.physics.entrainment import diffusive_gain, mixed_layer_transport, shoaling_gain, upwelling_gain
from oceanbox.physics.exchange import exchange
from oceanbox.physics.state import Constants
from tests.building import box
from tests.physics.busy_ocean import EPS, busy_ocean

Array = NDArray[np.float64]
DAY = 86400.0
CENTURY = 36525.0 * DAY
STEPS = st.floats(1.0, CENTURY)
RULES = settings(max_examples=300, deadline=None, derandomize=True)


@pytest.fixture(scope="module")
def constants() -> Constants:
    return box(
        {
            "water.equation_of_state": "quadratic",
            "entrainment.upwelling.mixed_layer_depth_m": 50.0,
            "entrainment.diffusive.diffusivity_m2_per_s": 1.0e-3,
            "entrainment.shoaling.minimum_thickness_m": 60.0,
            "entrainment.shoaling.time_days": 1e-3,
            "transformation.floor_thickness_m": 40.0,
            "outcrop.margin_K": 2.0,
        }
    ).constants


@RULES
@given(
    theta=st.floats(-5.0, 40.0),
    target=st.floats(-10.0, 40.0),
    h=st.floats(1.0, 500.0),
    k=st.floats(0.0, 1e-3),
    dt=STEPS,
)
def test_restoring_never_passes_its_target(theta: float, target: float, h: float, k: float, dt: float) -> None:
    """Theta stays between where it was and Theta*."""
    after = theta + surface_heating(h, 1.0 / h, theta, 0.0, 0.0, k, target, dt) / h
    allowed = 8.0 * EPS * (abs(theta) + abs(target))
    assert min(theta, target) - allowed <= after <= max(theta, target) + allowed


@RULES
@given(
    theta=st.floats(-5.0, 40.0), target=st.floats(-10.0, 40.0), h=st.floats(1.0, 500.0),
    k=st.floats(1e-7, 1e-3), w=st.floats(0.0, 1e-3), dt=STEPS,
)  # fmt: skip
def test_restoring_against_cold_water_from_below_never_passes_their_balance(
    theta: float, target: float, h: float, k: float, w: float, dt: float
) -> None:
    """Theta stays between where it was and k Theta*/(k + w), the temperature of the upwelling column."""
    balance = k * target / (k + w)
    heat = h * theta + surface_heating(h, 1.0 / h, theta, w * dt, 0.0, k, target, dt)
    after = heat / (h + w * dt)
    allowed = 16.0 * EPS * (abs(theta) + abs(target))
    assert min(theta, balance) - allowed <= after <= max(theta, balance) + allowed


@RULES
@given(h=st.floats(0.01, 60.0), dt=STEPS)
def test_shoaling_never_passes_the_least_thickness(constants: Constants, h: float, dt: float) -> None:
    assert h <= h + shoaling_gain(h, dt, constants) <= 60.0 * (1.0 + EPS)


@RULES
@given(h=st.floats(0.1, 500.0), dt=STEPS)
def test_mixing_from_below_is_bounded_by_its_square_root_law(constants: Constants, h: float, dt: float) -> None:
    """An explicit step would gain kappa dt/h, at 0.1 m in a century three hundred thousand kilometres."""
    gained = diffusive_gain(h, dt, constants)
    assert 0.0 < gained <= np.sqrt(2.0 * 1.0e-3 * dt) * (1.0 + 4.0 * EPS)


@RULES
@given(h=st.floats(50.01, 500.0), w=st.floats(1e-15, 1e-3), dt=STEPS)
def test_upwelling_shuts_itself_off_by_the_thermocline_it_deepens(
    constants: Constants, h: float, w: float, dt: float
) -> None:
    """It gains no more than the explicit step, and no more than the logarithm of the water that came up."""
    gained = upwelling_gain(h, w, dt, constants)
    exponent = (h - 50.0) / 30.0
    share = np.exp(-exponent)
    # An exponent rounded twice here and once there is off by up to 1.5 of its last places, its exponential by that many times it.
    roundoff = (8.0 + 1.5 * exponent) * EPS
    assert 0.0 <= gained <= min(share * w * dt, 30.0 * np.log1p(share * w * dt / 30.0)) * (1.0 + roundoff)


@RULES
@given(
    h=st.floats(1.0, 500.0), theta=st.floats(0.0, 30.0), sigma=st.floats(-3.0, 3.0),
    lost=st.floats(0.0, 1e-3), rain=st.floats(-1e-5, 1e-5), dt=STEPS,
)  # fmt: skip
def test_destroying_water_leaves_the_floor_and_never_warms_what_is_left(
    constants: Constants, h: float, theta: float, sigma: float, lost: float, rain: float, dt: float
) -> None:
    """A loss of any strength over any step, once limited to the heat there is: h >= floor, and Theta does not rise."""
    heating = -min(lost * dt, h * theta)
    taken = transformed_thickness(h, theta, buoyancy(theta, sigma, constants), h * theta, heating, rain * dt, constants)
    assert h - taken >= min(h, 40.0)
    # The heat that is left is a difference of two that may be nearly equal.
    assert (h * theta + heating) <= theta * (h - taken) + 8.0 * EPS * h * theta


def one_exchange(model: Model, theta: Array, sigma: Array, thickness: Array, dt: float) -> tuple[Array, Array, Array]:
    """h, Theta and Sigma after one exchange of ``dt`` with air and abyss, columns only."""
    grid = model.grid
    h, heat, salt = (grid.embed_centres(field) for field in (thickness, thickness * theta, thickness * sigma))
    forcing, constants, rest = model.setup.forcing, model.constants, np.zeros(grid.shape)
    Mx, My, gain, heating = (rest.copy() for _ in range(4))
    last = len(h) - 1
    mixed_layer_transport(2, last, h, rest, rest, forcing.shear_x, forcing.shear_y, 1.0, constants, Mx, My)
    exchange(2, last - 1, h, heat, salt, forcing, constants, dt, model.ledger, Mx, My, gain, heating)
    h, heat, salt = (grid.centres(field) for field in (h, heat, salt))
    return h, heat / h, salt / h


@settings(max_examples=60, deadline=None, derandomize=True)
@given(seed=st.integers(0, 2**32 - 1), dt=STEPS, scale=st.sampled_from([None, 3.0, 10.0]))
def test_a_whole_exchange_of_any_length_leaves_sound_columns(seed: int, dt: float, scale: float | None) -> None:
    """All closures at once: h stays at or above the lower of its start and the floor, Theta between what cools and warms it.

    Theta is bounded by where it was, by the abyss (0), and by Theta* + F/k, the warmest the air can make a column.
    """
    efficiency: dict[str, Any] = {"kind": "constant", "value": 1.0}
    if scale is not None:
        efficiency = {"kind": "cooling", "scale_K": scale}
    model = busy_ocean({"transformation.efficiency": efficiency})
    grid, rng = model.grid, np.random.default_rng(seed)
    cells = (grid.ny, grid.nx)
    thickness = rng.uniform(1.0, 300.0, cells)
    theta, sigma = rng.uniform(-2.0, 25.0, cells), rng.uniform(-0.5, 0.5, cells)
    h, after, _ = one_exchange(model, theta, sigma, thickness, dt)
    forcing = model.setup.forcing
    warmest = grid.centres(forcing.target_anomaly + forcing.prescribed_heating / forcing.restoring_velocity)
    floor = model.constants.floor_depth
    assert (h >= np.minimum(thickness, floor) * (1.0 - 8.0 * EPS)).all()
    assert (after <= np.maximum(theta, np.maximum(warmest, 0.0)) + 16.0 * EPS * 40.0).all()
    assert (after >= np.minimum(theta, 0.0) - 16.0 * EPS * 40.0).all()


@pytest.mark.parametrize("step", [DAY, 1000.0 * DAY])
def test_drag_stops_a_current_and_never_turns_it(step: float) -> None:
    """u/(1 + r dt) after each step, for a uniform current in a channel that does not rotate."""
    model = box(
        {
            "basin.zonal_boundary": "periodic",
            "basin.beta_per_m_s": 0.0,
            "motion.drag_per_day": 10.0,
            "numerics.step_s": step,
        }
    )
    model.state.velocity_x[...] = 0.3
    model.advance(3)
    expected = 0.3 / (1.0 + 10.0 * step / DAY) ** 3
    assert np.abs(model.velocity_x / expected - 1.0).max() <= 12.0 * EPS
    assert not model.velocity_y.any()
