"""The buoyancy the model computes, against TEOS-10 (IOC, SCOR and IAPSO 2010, through gsw) within the errors stated for it.

The quadratic equation of state is a fit whose largest error is stated in `config.water`: 7.9e-4 m s-2 of the buoyancy over
an abyss of 5 degC. Here the kernels of the model are held to it.
"""

from __future__ import annotations

import gsw
import numpy as np
import pytest

from oceanbox.config import loads
from oceanbox.experiment.assembly import assemble_setup
from oceanbox.physics.buoyancy import buoyancy, thermal_expansion
from oceanbox.physics.pressure import layer_pressure
from oceanbox.physics.state import Constants
from tests.building import box
from tests.theory.printed import half_unit_of_last_digit, rounds_to

EPS = float(np.finfo(float).eps)
GRAVITY, DENSITY = 9.81, 1025.0
BUOYANCY_ERROR = 7.9e-4  # m s-2, over an abyss of 5 degC, as stated


def ocean_water(abyss_degC: float = 5.0) -> Constants:
    """The constants of a default ocean over an abyss of this temperature and 35 g/kg."""
    text = f"name: water\nbasin: {{cells_x: 4, cells_y: 4}}\nwater: {{abyss_temperature_degC: {abyss_degC}}}\n"
    return assemble_setup(loads(text)).constants


def exact_buoyancy(temperature: float, salinity: float, abyss_degC: float = 5.0) -> float:
    """g (rho_abyss - rho)/rho0 of TEOS-10 at the surface, m s-2."""
    density = gsw.rho(salinity, temperature, 0.0)
    return float(GRAVITY * (gsw.rho(35.0, abyss_degC, 0.0) - density) / DENSITY)


@pytest.mark.parametrize(
    ("temperature", "density", "expansion", "contraction"),
    [
        (0.0, "1027.974548", "5.249958e-5", "7.808277e-4"),
        (5.0, "1027.545025", "1.131901e-4", "7.664692e-4"),
        (10.0, "1026.824644", "1.662561e-4", "7.536678e-4"),
        (20.0, "1024.639635", "2.569496e-4", "7.324331e-4"),
        (28.0, "1022.275838", "3.191287e-4", "7.187554e-4"),
    ],
)
def test_the_referee_reproduces_the_table_of_surface_water(
    temperature: float, density: str, expansion: str, contraction: str
) -> None:
    """TEOS-10, 75-term polynomial, 35 g/kg at the surface; a referee of another version would not."""
    assert rounds_to(gsw.rho(35.0, temperature, 0.0), density)
    assert rounds_to(gsw.alpha(35.0, temperature, 0.0), expansion)
    assert rounds_to(gsw.beta(35.0, temperature, 0.0), contraction)


@pytest.mark.parametrize(("warm", "cold", "printed"), [(28.0, 10.0, "0.0434432"), (20.0, 5.0, "0.0277284")])
def test_the_reduced_gravity_of_the_handbook_is_met_within_the_error_of_the_fit(
    warm: float, cold: float, printed: str
) -> None:
    """28 over 10 degC and 20 over 5 degC at g = 9.80665, 35 g/kg; the table divides by the density of the colder water.

    Over 10 degC the buoyancy of the fit is the difference of two over 5 degC, each with the stated error.
    """
    below, above = gsw.rho(35.0, cold, 0.0), gsw.rho(35.0, warm, 0.0)
    assert rounds_to(9.80665 * (below - above) / below, printed)
    referee = float(printed) * below / DENSITY * GRAVITY / 9.80665
    allowed = BUOYANCY_ERROR * (1.0 if cold == 5.0 else 2.0) + half_unit_of_last_digit(printed)
    assert abs(buoyancy(warm - cold, 0.0, ocean_water(cold)) - referee) <= allowed


@pytest.mark.parametrize("temperature", np.linspace(0.0, 30.0, 31))
def test_buoyancy_over_the_default_abyss_errs_no_more_than_stated(temperature: float) -> None:
    found = buoyancy(temperature - 5.0, 0.0, ocean_water())
    assert abs(found - exact_buoyancy(temperature, 35.0)) <= BUOYANCY_ERROR * 1.007  # stated to two digits


@pytest.mark.parametrize("temperature", [2.0, 10.0, 20.0, 28.0])
@pytest.mark.parametrize("salinity", [33.0, 34.5, 36.0, 37.0])
def test_salinity_changes_buoyancy_as_it_does_in_the_sea(temperature: float, salinity: float) -> None:
    """beta_S = 7.5e-4 kg/g stands for 7.15e-4 to 7.81e-4 at the surface, so each g/kg adds at most g 3.5e-5 to the error."""
    spread = gsw.beta(35.0, np.array([0.0, 30.0]), 0.0)
    of_contraction = np.abs(spread - 7.5e-4).max() * 1.02  # and its change with salinity, under 2 %
    found = buoyancy(temperature - 5.0, salinity - 35.0, ocean_water())
    without = exact_buoyancy(temperature, 35.0)
    change = exact_buoyancy(temperature, salinity) - without
    found_change = found - buoyancy(temperature - 5.0, 0.0, ocean_water())
    # (rho_0 S contraction) against rho: 0.25 % of the change.
    allowed = GRAVITY * of_contraction * abs(salinity - 35.0) + 0.003 * abs(change)
    assert abs(found_change - change) <= allowed
    assert allowed < 0.2 * abs(change)


@pytest.mark.parametrize("equation_of_state", ["linear", "quadratic"])
@pytest.mark.parametrize("theta", [-3.0, 0.0, 8.0, 23.0])
def test_the_thermal_expansion_of_the_surface_flux_is_the_slope_of_the_buoyancy(
    equation_of_state: str, theta: float
) -> None:
    """db/dTheta = g alpha: for a quadratic the central difference is exact, up to the rounding of b over the interval."""
    constants = box({"water.equation_of_state": equation_of_state}).constants
    slope = (buoyancy(theta + 0.5, 0.3, constants) - buoyancy(theta - 0.5, 0.3, constants)) / 1.0
    assert slope == pytest.approx(constants.gravity * thermal_expansion(theta, constants), abs=8.0 * EPS)


def test_water_of_the_abyss_has_no_buoyancy() -> None:
    assert buoyancy(0.0, 0.0, ocean_water()) == 0.0


def test_the_layer_has_the_buoyancy_of_its_temperature_and_salinity() -> None:
    """From contents to buoyancy in every cell, ghost cells included; and as the result file reports it."""
    model = box({
        "water.equation_of_state": "quadratic",
        "layers.0.initial_temperature_degC": {"shape": "linear", "value_at_origin": 15.0, "slope_per_deg": 2.0},
        "layers.0.initial_salinity_g_per_kg": {"shape": "linear", "value_at_origin": 35.0, "slope_per_deg": 0.3},
    })  # fmt: skip
    found, P, d = (np.empty((1, *model.grid.shape)) for _ in range(3))
    h, heat, salt = model.state[:3]
    layer_pressure(0, h.shape[1], h, heat, salt, model.constants, found, P, d)
    expected = np.vectorize(lambda t, s: buoyancy(t, s, model.constants))(heat / h, salt / h)
    assert np.abs(found - expected).max() <= 4.0 * EPS * np.abs(expected).max()
    assert np.abs(model.buoyancy[0] - model.grid.centres(found)[0]).max() <= 8.0 * EPS * np.abs(expected).max()
