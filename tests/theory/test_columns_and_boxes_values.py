"""The column, transformation and two-box formulas give the worked numbers."""

import numpy as np
import pytest

from tests.theory.columns import (
    advective_diffusive_scale,
    advective_diffusive_slab,
    advective_thermocline_scale,
    balanced_upwelling_thickness,
    diffusive_entrainment_thickness,
    diffusive_thermocline_scale,
    restored_slab_temperature,
    restoring_time,
    upwelling_column,
    upwelling_entrainment_thickness,
)
from tests.theory.printed import rounds_to
from tests.theory.transformation import (
    heat_transport,
    surface_density_flux,
    transformation_by_density,
    transformation_by_heat_loss,
)
from tests.theory.two_box import (
    fixed_temperature_states,
    fold_in_ratio,
    fold_in_resistance,
    freshwater_fold,
    steady_states,
)

DAY, SVERDRUP = 86400.0, 1e6


def test_advective_diffusive_abyss() -> None:
    # Munk 1966.
    scale = advective_diffusive_scale(1.3e-4, 1.4e-7)
    assert rounds_to(scale, "928.571")
    assert rounds_to(1.4e-7 * 365.25 * DAY, "4.41806")
    for depth, text in ((500.0, "0.583645"), (1000.0, "0.340642"), (2000.0, "0.116037")):
        assert rounds_to(float(np.exp(-depth / scale)), text)
    slab = advective_diffusive_slab(np.array([0.0, 1500.0, 3000.0]), 3000.0, 1.1, 4.5, 1.3e-4, 1.4e-7)
    assert rounds_to(slab[1], "1.66386")
    assert slab[[0, 2]] == pytest.approx([1.1, 4.5], rel=1e-15)


def test_thermocline_scales() -> None:
    # Textbook scaling (from memory).
    assert rounds_to(advective_thermocline_scale(1e-4, 1e-6, 5e6, 2e-11, 0.02), "353.553")
    assert rounds_to(diffusive_thermocline_scale(1e-4, 1e-5, 5e6, 2e-11, 0.02), "107.722")


def test_entraining_columns_solve_their_equations() -> None:
    """Central differences of an hour: error below (hour * w / l)^2, some 1e-8 of the rate; round-off 1e-12 m / hour."""
    time, hour = np.linspace(10.0, 900.0, 90) * DAY + 0.5, 3600.0

    def slope(thickness: object) -> np.ndarray:
        assert callable(thickness)
        return np.asarray((thickness(time + hour) - thickness(time - hour)) / (2.0 * hour))

    kappa, w, mixed, half = 1e-4, 5e-6, 50.0, 30.0
    assert slope(lambda t: diffusive_entrainment_thickness(t, 100.0, kappa)) == pytest.approx(
        kappa / diffusive_entrainment_thickness(time, 100.0, kappa), rel=1e-7
    )
    for initial in (20.0, 80.0):
        h = upwelling_entrainment_thickness(time, initial, w, mixed, half)
        share = np.where(h > mixed, np.exp(-(h - mixed) / half), 1.0)
        away = np.abs(h - mixed) > w * hour  # phi has a kink at Hm
        rate = slope(lambda t, start=initial: upwelling_entrainment_thickness(t, start, w, mixed, half))
        assert away.sum() > 80
        assert rate[away] == pytest.approx(w * share[away], rel=1e-6)
        assert upwelling_entrainment_thickness(np.array(0.0), initial, w, mixed, half) == pytest.approx(initial)


def test_upwelling_balances_destruction_at_the_logarithmic_depth() -> None:
    h = balanced_upwelling_thickness(1e-5, 1e-6, 50.0, 30.0)
    assert 1e-5 * np.exp(-(h - 50.0) / 30.0) == pytest.approx(1e-6, rel=1e-13)
    assert balanced_upwelling_thickness(1e-6, 1e-6, 50.0, 30.0) == 50.0


def test_restored_slab() -> None:
    # Haney 1971 for the form of the flux; numbers derived.
    assert rounds_to(restoring_time(50.0, 40.0) / DAY, "59.1965")
    assert rounds_to(restoring_time(50.0, 35.0) / DAY, "67.6532")
    scale = restoring_time(50.0, 40.0)
    cooled = restored_slab_temperature(np.array([0.0, scale]), 20.0, 28.0, scale)
    assert cooled == pytest.approx([20.0, 28.0 - 8.0 / np.e], rel=1e-15)


def test_upwelling_column() -> None:
    # Derived.
    column = upwelling_column(40.0, 28.0, 20.0, 1e-5)
    assert rounds_to(1025.0 * 3991.868 * 1e-5, "40.9166")
    assert rounds_to(column.temperature, "23.9547")
    assert rounds_to(column.heat_gain, "161.813")
    assert column.heat_gain == pytest.approx(1025.0 * 3991.868 * 1e-5 * (column.temperature - 20.0), rel=1e-13)


