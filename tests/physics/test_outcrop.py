"""Where the warm layer has become as cold as the abyss it hands itself over, and the air finds nothing more to cool.

Heat loss fades with x^2 (3 - 2 x) of x = Theta/margin (or of the buoyancy, whichever is closer to the abyss), and the column
relaxes to its floor with the complement of that share. Column exchange is compared with these formulas to a few eps.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

from oceanbox.experiment.model import Model
from tests.building import books, box, set_state
from tests.physics.busy_ocean import EPS, busy_ocean

Array = NDArray[np.float64]
DAY = 86400.0
MARGIN, TIME, FLOOR = 2.0, 10.0 * DAY, 40.0
RULE = {
    "outcrop": {"margin_K": MARGIN, "time_days": TIME / DAY},
    "transformation.floor_thickness_m": FLOOR,
    "transformation.efficiency": {"kind": "constant", "value": 0.0},
    "numerics.exchange_interval_days": 0.0,
}


def smooth_share(x: Array) -> Array:
    """The cubic that rises from 0 at 0 to 1 at 1 without a kink."""
    x = np.clip(x, 0.0, 1.0)
    return 3.0 * x**2 - 2.0 * x**3


def cooling_row(changes: dict[str, Any] | None = None) -> Model:
    """A layer whose temperature rises from below the abyss's in the west to 3 K above it in the east, under a loss."""
    model = box(
        RULE
        | {
            "surface.heat.prescribed_W_per_m2": -200.0,
            "layers.0.initial_salinity_g_per_kg": 35.5,
            "numerics.step_s": 3600.0,
        }
        | (changes or {})
    )
    theta = np.broadcast_to(np.linspace(-1.0, 3.0, model.grid.nx), (1, model.grid.ny, model.grid.nx))
    set_state(model, theta=theta, sigma=np.zeros_like(theta))
    return model


def test_the_heat_that_is_lost_fades_smoothly_as_the_layer_reaches_the_temperature_of_the_abyss() -> None:
    """What is booked is what was applied, not what was wished."""
    model = cooling_row()
    theta = model.theta[0]
    model.advance(1)
    applied = model.grid.centres(model.ledger.heat_prescribed + model.ledger.heat_restoring)
    wished = -200.0 * 3600.0 / model.setup.water.heat
    assert np.abs(applied - smooth_share(theta / MARGIN) * wished).max() <= 8.0 * EPS * abs(wished)
    assert (applied[theta <= 0.0] == 0.0).all()
    assert (theta >= MARGIN).any() and (theta <= 0.0).any()


def test_salt_makes_the_loss_fade_too() -> None:
    """Water as dense as the abyss is abyssal water however warm: the share is that of its buoyancy over the margin's."""
    model = cooling_row()
    theta = np.full((1, model.grid.ny, model.grid.nx), 4.0)
    # 1 K is balanced by alpha/beta_S = 2e-4/7.5e-4 g/kg.
    sigma = np.broadcast_to(np.linspace(0.0, 4.2, model.grid.nx) * 2.0e-4 / 7.5e-4, theta.shape)
    set_state(model, theta=theta, sigma=sigma)
    as_warm = 4.0 - sigma[0] * 7.5e-4 / 2.0e-4
    model.advance(1)
    applied = model.grid.centres(model.ledger.heat_prescribed)
    wished = -200.0 * 3600.0 / model.setup.water.heat
    assert np.abs(applied - smooth_share(as_warm / MARGIN) * wished).max() <= 40.0 * EPS * abs(wished)


def test_a_column_never_loses_heat_it_does_not_have() -> None:
    """However strong the loss and long the step, Theta ends at 0 or above."""
    model = cooling_row({"surface.heat.prescribed_W_per_m2": -1e6, "numerics.step_s": 10.0 * DAY})
    warm = model.theta[0] > 0.0
    model.advance(1)
    held = model.grid.centres(model.opening.heat)[0]
    applied = model.grid.centres(model.ledger.heat_prescribed + model.ledger.heat_restoring)
    assert (applied[warm] >= -held[warm] * (1.0 + 4.0 * EPS)).all()
    assert not applied[~warm].any()
    assert model.theta[0][warm].min() >= 0.0


@pytest.mark.parametrize("step", [0.25 * DAY, 50.0 * DAY])
def test_an_outcropped_column_hands_its_volume_over_until_the_floor_is_left(step: float) -> None:
    """Theta = 0: (h - floor)/(1 + dt/t_o) after each step, at any step without overshoot; volume leaves, nothing enters."""
    model = box(
        RULE
        | {
            "layers.0.initial_temperature_degC": 5.0,
            "numerics.step_s": step,
        }
    )
    steps = 200
    model.advance(steps)
    left = (150.0 - FLOOR) / (1.0 + step / TIME) ** steps
    assert np.abs(model.thickness - FLOOR - left).max() <= 2.0 * steps * EPS * 150.0
    assert model.thickness.min() >= FLOOR
    handed = model.grid.centres(model.ledger.outcrop_volume)
    assert np.abs(handed + 150.0 - FLOOR - left).max() <= 2.0 * steps * EPS * 150.0
    assert not model.ledger.transformation.any()


