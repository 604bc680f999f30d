"""Hastened steps: another way, the same rest."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from oceanbox.budgets.rates import BUDGETS, budget_maps
from oceanbox.budgets.units import Water
from oceanbox.experiment.model import Model
from tests.building import box, run_days, set_state

PACE_LIMIT, ROSSBY = 20.0, 0.5

# Sixty metres under 400 W m-2 K-1 adjust within a week and the basin is small, so this ocean rests, to round-off, within years.
QUICK_TO_REST: dict[str, Any] = {
    "layers.0.initial_thickness_m": 60.0,
    "motion.viscosity_m2_per_s": 2e4,
    "mixing.lateral_diffusivity_m2_per_s": 1e3,
    "surface.heat.restoring": {
        "coefficient_W_per_m2_K": 400.0,
        "target_temperature_degC": {"shape": "linear", "value_at_origin": 20.0, "slope_per_deg": 0.5},
    },
    "surface.wind.zonal_stress_N_per_m2": {"shape": "gaussian", "peak": -0.03, "width_deg": 3.0},
    "numerics.step_s": 5400.0,
    "numerics.exchange_interval_days": 0.0,
}


def _differences(model: Model, before: dict[str, np.ndarray]) -> dict[str, float]:
    now = model.state._asdict()
    return {name: float(np.abs(now[name] - was).max() / max(np.abs(was).max(), 1e-9)) for name, was in before.items()}


def _copied(model: Model) -> dict[str, np.ndarray]:
    return {name: content.copy() for name, content in model.state._asdict().items()}


def test_where_true_steps_rest_hastened_steps_rest() -> None:
    """Every term and every weight of the multi-step scheme is the same in a steady state: relative changes of round-off.

    Rest is reached truly to 1e-11 of each field; fifty hastened steps, at up to 20 times the pace, may make of it 20 times
    fifty times as much at the very most.
    """
    model = box(QUICK_TO_REST)
    run_days(model, 2500.0)
    before = _copied(model)
    run_days(model, 50 * 5400.0 / 86400.0)
    assert max(_differences(model, before).values()) < 1e-11
    model.hasten(PACE_LIMIT, ROSSBY)
    before = _copied(model)
    model.advance(50)
    assert max(_differences(model, before).values()) < 1e-8


def test_the_ledger_books_the_true_step_and_the_residual_is_what_the_pace_added() -> None:
    """The first step of both schemes moves water and exchanges columns alike: the books agree to the last bit."""
    changes = QUICK_TO_REST | {
        "entrainment.upwelling.mixed_layer_depth_m": 40.0,
        "transformation.floor_thickness_m": 20.0,
    }
    rng = np.random.default_rng(2)
    thickness, theta = rng.uniform(50.0, 70.0, (1, 16, 20)), rng.uniform(5.0, 15.0, (1, 16, 20))
    velocity_x, velocity_y = rng.normal(0.0, 0.1, (1, 16, 21)), rng.normal(0.0, 0.1, (1, 17, 20))
    velocity_x[..., [0, -1]] = velocity_y[:, [0, -1]] = 0.0
    true, hastened = box(changes), box(changes)
    for model in (true, hastened):
        set_state(model, thickness=thickness, theta=theta, velocity_x=velocity_x, velocity_y=velocity_y)
    hastened.hasten(PACE_LIMIT, ROSSBY)
    for model in (true, hastened):
        model.advance(1)
    for name, booked in true.ledger._asdict().items():
        assert np.array_equal(booked, getattr(hastened.ledger, name)), name
    for moved in (true.ledger.heat_restoring, true.ledger.volume_x, true.ledger.heat_advection_y):
        assert np.abs(moved).max() > 0.0
    maps = [
        budget_maps(model.grid, model.ledger, model.opening, model.state, 1.0, Water(1.0, 1.0))
        for model in (true, hastened)
    ]
    for _, storage, residual in BUDGETS.values():
        extra = maps[1][storage] - maps[0][storage]
        np.testing.assert_allclose(maps[1][residual], extra, rtol=0.0, atol=1e-11 * (1.0 + np.abs(extra).max()))
    assert np.abs(maps[1]["heat_residual"]).max() > 0.0


def test_hastened_steps_keep_a_uniform_temperature_uniform() -> None:
    """Thickness and heat of a cell go at one pace, so where one is carried by the other nothing is made of it."""
    model = box({"motion.viscosity_m2_per_s": 2e4, "surface.wind.zonal_stress_N_per_m2": -0.05})
    model.hasten(PACE_LIMIT, ROSSBY)
    run_days(model, 60.0)
    assert np.ptp(model.thickness) > 1.0
    assert np.ptp(model.theta) < 1e-11 * model.theta.max()


@pytest.mark.parametrize("coriolis", [0.0, 1e-4])
def test_small_waves_do_not_grow_at_any_mixture_of_paces(coriolis: float) -> None:
    """What hastened waves conserve bounds them: thickness and velocity noise of 1e-4 stays below a few times itself.

    Int b h^2/p + H u^2/s holds, so an amplitude can rise by the square root of the largest ratio of paces, 20^(1/2), where waves
    from calm water meet in a slow cell; a scheme beyond its limit would grow by that in a few steps of the thousand.
    """
    model = box({"basin.coriolis_at_origin_per_s": coriolis, "numerics.step_s": 5400.0})
    rng = np.random.default_rng(4)
    set_state(model, thickness=150.0 + 1e-4 * rng.normal(size=(1, 16, 20)))
    model.hasten(PACE_LIMIT, ROSSBY)
    start = float(np.abs(model.thickness - 150.0).max())
    model.advance(1000)
    assert float(np.abs(model.thickness - 150.0).max()) < 20.0**0.5 * start
    assert float(np.abs(model.velocity_x).max()) > 0.0


def test_hastened_steps_come_to_rest_in_fewer_steps() -> None:
    """A calm slab goes at the full limit: restoring with an e-folding of 150 m/k takes a twentieth of the steps."""
    changes = {
        "surface.heat.restoring": {"coefficient_W_per_m2_K": 35.0, "target_temperature_degC": 15.0},
        "numerics.step_s": 5400.0,
    }
    true, hastened = box(changes), box(changes)
    hastened.hasten(PACE_LIMIT, ROSSBY)
    true.advance(2000)
    hastened.advance(100)
    # A step of 20 times the change is the same to the square of the change in one, (20 dt k/h)^2/2 = 2e-5 of 10 K, per step.
    assert float(hastened.theta.max()) == pytest.approx(float(true.theta.max()), abs=100 * 2e-5 * 10.0)
    assert float(true.theta.max()) < 19.95
