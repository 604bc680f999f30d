"""The default thermal expansion is the straight line nearest to TEOS-10 at the surface, and errs as much as stated."""

import gsw
import numpy as np
import pytest

from oceanbox import config

WATER = config.loads("name: a").water
TEMPERATURE = np.linspace(0.0, 30.0, 3001)
"""Conservative temperature [degC]; the expansion bends by less than 1e-6 K-2 per K, so 0.01 K resolves its extrema."""


def default_expansion(temperature: np.ndarray) -> np.ndarray:
    return WATER.thermal_expansion_at_0degC_per_K + WATER.thermal_expansion_slope_per_K2 * temperature


def test_the_default_coefficients_are_the_least_squares_fit() -> None:
    """The fit is over all temperatures, not over samples: projection on Legendre polynomials by Gauss quadrature."""
    position, weight = np.polynomial.legendre.leggauss(40)
    expansion = gsw.alpha(35.0, 15.0 + 15.0 * position, 0.0)
    middle, half_rise = np.sum(weight * expansion) / 2.0, np.sum(weight * expansion * position) * 1.5
    slope, intercept = half_rise / 15.0, middle - half_rise
    assert float(f"{intercept:.2e}") == WATER.thermal_expansion_at_0degC_per_K
    assert float(f"{slope:.2e}") == WATER.thermal_expansion_slope_per_K2


def test_the_largest_error_of_the_expansion_is_the_stated_one() -> None:
    error = np.abs(default_expansion(TEMPERATURE) - gsw.alpha(35.0, TEMPERATURE, 0.0))
    assert float(f"{error.max():.1e}") == 1.6e-5 and TEMPERATURE[error.argmax()] == 0.0
    assert float(f"{error[TEMPERATURE >= 2.0].max():.1e}") == 1.2e-5


def test_the_largest_error_of_the_buoyancy_is_the_stated_one() -> None:
    abyss, gravity = WATER.abyss_temperature_degC, WATER.gravity_m_per_s2
    density = gsw.rho(35.0, TEMPERATURE, 0.0)
    exact = gravity * (gsw.rho(35.0, abyss, 0.0) - density) / WATER.reference_density_kg_per_m3
    warming = TEMPERATURE - abyss
    quadratic = WATER.thermal_expansion_slope_per_K2 * (TEMPERATURE**2 - abyss**2) / 2.0
    approximate = gravity * (WATER.thermal_expansion_at_0degC_per_K * warming + quadratic)
    error = np.abs(approximate - exact)
    assert float(f"{error.max():.1e}") == 7.9e-4
    assert TEMPERATURE[error.argmax()] == pytest.approx(23.0, abs=0.5)


def test_the_stated_errors_appear_where_the_coefficients_are_documented() -> None:
    text = type(WATER).__doc__ or ""
    for stated in ("1.6e-5 K-1,\n    at 0 degC", "1.2e-5 K-1 above 2 degC", "7.9e-4 m s-2, at 23 degC"):
        assert stated in text


def test_the_default_haline_contraction_lies_between_its_values_in_cold_and_warm_water() -> None:
    warm, cold = gsw.beta(35.0, 30.0, 0.0), gsw.beta(35.0, 5.0, 0.0)
    assert warm < WATER.haline_contraction_kg_per_g < cold


def test_the_heat_capacity_is_that_of_teos10_to_its_seven_digits() -> None:
    exact = 3991.86795711963  # J kg-1 K-1, by definition: IOC, SCOR and IAPSO 2010, section 3.3
    assert float(f"{exact:.7g}") == WATER.heat_capacity_J_per_kg_K
