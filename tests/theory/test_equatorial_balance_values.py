"""The equatorial balance and the Yoshida jet give the worked numbers."""

import numpy as np
import pytest
import scipy.special

from tests.theory.equatorial_balance import (
    linear_tilt,
    outcrop_mean_thickness,
    square_slope,
    tilted_thickness,
    tilted_thickness_on_centres,
)
from tests.theory.equatorial_waves import equatorial_radius, equatorial_time
from tests.theory.printed import rounds_to
from tests.theory.yoshida_jet import (
    yoshida_function,
    yoshida_function_slope,
    yoshida_rates,
    yoshida_rates_on_c_grid,
)

GRAVITY, LENGTH, MEAN, BETA = 0.04, 15e6, 150.0, 2.28e-11
DAY = 86400.0


def test_tilt_under_a_uniform_trade_wind() -> None:
    # Derived: exact nonlinear state of rest.
    h = tilted_thickness(np.array([0.0, LENGTH, 0.5 * LENGTH]), -0.05, LENGTH, GRAVITY, MEAN)
    for value, text in zip(h, ("205.220", "74.3644", "154.346"), strict=True):
        assert rounds_to(value, text)
    assert rounds_to(linear_tilt(-0.05, LENGTH, GRAVITY, MEAN), "-121.951")
    assert rounds_to(h[0] - h[1], "130.856")
    assert rounds_to(outcrop_mean_thickness(-0.05, LENGTH, GRAVITY), "127.515")


@pytest.mark.parametrize("stress", [-0.05, 0.03])
def test_tilted_layer_keeps_its_mean_and_balances_the_wind(stress: float) -> None:
    """Midpoints of 2000 cells err by (1/2000)^2/24 of the curvature, under 1e-5 m; brentq leaves 1e-10 m2 of h^2."""
    x = (np.arange(2000) + 0.5) * LENGTH / 2000
    h = tilted_thickness(x, stress, LENGTH, GRAVITY, MEAN)
    assert h.mean() == pytest.approx(MEAN, abs=1e-5)
    assert np.diff(h**2) / np.diff(x) == pytest.approx(square_slope(stress, GRAVITY), rel=1e-9)


def test_tilt_on_the_grid() -> None:
    # Derived: 150 cells, mean of centre values 150 m.
    h = tilted_thickness_on_centres(150, -0.05, LENGTH, GRAVITY, MEAN)
    assert rounds_to(h[0], "204.923")
    assert rounds_to(h[-1], "75.1793")
    assert h.mean() == pytest.approx(MEAN, rel=1e-13)
    force = GRAVITY * np.diff(h) / (LENGTH / 150) - (-0.05) / (1025.0 * 0.5 * (h[1:] + h[:-1]))
    assert np.abs(force).max() < 1e-12 * 0.05 / (1025.0 * 75.0) * 150  # round-off of h over a small difference
    eastward = tilted_thickness_on_centres(150, 0.05, LENGTH, GRAVITY, MEAN)
    assert eastward == pytest.approx(h[::-1], rel=1e-13)


def test_a_layer_that_would_outcrop_is_refused() -> None:
    with pytest.raises(ValueError, match="outcrops"):
        tilted_thickness(np.array(0.0), -0.05, LENGTH, GRAVITY, 127.5)
    with pytest.raises(ValueError, match="outcrops"):
        tilted_thickness_on_centres(150, -0.05, LENGTH, GRAVITY, 126.0)


def test_yoshida_function() -> None:
    # Yoshida 1959, integral form (from memory); values derived.
    slope = float(yoshida_function_slope(np.array(0.0)))
    assert rounds_to(slope, "-0.599070")
    assert slope == pytest.approx(-0.25 * scipy.special.beta(0.5, 0.75), rel=1e-13)
    assert rounds_to(float(yoshida_function(np.array(1.0))), "-0.458771")
    assert rounds_to(float(yoshida_function(np.array(1.47993))), "-0.509161")
    assert yoshida_function_slope(np.array(1.47992)) < 0 < yoshida_function_slope(np.array(1.47994))
    jet = {y: float(1.0 + y * yoshida_function(np.array(y))) for y in (1.0, 2.0, 2.36722, 2.36724, 2.93)}
    assert rounds_to(jet[1.0], "0.541229")
    assert rounds_to(jet[2.0], "0.0564311")
    assert jet[2.36722] > 0 > jet[2.36724]
    assert rounds_to(jet[2.93], "-0.0198476")