def test_what_is_handed_over_takes_its_heat_and_salt_along() -> None:
    """A column of half the margin's warmth gives water, not heat out of its water: Theta and Sigma stay."""
    model = box(RULE | {"layers.0.initial_temperature_degC": 6.0, "layers.0.initial_salinity_g_per_kg": 34.5,
                        "numerics.step_s": DAY})  # fmt: skip
    steps = 50
    # Theta = 1 K of a margin of 2, and the fresh water makes it lighter still: x = 1/2, half the rate.
    model.advance(steps)
    rate = 1.0 - 0.5 * DAY / (TIME + DAY)
    assert np.abs(model.thickness - FLOOR - (150.0 - FLOOR) * rate**steps).max() <= 4.0 * steps * EPS * 150.0
    assert np.abs(model.theta - 1.0).max() <= 4.0 * steps * EPS
    assert np.abs(model.salinity - 34.5).max() <= 4.0 * steps * EPS * 35.0
    volume, heat, salt = (
        model.grid.centres(getattr(model.ledger, f"outcrop_{name}")) for name in ("volume", "heat", "salt")
    )
    assert np.abs(heat / volume - 1.0).max() <= 4.0 * steps * EPS
    assert np.abs(salt / volume + 0.5).max() <= 4.0 * steps * EPS


def test_a_column_denser_than_the_abyss_swaps_its_water_with_it() -> None:
    """Down to the floor it thins by handing over, and what stays loses its cold and salt at the same rate."""
    model = box(RULE | {"layers.0.initial_temperature_degC": 4.0, "numerics.step_s": DAY,
                        "layers.0.initial_salinity_g_per_kg": 35.2})  # fmt: skip
    steps = 100
    model.advance(steps)
    fraction = DAY / (TIME + DAY)
    assert np.abs(model.thickness - FLOOR - (150.0 - FLOOR) * (1.0 - fraction) ** steps).max() <= 4 * steps * EPS * 150
    # Of the water that stays in a step, the fraction is swapped for abyssal water.
    assert np.abs(model.theta / (-1.0 * (1.0 - fraction) ** steps) - 1.0).max() <= 16.0 * steps * EPS
    sigma = model.grid.centres(model.state.salt) / model.thickness
    assert np.abs(sigma / ((35.2 - 35.0) * (1.0 - fraction) ** steps) - 1.0).max() <= 16.0 * steps * EPS


def test_without_the_rule_nothing_is_handed_over() -> None:
    model = busy_ocean({"outcrop": None})
    model.advance(40)
    for name in ("outcrop_volume", "outcrop_heat", "outcrop_salt"):
        assert not getattr(model.ledger, name).any(), name


COLD_POLES = {
    "surface.heat.loss_band": None,
    "surface.heat.prescribed_W_per_m2": None,
    "surface.heat.restoring.target_temperature_degC": {"shape": "tropics_to_pole", "tropical": 28.0, "polar": -2.0},
    "surface.fresh_water": None,
    "layers.0.initial_temperature_degC": {"shape": "tropics_to_pole", "tropical": 26.0, "polar": 8.0},
    "layers.0.initial_salinity_g_per_kg": 35.0,
    "layers.0.initial_thickness_m": 150.0,
    "entrainment.prescribed": None,
}


@pytest.mark.parametrize("efficiency", [{"kind": "constant", "value": 1.0}, {"kind": "cooling", "scale_K": 8.0}])
def test_an_ocean_under_poles_colder_than_the_abyss_lives_and_stays_warmer_than_the_abyss(
    efficiency: dict[str, Any],
) -> None:
    """Four years under a polar target 7 K below the abyss: finite, nowhere colder than the abyss, no pile of abyssal water.

    Nothing cools water below the abyss and moving it makes no new extremum, so Theta >= 0 but for round-off. Without the
    rule water of the abyss's temperature piles up hundreds of metres deep against the polar wall; with it, the outcropped
    corner is the thinnest water there is.
    """
    model = busy_ocean(COLD_POLES | {"transformation.efficiency": efficiency})
    coldest = np.inf
    for _ in range(48):
        model.advance(round(30.0 * DAY / model.clock.dt))
        coldest = min(coldest, float(model.theta.min()))
        assert all(np.isfinite(field).all() for field in model.state)
    assert coldest >= -1e-12 * 30.0
    outcropped = model.theta[0] < 1.5
    assert outcropped.any()
    assert model.thickness[0][outcropped].mean() < model.thickness.mean()
    assert all(closed.basin <= 1e-12 for closed in books(model).values())


def test_without_the_rule_water_of_the_temperature_of_the_abyss_piles_up() -> None:
    """Common practice, and why the rule is there: within two years cold water stands ten times as deep without it."""
    deepest = {}
    for name, rule in (("with", {"margin_K": 1.5, "time_days": 5.0}), ("without", None)):
        one = {"kind": "constant", "value": 1.0}
        model = busy_ocean(COLD_POLES | {"outcrop": rule, "transformation.efficiency": one})
        model.advance(round(720.0 * DAY / model.clock.dt))
        deepest[name] = float(model.thickness[0][model.theta[0] < 1.5].max())
    assert deepest["without"] > 10.0 * deepest["with"]