def test_transformation_by_heat_loss() -> None:
    # Walin 1982.
    assert rounds_to(transformation_by_heat_loss(100.0 * 5e12, 15.0) / SVERDRUP, "8.14664")
    assert rounds_to(transformation_by_heat_loss(0.5e15, 15.0, heat_capacity=4000.0) / SVERDRUP, "8.13008")
    assert rounds_to(transformation_by_heat_loss(1e15, 15.0) / SVERDRUP, "16.2933")
    assert rounds_to(heat_transport(SVERDRUP, 1.0) / 1e15, "0.00409166")


def test_transformation_in_density_classes() -> None:
    # Walin 1982, extended to density; expansion and density at 12.5 degC by TEOS-10.
    flux = surface_density_flux(-100.0, 1.90590e-4, 3991.868)
    assert rounds_to(flux, "4.77446e-6")
    volume = transformation_by_density(flux, 5e6, 1026.366, 1.90590e-4, 15.0 / 3e6)
    assert rounds_to(volume / SVERDRUP, "24.4074")
    salty = surface_density_flux(0.0, 0.0, 3991.868, 1e-8, 7.5e-4, 35.0, 1000.0)
    assert salty == pytest.approx(2.625e-7, rel=1e-14)
    assert surface_density_flux(0.0, 0.0, 3991.868, 1e-8, 7.5e-4, 35.0) == pytest.approx(1.025 * salty, rel=1e-14)


def test_steady_states_of_the_two_boxes() -> None:
    # Stommel 1961 prints -1.1, -0.30 and +0.23, read from a graph; exact roots derived.
    states = steady_states(2.0, 1.0 / 6.0, 0.2)
    expected = [
        ("-1.06791", "0.134999", "0.483580", True),
        ("-0.307027", "0.351845", "0.765095", False),
        ("0.219090", "0.432051", "0.820284", True),
    ]
    assert len(states) == 3
    for state, (flow, salinity, temperature, stable) in zip(states, expected, strict=True):
        assert rounds_to(state.flow, flow)
        assert rounds_to(state.salinity, salinity)
        assert rounds_to(state.temperature, temperature)
        assert (state.growth_rate < 0) is stable
        assert 0.2 * state.flow == pytest.approx(2.0 * state.salinity - state.temperature, abs=1e-13)


def test_growth_rate_is_that_of_the_linearised_boxes() -> None:
    """Jacobian by central differences of 1e-6, exact to 1e-9 since the tendency is quadratic but for round-off."""
    ratio, delta, resistance = 2.0, 1.0 / 6.0, 0.2

    def tendency(state: np.ndarray) -> np.ndarray:
        y, x = state
        flow = abs(-y + ratio * x) / resistance
        return np.array([1.0 - y - flow * y, delta * (1.0 - x) - flow * x])

    for state in steady_states(ratio, delta, resistance):
        place = np.array([state.temperature, state.salinity])
        assert np.abs(tendency(place)).max() < 1e-13
        steps = 1e-6 * np.eye(2)
        jacobian = np.column_stack([(tendency(place + s) - tendency(place - s)) / 2e-6 for s in steps])
        assert state.growth_rate == pytest.approx(np.linalg.eigvals(jacobian).real.max(), abs=1e-8)


def test_folds_of_the_two_boxes() -> None:
    # Derived.
    fold = fold_in_ratio(1.0 / 6.0, 0.2)
    assert fold.parameter == pytest.approx(7.0 / 3.0, rel=1e-13)
    assert fold.flow == pytest.approx(-2.0 / 3.0, rel=1e-7)  # a maximum: its place is known to the root of round-off
    resistance = fold_in_resistance(2.0, 1.0 / 6.0)
    assert rounds_to(resistance.parameter, "0.333801")
    assert rounds_to(resistance.flow, "-0.483701")


@pytest.mark.parametrize(
    ("ratio", "resistance", "count"),
    [(0.99, 0.2, 1), (1.01, 0.2, 3), (2.333, 0.2, 3), (2.334, 0.2, 1), (2.0, 0.3338, 3), (2.0, 0.33381, 1)],
)
def test_number_of_states_changes_at_the_folds_and_the_corner(ratio: float, resistance: float, count: int) -> None:
    # Derived: three states for 1 < R < 7/3 at lambda = 1/5.
    assert len(steady_states(ratio, 1.0 / 6.0, resistance)) == count


def test_boxes_of_fixed_temperature() -> None:
    # Derived.
    for value, text in zip(fixed_temperature_states(0.2), ("0.276393", "0.723607", "1.17082"), strict=True):
        assert rounds_to(value, text)
    assert fixed_temperature_states(0.25)[:2] == pytest.approx([0.5, 0.5])
    assert fixed_temperature_states(0.2501).size == 1
    fold = freshwater_fold(20.0 * SVERDRUP, 1.7e-4, 20.0, 7.6e-4, 35.0)
    assert rounds_to(fold.freshwater_flux / SVERDRUP, "0.639098")
    assert rounds_to(fold.overturning / SVERDRUP, "10")
    assert rounds_to(fold.salinity_difference, "2.23684")
