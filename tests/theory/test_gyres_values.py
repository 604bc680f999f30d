"""The wind-driven gyre formulas give the worked numbers."""

import numpy as np
import pytest

from tests.theory.gyres import (
    GyreBasin,
    ekman_transport,
    separation_stress,
    stress_for_ekman_velocity,
    sverdrup_thickness,
    sverdrup_thickness_from_stress,
    sverdrup_transport,
    western_wall_thickness,
)
from tests.theory.munk_gyre import (
    MunkGyre,
    Side,
    munk_overshoot,
    munk_profile,
    munk_velocity_profile,
    munk_width,
)
from tests.theory.printed import rounds_to
from tests.theory.stommel_gyre import StommelGyre, StommelThickness

BASIN = GyreBasin(length=6e6, width=3e6, stress=0.1, beta=2e-11)
WEAK_BASIN = GyreBasin(length=6e6, width=3e6, stress=0.02, beta=2e-11)
SVERDRUP = 1e6
F0 = 6e-5
SIDES: tuple[Side, Side] = ("no_slip", "free_slip")


def test_ekman_transport() -> None:
    # Ekman 1905 (from memory).
    u, v = ekman_transport(0.1, 0.0, 1e-4, 1025.0)
    assert u == 0.0
    assert rounds_to(-v, "0.975610")
    assert rounds_to(-v * 6e6 / SVERDRUP, "5.85366")
    assert ekman_transport(0.0, 0.1, 1e-4, 1025.0)[0] == -v


def test_sverdrup_transport() -> None:
    # Sverdrup 1947 (from memory).
    assert rounds_to(BASIN.sverdrup_streamfunction / SVERDRUP, "30.6497")
    curl = -float(BASIN.zonal_stress_slope(np.array(1.5e6)))
    southward = sverdrup_transport(curl, BASIN.beta, BASIN.density) * BASIN.length
    assert southward == pytest.approx(-BASIN.sverdrup_streamfunction, rel=1e-14)
    # Against friction: psi at mid-basin is half of it.
    assert rounds_to(0.5 * BASIN.sverdrup_streamfunction / SVERDRUP, "15.3248")


# Stommel 1948 (from memory); numbers of the exact solution.
@pytest.mark.parametrize(("drag", "psi", "x"), [(1e-6, "24.9617", "246589"), (2e-7, "29.3045", "64287.0")])
def test_stommel_gyre(drag: float, psi: str, x: str) -> None:
    largest, place = StommelGyre(BASIN, drag).maximum()
    assert rounds_to(largest / SVERDRUP, psi)
    assert rounds_to(place, x)


def test_details_of_the_stommel_gyre() -> None:
    # Stommel 1948 (from memory).
    gyre = StommelGyre(BASIN, 1e-6)
    a, d = gyre.rates
    assert rounds_to(a, "5.46816e-8")
    assert rounds_to(d, "-2.00547e-5")
    assert rounds_to(gyre.weights[0], "0.720298")
    centre = gyre.streamfunction(np.array(3e6), np.array(1.5e6)) / SVERDRUP
    assert rounds_to(float(centre), "14.0953")
    assert rounds_to(StommelGyre(WEAK_BASIN, 1e-6).maximum()[0] / SVERDRUP, "4.99233")
    # Friction lowers the interior below the Sverdrup value by 8.0 and 1.6 per cent.
    for drag, lost in ((1e-6, "8.0"), (2e-7, "1.6")):
        psi = StommelGyre(BASIN, drag).streamfunction(np.array(3e6), np.array(1.5e6))
        assert rounds_to(100.0 * (1.0 - 2.0 * float(psi) / BASIN.sverdrup_streamfunction), lost)


def test_stommels_own_basin() -> None:
    # Parameters of Stommel 1948 (from memory).
    basin = GyreBasin(length=1e7, width=2e6 * np.pi, stress=0.1, beta=1e-11, density=1000.0)
    psi, x = StommelGyre(basin, 1e-6).maximum()
    assert rounds_to(psi / SVERDRUP, "41.9086")
    assert rounds_to(x, "471144")


