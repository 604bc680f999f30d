"""Destroying warm water: Walin's transformation computed from the model's own surface fields, its limits, heat and salt.

A layer at rest moves no water in its first step, so what the column exchange did is known from the fields before it.
Products of a few numbers agree to a few eps; each comparison allows eight.
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
from oceanbox.physics.column import transformed_thickness
from oceanbox.physics.state import Constants
from tests.building import box
from tests.theory.printed import rounds_to
from tests.theory.transformation import surface_density_flux, transformation_by_heat_loss

Array = NDArray[np.float64]
EPS = float(np.finfo(float).eps)
FEW = 8.0 * EPS
DAY = 86400.0

# A loss that differs from cell to cell, over water whose temperature and salinity do too.
UNEVEN = {
    "layers.0.initial_temperature_degC": {"shape": "linear", "value_at_origin": 17.0, "slope_per_deg": 1.5},
    "layers.0.initial_salinity_g_per_kg": {"shape": "linear", "value_at_origin": 34.5, "slope_per_deg": 0.2},
    "surface.heat.prescribed_W_per_m2": {"shape": "linear", "value_at_origin": -150.0, "slope_per_deg": -20.0},
    "surface.heat.restoring.coefficient_W_per_m2_K": 35.0,
    "surface.heat.restoring.target_temperature_degC": 10.0,
    "numerics.step_s": 3600.0,
    "numerics.exchange_interval_days": 0.0,
}
EVERYTHING = {"transformation.efficiency": {"kind": "constant", "value": 1.0}}


def share(value: float) -> dict[str, Any]:
    return {"transformation.efficiency": {"kind": "constant", "value": value}}


def after_one_step(changes: dict[str, Any]) -> Model:
    model = box(UNEVEN | changes)
    model.advance(1)
    return model


def destroyed(model: Model) -> Array:
    """w_d [m s-1] of the step, (ny, nx)."""
    return -model.grid.centres(model.ledger.transformation) / model.clock.dt


def heat_flux(model: Model) -> Array:
    """Q [W m-2] that was applied in the step, (ny, nx)."""
    booked = model.grid.centres(model.ledger.heat_prescribed + model.ledger.heat_restoring)
    return booked * model.setup.water.heat / model.clock.dt


def fields_before(model: Model) -> tuple[Array, Array]:
    """Theta [K] and Sigma [g/kg] before the step, (ny, nx)."""
    h, heat, salt = (model.grid.centres(field)[0] for field in model.opening[:3])
    return heat / h, salt / h


def density_flux(model: Model, rain_m_per_s: float) -> Array:
    """f [kg m-2 s-1] by the referee's formula from the model's Q, T and the coefficients of the configuration."""
    water, theta = model.setup.config.water, fields_before(model)[0]
    if water.equation_of_state == "linear":
        expansion = np.full_like(theta, water.thermal_expansion_per_K)
    else:
        temperature = theta + water.abyss_temperature_degC
        expansion = water.thermal_expansion_at_0degC_per_K + water.thermal_expansion_slope_per_K2 * temperature
    return surface_density_flux(
        heat_flux(model),
        expansion,
        heat_capacity=water.heat_capacity_J_per_kg_K,
        net_evaporation=-rain_m_per_s,
        haline_contraction=water.haline_contraction_kg_per_g,
        salinity=35.0,
        density=water.reference_density_kg_per_m3,
    )


def density_step(model: Model) -> Array:
    """rho_abyss - rho [kg m-3] of the layer before the step, (ny, nx), from the formulas of the configuration."""
    water = model.setup.config.water
    theta, sigma = fields_before(model)
    temperature = theta + water.abyss_temperature_degC
    thermal = water.thermal_expansion_per_K * theta
    if water.equation_of_state == "quadratic":
        rise = temperature**2 - water.abyss_temperature_degC**2
        thermal = water.thermal_expansion_at_0degC_per_K * theta + 0.5 * water.thermal_expansion_slope_per_K2 * rise
    return water.reference_density_kg_per_m3 * (thermal - water.haline_contraction_kg_per_g * sigma)


@pytest.mark.parametrize(
    "scheme",
    [
        pytest.param({}, id="forward_backward"),
        # The stages of this method let uneven water move within the first step.
        pytest.param(
            {"numerics.scheme": "runge_kutta_3", "layers.0.initial_temperature_degC": 17.0}, id="runge_kutta_3"
        ),
    ],
)
@pytest.mark.parametrize("equation_of_state", ["linear", "quadratic"])
def test_destroyed_volume_is_the_heat_lost_over_the_warmth_of_the_water(
    scheme: dict[str, Any], equation_of_state: str
) -> None:
    """V = Q/(rho0 c_p dT), Walin 1982, in every cell and hence in sum: with efficiency 1 heat sets the limit.

    Under the quadratic equation of state alpha(T) dT > g' / g, so more buoyancy than the water has would go; its heat is
    then what limits it, and the same formula holds.
    """
    fresh = {"layers.0.initial_salinity_g_per_kg": 35.0}
    model = after_one_step(EVERYTHING | fresh | scheme | {"water.equation_of_state": equation_of_state})
    theta, area = fields_before(model)[0], model.grid.cell_area
    loss = -heat_flux(model) * area
    assert loss.min() > 0.0 and loss.max() > 1.3 * loss.min()
    expected = transformation_by_heat_loss(loss, theta, density=1025.0, heat_capacity=3991.868)
    volume = destroyed(model) * area
    assert np.abs(volume / expected - 1.0).max() <= FEW
    assert volume.sum() == pytest.approx(expected.sum(), rel=FEW)


def test_half_a_petawatt_lost_over_fifteen_kelvin_destroys_eight_sverdrup() -> None:
    """100 W m-2 over 5e12 m2 and 15 K: 8.14664e6 m3 s-1; Walin 1982, the number derived. T stays while h falls."""
    model = box(
        EVERYTHING
        | {
            "basin.width_km": 2500.0, "basin.south_km": -1000.0, "basin.north_km": 1000.0,
            "layers.0.initial_temperature_degC": 20.0,
            "surface.heat.prescribed_W_per_m2": -100.0,
            "numerics.step_s": DAY,
        }
    )  # fmt: skip
    steps = 300
    model.advance(steps)
    volume = -model.grid.centres(model.ledger.transformation).sum() * model.grid.cell_area / (steps * DAY)
    assert rounds_to(volume / 1e6, "8.14664")
    assert np.abs(model.theta - 15.0).max() <= 4.0 * steps * EPS * 15.0
    assert np.abs(model.thickness - 150.0 + volume / 5e12 * steps * DAY).max() <= 4.0 * steps * EPS * 150.0


@pytest.mark.parametrize("equation_of_state", ["linear", "quadratic"])
@pytest.mark.parametrize("efficiency", [0.3, 0.8])
@pytest.mark.parametrize("rain", [0.0, 3.0, -3.0])
def test_destroyed_volume_is_the_density_flux_over_the_density_step(
    equation_of_state: str, efficiency: float, rain: float
) -> None:
    """w_d = epsilon f/(rho_abyss - rho), the extension of Walin to density, derived; never more than heat allows."""
    # Balanced, as it must be: rain on one side of the equator, evaporation on the other.
    map_of_rain = {"points": [[-0.1, rain], [0.1, -rain]]}
    fresh_water = {"precipitation_minus_evaporation_m_per_year": map_of_rain, "balance": "uniform"} if rain else None
    model = after_one_step(
        share(efficiency) | {"water.equation_of_state": equation_of_state, "surface.fresh_water": fresh_water}
    )
    falling = model.setup.maps.precipitation_minus_evaporation
    by_density = efficiency * density_flux(model, falling) / density_step(model)
    by_heat = transformation_by_heat_loss(-heat_flux(model), fields_before(model)[0], 1025.0, 3991.868)
    expected = np.maximum(np.minimum(by_density, by_heat), 0.0)
    assert (by_density < by_heat).mean() > 0.3
    # Heat and salt partly cancel in f, so the bound is relative to the parts.
    parts = np.abs(density_flux(model, np.zeros_like(falling))) + np.abs(density_flux(model, np.abs(falling)))
    allowed = FEW * np.maximum(efficiency * parts / density_step(model), expected)
    assert (np.abs(destroyed(model) - expected) <= allowed).all()


@pytest.mark.parametrize("scale", [3.0, 6.0, 15.0])
def test_efficiency_falls_exponentially_with_the_warmth_of_the_water(scale: float) -> None:
    """w_d with epsilon = exp(-Theta/Theta_s) over w_d with a constant one is that ratio; Theta from 7 to 17 K here.

    An exponential turns the relative error of its argument into as many times its size.
    """
    cooling = after_one_step({"transformation.efficiency": {"kind": "cooling", "scale_K": scale}})
    constant = after_one_step(share(0.5))
    theta = fields_before(cooling)[0]
    assert theta.min() < 7.0 and theta.max() > 17.0
    ratio = destroyed(cooling) / destroyed(constant)
    assert (np.abs(ratio / (np.exp(-theta / scale) / 0.5) - 1.0) <= FEW * (1.0 + theta / scale)).all()


def test_where_the_surface_gains_buoyancy_nothing_is_destroyed() -> None:
    """Heating destroys nothing; neither does cooling that rain makes up for."""
    warming = after_one_step(EVERYTHING | {"surface.heat.prescribed_W_per_m2": 500.0})
    assert heat_flux(warming).min() > 0.0
    assert not destroyed(warming).any()
    flood = {"precipitation_minus_evaporation_m_per_year": {"points": [[0.0, 2000.0], [0.01, -2000.0]]}}
    rained_on = after_one_step(EVERYTHING | {"surface.fresh_water": flood | {"balance": "uniform"}})
    south = rained_on.grid.latitude < 0.0
    assert density_flux(rained_on, rained_on.setup.maps.precipitation_minus_evaporation)[south].max() < 0.0
    assert heat_flux(rained_on)[south].max() < 0.0
    assert not destroyed(rained_on)[south].any()
    assert destroyed(rained_on)[~south].all()


def test_efficiency_zero_cools_and_efficiency_one_destroys() -> None:
    """The same loss either lowers h at the same Theta or Theta at the same h; the heat that is left is the same."""
    cooled, shrunk = (
        after_one_step(share(value) | {"layers.0.initial_salinity_g_per_kg": 35.0}) for value in (0.0, 1.0)
    )
    theta = fields_before(cooled)[0]
    loss = -heat_flux(cooled) * cooled.clock.dt / cooled.setup.water.heat
    assert np.abs(cooled.theta[0] - (theta - loss / 150.0)).max() <= FEW * theta.max()
    assert np.array_equal(cooled.thickness, cooled.grid.centres(cooled.opening.thickness))
    assert np.abs(shrunk.theta[0] - theta).max() <= FEW * theta.max()
    assert np.abs(shrunk.thickness[0] - (150.0 - loss / theta)).max() <= FEW * 150.0
    assert np.array_equal(cooled.grid.centres(cooled.state.heat), shrunk.grid.centres(shrunk.state.heat))


def test_transformation_leaves_the_floor() -> None:
    """A loss that would destroy a layer many times over leaves the floor, and then cools what is left."""
    model = box(
        EVERYTHING
        | {
            "layers.0.initial_thickness_m": 60.0,
            "transformation.floor_thickness_m": 40.0,
            "surface.heat.prescribed_W_per_m2": -2000.0,
            "numerics.step_s": DAY,
        }
    )  # fmt: skip
    for _ in range(20):
        model.advance(1)
        assert model.thickness.min() >= 40.0
    assert model.thickness.max() == 40.0
    assert model.theta.max() < 20.0
    assert model.theta.min() >= 0.0


@pytest.fixture(scope="module")
def constants() -> Constants:
    return box(UNEVEN | EVERYTHING | {"water.equation_of_state": "quadratic"}).constants


@settings(max_examples=300, deadline=None, derandomize=True)
@given(
    h=st.floats(1.0, 500.0),
    theta=st.floats(-3.0, 30.0),
    warmed=st.floats(0.5, 2.0),
    sigma=st.floats(-5.0, 5.0),
    lost=st.one_of(st.just(0.0), st.floats(1e-12, 1e4)),
    rain=st.floats(-10.0, 10.0),
    scale=st.one_of(st.just(float("inf")), st.floats(1.0, 20.0)),
)
def test_no_column_is_destroyed_below_the_floor_or_for_more_heat_than_was_lost(
    constants: Constants, h: float, theta: float, warmed: float, sigma: float, lost: float, rain: float, scale: float
) -> None:
    """0 <= w_d dt <= max(h - floor, 0) and Theta w_d dt <= heat lost, whatever the column, its efficiency and the rain.

    Theta is that of the water in hand, ``warmed`` times the one before the step.
    """
    held = h * theta * warmed
    rules = constants._replace(efficiency_scale=scale, floor_depth=40.0)
    taken = transformed_thickness(h, theta, buoyancy(theta, sigma, rules), held, -lost, rain, rules)
    assert 0.0 <= taken <= max(h - 40.0, 0.0)
    assert taken * held / h <= lost * (1.0 + 4.0 * EPS)


def salty(changes: dict[str, Any]) -> Model:
    """A uniform layer of 37 g/kg that loses 100 W m-2 for 100 days and is destroyed for it."""
    model = box(
        EVERYTHING
        | {
            "layers.0.initial_salinity_g_per_kg": 37.0,
            "surface.heat.prescribed_W_per_m2": -100.0,
            "numerics.step_s": DAY,
        }
        | changes
    )  # fmt: skip
    model.advance(100)
    return model


def test_carried_salt_leaves_with_the_water_and_the_salinity_stays() -> None:
    """d/dt Int h Sigma dA = -Int w_d Sigma dA, booked as an export of its own."""
    model = salty({"transformation.salt": "carried"})
    assert np.abs(model.salinity - 37.0).max() <= 4.0 * 100 * EPS * 37.0
    volume, salt = (
        model.grid.centres(entry) for entry in (model.ledger.transformation, model.ledger.transformation_salt)
    )
    assert volume.max() < -5.0
    assert np.abs(salt / (2.0 * volume) - 1.0).max() <= 4.0 * 100 * EPS


def test_salt_left_behind_stays_in_the_layer_to_the_last_bit() -> None:
    """h Sigma does not change, so Sigma rises as the layer thins."""
    model = salty({"transformation.salt": "left_behind"})
    assert np.array_equal(model.state.salt, model.opening.salt)
    assert not model.ledger.transformation_salt.any()
    thinner = 150.0 + model.grid.centres(model.ledger.transformation)
    assert thinner.max() < 145.0
    assert np.abs((model.salinity[0] - 35.0) * thinner / 300.0 - 1.0).max() <= 4.0 * 100 * EPS


def test_rain_takes_the_reference_salinity_and_destroyed_water_the_salt_that_is_left() -> None:
    """Virtual salt flux -S_ref (P - E), then w_d Sigma of the column so freshened: both named in the salt budget."""
    rain = {"precipitation_minus_evaporation_m_per_year": {"points": [[0.0, 5.0], [0.01, -5.0]]}, "balance": "uniform"}
    model = after_one_step(share(0.5) | {"surface.fresh_water": rain})
    falling = model.setup.maps.precipitation_minus_evaporation * model.clock.dt
    assert falling.max() > 0.0 > falling.min()
    virtual, taken = (
        model.grid.centres(entry) for entry in (model.ledger.virtual_salt, model.ledger.transformation_salt)
    )
    assert np.abs(virtual + 35.0 * falling).max() <= FEW * np.abs(virtual).max()
    held = model.grid.centres(model.opening.salt)[0] - 35.0 * falling
    expected = -destroyed(model) * model.clock.dt * held / 150.0
    assert np.abs(taken - expected).max() <= FEW * np.abs(expected).max()
