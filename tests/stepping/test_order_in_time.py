"""How fast the error falls with the step, for each scheme: against an exact standing wave, and in the full equations."""

from __future__ import annotations

from functools import cache

import numpy as np
import pytest
from numpy.typing import NDArray

from oceanbox.experiment.model import Clock, Model
from oceanbox.stepping.runge_kutta import CLASSICAL_4, STRONG_3, Tableau
from tests.building import box, set_state

Array = NDArray[np.float64]
DEPTH, WAVE_SPEED, GRAVITY = 156.25, 2.5, 0.04
METHODS = {
    "runge_kutta_3": ("runge_kutta_3", STRONG_3),
    "runge_kutta_4": ("runge_kutta_3", CLASSICAL_4),
    "forward_backward": ("forward_backward", STRONG_3),
}


def orders(errors: list[float]) -> Array:
    """log2 of the ratio of each error to the one at half the step."""
    values = np.array(errors)
    return np.asarray(np.log2(values[:-1] / values[1:]))


def standing_wave_error(scheme: str, tableau: Tableau, steps: int) -> float:
    """Largest error of h and (in its units) v after 1.3 periods of a standing gravity wave, of amplitude 1 m.

    eta = cos(l y) cos(omega t) at centres and v = (g'/c) sin(l y) sin(omega t) on faces are exact on the C-grid in space, with
    omega = c (2/dy) sin(l dy/2).
    """
    l = 2.0 * np.pi / 1e6  # noqa: E741
    omega = WAVE_SPEED * 2.0 / 50e3 * np.sin(0.5 * l * 50e3)
    time = 1.3 * 2.0 * np.pi / omega
    model = box(
        {
            "basin.zonal_boundary": "periodic",
            "basin.cells_x": 4,
            "basin.cells_y": 20,
            "basin.width_km": 200.0,
            "basin.south_km": 0.0,
            "basin.north_km": 1000.0,
            "basin.beta_per_m_s": 0.0,
            "layers.0.initial_thickness_m": DEPTH,
            "motion.momentum_advection": False,
            "motion.linear_about_depth_m": DEPTH,
            "numerics.scheme": scheme,
            "numerics.step_s": time / steps,
        },
        tableau,
    )
    grid = model.grid
    start = DEPTH + np.tile(np.cos(l * grid.y)[:, None], (1, grid.nx))
    set_state(model, start[None], model.theta)
    model.advance(steps)
    height = np.cos(l * grid.y) * np.cos(omega * time)
    velocity = GRAVITY / WAVE_SPEED * np.sin(l * grid.y_face) * np.sin(omega * time)
    off = np.abs(model.thickness[0, :, 0] - DEPTH - height).max()
    return float(max(off, np.abs(model.velocity_y[0, :, 0] - velocity).max() * WAVE_SPEED / GRAVITY))


@pytest.mark.parametrize(("method", "order"), [("runge_kutta_3", 3), ("runge_kutta_4", 4), ("forward_backward", 2)])
def test_a_gravity_wave_is_stepped_at_the_order_of_the_scheme(method: str, order: int) -> None:
    """The next term of the error is smaller by omega dt, a twentieth at the longest of these steps, and its coefficient."""
    errors = [standing_wave_error(*METHODS[method], steps) for steps in (160, 320, 640)]
    assert orders(errors) == pytest.approx(order, abs=0.1)


@cache
def gyre_after_two_days(method: str, steps: int) -> Model:
    """The full equations in a closed basin: rotation, advection, wind, friction and drag on a slope of 40 m in 150 m."""
    scheme, tableau = METHODS[method]
    model = box(
        {
            "basin.coriolis_at_origin_per_s": 2e-5,
            "motion.viscosity_m2_per_s": 2e3,
            "motion.drag_per_day": 0.05,
            "surface.wind.zonal_stress_N_per_m2": {"shape": "cosine", "amplitude": -0.05},
            "numerics.scheme": scheme,
            "numerics.step_s": 1.0,
        },
        tableau,
    )
    grid = model.grid
    x, y = grid.x / (grid.nx * grid.dx), (grid.y - grid.y_face[0]) / (grid.ny * grid.dy)
    x_face, y_face = grid.x_face / (grid.nx * grid.dx), (grid.y_face - grid.y_face[0]) / (grid.ny * grid.dy)
    thickness = 150.0 + 20.0 * np.outer(np.cos(np.pi * y), np.cos(np.pi * x))
    along = 0.3 * np.outer(np.cos(2.0 * np.pi * y), np.sin(np.pi * x_face))
    across = -0.2 * np.outer(np.sin(np.pi * y_face), np.cos(np.pi * x))
    set_state(model, thickness[None], model.theta, velocity_x=along[None], velocity_y=across[None])
    model.clock = Clock(0.0, 2.0 * 86400.0 / steps, 0)
    model.advance(steps)
    return model


def difference(a: Model, b: Model) -> float:
    """Largest difference of two states, thickness over 150 m and velocities in m s-1."""
    return float(
        max(
            np.abs(a.thickness - b.thickness).max() / 150.0,
            np.abs(a.velocity_x - b.velocity_x).max(),
            np.abs(a.velocity_y - b.velocity_y).max(),
        )
    )


@pytest.mark.parametrize(("method", "order"), [("runge_kutta_3", 3), ("runge_kutta_4", 4)])
def test_the_full_equations_are_stepped_at_the_order_of_the_scheme(method: str, order: int) -> None:
    """Against the four-stage method with steps so short that its error, by its order, is 1/4000 of the smallest here."""
    exact = gyre_after_two_days("runge_kutta_4", 800)
    errors = [difference(gyre_after_two_days(method, steps), exact) for steps in (50, 100)]
    assert orders(errors) == pytest.approx(order, abs=0.1)


def test_rotation_taken_in_turn_makes_the_production_scheme_first_order_in_the_full_equations() -> None:
    """u^{n+1} from v^n and v^{n+1} from u^{n+1} set v half a step off u: at least first order, a tenth for the next term."""
    exact = gyre_after_two_days("runge_kutta_4", 800)
    errors = [difference(gyre_after_two_days("forward_backward", steps), exact) for steps in (50, 100)]
    assert orders(errors) > 0.9