def test_stommel_gyre_balances_vorticity_and_has_walls() -> None:
    """Derivatives by central differences of 100 m: error (100 m / 50 km)^2 / 6 of the terms, under 1e-6 of them."""
    gyre = StommelGyre(BASIN, 1e-6)
    x, y = np.linspace(1e4, 5.99e6, 200), 0.7e6
    step = 100.0
    curvature = (gyre.transport_y(x + step, y) - gyre.transport_y(x - step, y)) / (2 * step)
    shear = -(gyre.transport_x(x, y + step) - gyre.transport_x(x, y - step)) / (2 * step)
    curl = -BASIN.zonal_stress_slope(y) / BASIN.density
    residual = gyre.drag * (curvature + shear) + BASIN.beta * gyre.transport_y(x, y) - curl
    assert np.abs(residual).max() < 1e-6 * np.abs(BASIN.beta * gyre.transport_y(x, y)).max()
    walls = gyre.profile(np.array([0.0, BASIN.length]))
    assert np.abs(walls).max() < 1e-14 * gyre.scale


STOMMEL_THICKNESS = StommelThickness(StommelGyre(WEAK_BASIN, 1e-6), F0, 0.02, 500.0)


# Derived: exact thickness of the Stommel gyre, tau0 = 0.02, r = 1e-6, g' = 0.02, f = 6e-5 + beta y, mean 500 m.
@pytest.mark.parametrize(
    ("x", "y", "h"),
    [
        (0.0, 0.0, "494.531"),
        (0.0, 1.5e6, "484.408"),
        (0.0, 3e6, "474.068"),
        (6e6, 0.0, "484.307"),
        (6e6, 1.5e6, "484.408"),
        (6e6, 3e6, "484.508"),
        (3e6, 1.5e6, "509.924"),
        (247.5e3, 1.5e6, "528.755"),
    ],
)
def test_thickness_of_the_stommel_gyre(x: float, y: float, h: str) -> None:
    assert rounds_to(float(STOMMEL_THICKNESS.thickness(np.array(x), np.array(y))), h)


def test_thickness_constant_and_mean_of_the_stommel_gyre() -> None:
    """Midpoints err by spacing^2/24 times the difference of the slopes at the ends over the length: 3e-5 m in x
    (a slope of 1e-3 at the western wall) and 2e-5 m in y (slopes of 3e-5)."""
    assert rounds_to(STOMMEL_THICKNESS.constant(), "2445.61")
    x = (np.arange(2400) + 0.5) * 2500.0
    y = (np.arange(600) + 0.5)[:, np.newaxis] * 5e3
    h = STOMMEL_THICKNESS.thickness(x, y)
    assert h.mean() == pytest.approx(500.0, abs=1e-4)
    assert rounds_to(float(h.max()), "528.755")


def test_thickness_of_the_stommel_gyre_balances_both_momentum_equations() -> None:
    """P = g' h^2/2 by central differences of 100 m, which leave 1e-6 of the largest term (as above)."""
    field, gyre = STOMMEL_THICKNESS, STOMMEL_THICKNESS.gyre
    x, y = np.linspace(1e4, 5.9e6, 100), np.linspace(1e5, 2.9e6, 30)[:, np.newaxis]
    step = 100.0
    pressure = field.pressure_without_constant
    slope_x = (pressure(x + step, y) - pressure(x - step, y)) / (2 * step)
    slope_y = (pressure(x, y + step) - pressure(x, y - step)) / (2 * step)
    f = F0 + WEAK_BASIN.beta * y
    u, v = gyre.transport_x(x, y), gyre.transport_y(x, y)
    zonal = -f * v + slope_x - WEAK_BASIN.zonal_stress(y) / WEAK_BASIN.density + gyre.drag * u
    meridional = f * u + slope_y + gyre.drag * v
    largest = np.abs(f * v).max()
    assert np.abs(zonal).max() < 1e-6 * largest
    assert np.abs(meridional).max() < 1e-6 * largest


def test_a_layer_too_thin_for_its_gyre_is_refused() -> None:
    with pytest.raises(ValueError, match="outcrops"):
        StommelThickness(StommelGyre(BASIN, 1e-6), F0, 0.02, 50.0).constant()