def test_yoshida_function_solves_its_equation() -> None:
    """Second derivative as the central difference of V', spacing 1e-4: error 1e-8/6 of V'''', plus round-off / 1e-4."""
    y = np.linspace(-12.0, 12.0, 241)
    step = 1e-4
    curvature = (yoshida_function_slope(y + step) - yoshida_function_slope(y - step)) / (2.0 * step)
    profile = yoshida_function(y)
    assert np.abs(curvature - y**2 * profile - y).max() < 1e-7
    assert (yoshida_function(y + step) - yoshida_function(y - step)) / (2.0 * step) == pytest.approx(
        yoshida_function_slope(y), abs=1e-8
    )


def test_yoshida_jet_in_dimensions() -> None:
    # Yoshida 1959; g' = 0.04, H = 150, tau = +0.05.
    c = float(np.sqrt(GRAVITY * MEAN))
    radius, time = equatorial_radius(c, BETA), equatorial_time(c, BETA)
    assert rounds_to(c, "2.44949")
    assert rounds_to(radius, "327771")
    assert rounds_to(time, "133812")
    assert rounds_to(0.05 / (1025.0 * MEAN) * time, "0.0435161")
    rates = yoshida_rates(np.array([0.0, 1.47993 * radius]), 0.05, MEAN, GRAVITY, BETA)
    assert rounds_to(rates.acceleration[0] * DAY, "0.0280976")
    assert rounds_to(rates.deepening[0] * DAY, "1.03077")
    assert rounds_to(rates.velocity_y[1], "-0.0221567")
    assert rounds_to(1.47993 * radius / 1e3, "485")


def test_yoshida_jet_on_the_grid_converges_to_the_exact_one() -> None:
    """Second order in dy, with a next term of relative size (dy/Le)^2, 9 % at 100 km, hence ratios within 10 % of 4.

    Walls 12 Le away feel a flow that falls like 1/y and change the jet by less than the error at 25 km.
    """
    errors = []
    for dy in (100e3, 50e3, 25e3):
        y_face = np.arange(-4e6, 4e6 + 1.0, dy)
        y_centre = 0.5 * (y_face[1:] + y_face[:-1])
        grid = yoshida_rates_on_c_grid(y_face, 0.05, MEAN, GRAVITY, BETA)
        exact = yoshida_rates(y_centre, 0.05, MEAN, GRAVITY, BETA)
        near = np.abs(y_centre) < 1.5e6
        errors.append(np.abs(grid.acceleration - exact.acceleration)[near].max() / exact.acceleration.max())
        assert grid.deepening.sum() == pytest.approx(0.0, abs=1e-12 * np.abs(grid.deepening).sum())
    assert errors[0] / errors[1] == pytest.approx(4.0, rel=0.1)
    assert errors[1] / errors[2] == pytest.approx(4.0, rel=0.1)


# Derived: the jet on the equator over the exact one when a row of u lies on the equator.
@pytest.mark.parametrize(("dy", "ratio"), [(25e3, "0.99913"), (50e3, "0.9965")])
def test_grid_slows_the_yoshida_jet(dy: float, ratio: str) -> None:
    y_face = dy * (np.arange(round(8e6 / dy) + 2) - 0.5) - 4e6
    grid = yoshida_rates_on_c_grid(y_face, 0.05, MEAN, GRAVITY, BETA)
    exact = yoshida_rates(np.array(0.0), 0.05, MEAN, GRAVITY, BETA)
    assert rounds_to(float(grid.acceleration.max() / exact.acceleration), ratio)