def test_munk_layer() -> None:
    # Munk 1950 (from memory); values of the closed form.
    assert rounds_to(munk_width(1000.0, 2e-11), "36840.3")
    assert rounds_to(munk_width(5000.0, 2e-11), "62996.1")
    for side, xi, value in zip(SIDES, ("3.62760", "2.41840"), ("1.16303", "1.29844"), strict=True):
        largest, place = munk_overshoot(side)
        assert rounds_to(place, xi)
        assert rounds_to(largest, value)
        assert abs(float(munk_velocity_profile(np.array(place), side))) < 1e-15
    # First zero of v, no-slip, A = 5000.
    assert rounds_to(munk_overshoot("no_slip")[1] * munk_width(5000.0, 2e-11) / 1e3, "228.5")


def test_fastest_current_of_the_munk_layer() -> None:
    # Derived: no-slip xi = 2 pi/(3 sqrt 3), free-slip at the wall.
    xi = 2.0 * np.pi / (3.0 * np.sqrt(3.0))
    assert rounds_to(xi, "1.20920")
    assert rounds_to(float(munk_velocity_profile(np.array(xi), "no_slip")), "0.546293")
    assert munk_velocity_profile(np.linspace(0.0, 10.0, 10001), "no_slip").max() < 0.546294
    assert float(munk_velocity_profile(np.array(0.0), "free_slip")) == pytest.approx(1.0, rel=1e-15)
    step = 1e-5
    for side in SIDES:
        slope = (munk_profile(np.array(xi + step), side) - munk_profile(np.array(xi - step), side)) / (2 * step)
        assert float(slope) == pytest.approx(float(munk_velocity_profile(np.array(xi), side)), abs=1e-9)


# Derived: exact closed basin, tau0 = 0.1.
@pytest.mark.parametrize(
    ("side", "viscosity", "psi", "x"),
    [
        ("no_slip", 1000.0, "34.7254", "132170"),
        ("no_slip", 5000.0, "34.0353", "224493"),
        ("free_slip", 1000.0, "39.2958", "88465.5"),
        ("free_slip", 5000.0, "38.8695", "150766"),
    ],
)
def test_munk_gyre_of_a_closed_basin(side: Side, viscosity: float, psi: str, x: str) -> None:
    largest, place = MunkGyre(BASIN, viscosity, side).maximum()
    assert rounds_to(largest / SVERDRUP, psi)
    assert rounds_to(place, x)
    rows = MunkGyre(BASIN, viscosity, side).streamfunction(place, np.array([0.0, 0.5e6, 1.5e6]))
    assert rows == pytest.approx([0.0, 0.5 * largest, largest], rel=1e-13)


@pytest.mark.parametrize(("side", "order"), [("no_slip", 1), ("free_slip", 2)])
def test_munk_gyre_meets_its_equation_and_walls(side: Side, order: int) -> None:
    """Round-off: terms of size beta psi / delta_M, some 1e3 operations."""
    gyre = MunkGyre(BASIN, 5000.0, side)
    wavenumber, width = BASIN.meridional_wavenumber, munk_width(5000.0, BASIN.beta)
    x = np.linspace(0.0, BASIN.length, 301)
    slope = gyre.profile_derivative(x, 1)
    friction = gyre.profile_derivative(x, 4) - 2.0 * wavenumber**2 * gyre.profile_derivative(x, 2)
    friction += wavenumber**4 * gyre.profile(x)
    residual = gyre.viscosity * friction - BASIN.beta * slope - BASIN.stress * wavenumber / BASIN.density
    scale = BASIN.sverdrup_streamfunction
    assert np.abs(residual).max() < 1e-12 * BASIN.beta * scale / width
    walls = np.array([0.0, BASIN.length])
    assert np.abs(gyre.profile(walls)).max() < 1e-12 * scale
    assert np.abs(gyre.profile_derivative(walls, order)).max() < 1e-12 * scale / width**order


def test_munk_friction_hardly_touches_a_free_slip_interior() -> None:
    # Derived: A = 5000 lowers mid-basin psi by 0.05 per cent with free-slip walls and 2.1 with no-slip walls.
    for side, lost in zip(SIDES, ("2.1", "0.05"), strict=True):
        psi = float(MunkGyre(BASIN, 5000.0, side).streamfunction(np.array(3e6), np.array(1.5e6)))
        assert rounds_to(100.0 * (1.0 - 2.0 * psi / BASIN.sverdrup_streamfunction), lost)


# Derived, after Pedlosky 1996 (from memory): f = beta y, w_E = -1e-6 sin(pi (y - 1500 km)/3000 km), h_e = 400 m.
@pytest.mark.parametrize(
    ("y", "thicknesses"),
    [
        (3e6, ("421.900", "462.601", "517.687")),
        (2e6, ("404.969", "414.729", "428.952")),
        (4e6, ("419.524", "456.070", "505.964")),
    ],
)
def test_interior_thickness(y: float, thicknesses: tuple[str, ...]) -> None:
    ekman_velocity = -1e-6 * np.sin(np.pi * (y - 1.5e6) / 3e6)
    h = sverdrup_thickness(np.array([1e6, 3e6, 6e6]), ekman_velocity, 2e-11 * y, 2e-11, 0.02, 400.0)
    for value, text in zip(h, thicknesses, strict=True):
        assert rounds_to(value, text)


def test_stress_for_a_given_ekman_velocity() -> None:
    """Central differences of 1 km: error (1 km pi / 3000 km)^2 / 6 of W."""
    stress = stress_for_ekman_velocity(np.array(4.5e6), 1.5e6, 3e6, 1e-6, np.array(9e-5))
    assert rounds_to(float(stress), "0.176185")
    y = np.linspace(1.6e6, 4.4e6, 29)
    sides = [y - 1e3, y + 1e3]
    scaled = [stress_for_ekman_velocity(s, 1.5e6, 3e6, 1e-6, 2e-11 * s) / (1025.0 * 2e-11 * s) for s in sides]
    ekman_velocity = -(scaled[1] - scaled[0]) / 2e3
    assert ekman_velocity == pytest.approx(-1e-6 * np.sin(np.pi * (y - 1.5e6) / 3e6), abs=1e-12)


# Derived: tau0 = 0.05, f = 6e-5 + beta y, h_e = 400 m.
@pytest.mark.parametrize(
    ("quarter", "thicknesses", "western"),
    [
        (1, ("420.707", "459.330", "494.948"), "425.083"),
        (2, ("427.770", "478.500", "524.344"), "400.000"),
        (3, ("418.944", "454.470", "487.413"), "373.235"),
    ],
)
def test_interior_thickness_of_the_closed_basin(quarter: int, thicknesses: tuple[str, ...], western: str) -> None:
    basin = GyreBasin(length=6e6, width=3e6, stress=0.05, beta=2e-11)
    y = np.array(0.25 * quarter * basin.width)
    stress, slope = float(basin.zonal_stress(y)), float(basin.zonal_stress_slope(y))
    distance = np.array([1e6, 3e6, 5e6])
    f = F0 + basin.beta * float(y)
    h = sverdrup_thickness_from_stress(distance, stress, slope, f, basin.beta, 0.02, 400.0)
    for value, text in zip(h, thicknesses, strict=True):
        assert rounds_to(value, text)
    assert rounds_to(western_wall_thickness(stress, basin.length, 0.02, 400.0), western)


def test_zonal_momentum_identity_and_separation() -> None:
    # Identity derived; separation Parsons 1969 (from memory), re-derived.
    assert rounds_to(western_wall_thickness(-0.05, 6e6, 0.02, 300.0), "345.352")
    assert rounds_to(separation_stress(300.0, 6e6, 0.02), "0.153750")
    assert rounds_to(separation_stress(500.0, 6e6, 0.02), "0.427083")
    assert western_wall_thickness(0.9999999 * separation_stress(300.0, 6e6, 0.02), 6e6, 0.02, 300.0) < 0.1
    with pytest.raises(ValueError, match="left the western wall"):
        western_wall_thickness(0.16, 6e6, 0.02, 300.0)
