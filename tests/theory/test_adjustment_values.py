"""The mid-latitude adjustment formulas give the worked numbers."""

import numpy as np
import pytest

from tests.theory.adjustment import (
    adjusted_finite_step,
    adjusted_finite_step_depth,
    adjusted_step_height,
    adjusted_step_on_c_grid,
    adjusted_step_velocity,
    beta_on_sphere,
    coriolis_on_sphere,
    deformation_radius,
    dry_collapse_depth,
    dry_collapse_energies,
    dry_collapse_front,
    dry_collapse_velocity,
    highest_rossby_frequency,
    inertial_period,
    long_rossby_wave_speed,
    rossby_wave_frequency,
    step_energies,
)
from tests.theory.printed import rounds_to

GRAVITY, DEPTH, CORIOLIS = 0.02, 500.0, 1e-4
SPEED = float(np.sqrt(GRAVITY * DEPTH))


def test_sphere_gives_beta() -> None:
    # Omega = 7.292115e-5, a = 6.371e6.
    for latitude, beta in ((0.0, "2.28916e-11"), (30.0, "1.98247e-11"), (45.0, "1.61868e-11")):
        assert rounds_to(beta_on_sphere(latitude), beta)


# Gill 1982, chapters 11-12 (from memory); c = sqrt(10) m/s.
@pytest.mark.parametrize(
    ("latitude", "radius", "speed", "period"),
    [
        (15.0, "83776.1", "0.155189", None),
        (30.0, "43365.7", "0.0372820", "169.178"),
        (45.0, "30664.2", "0.0152203", "293.024"),
    ],
)
def test_deformation_radius_and_rossby_waves(latitude: float, radius: str, speed: str, period: str | None) -> None:
    length = deformation_radius(SPEED, coriolis_on_sphere(latitude))
    beta = beta_on_sphere(latitude)
    assert rounds_to(length, radius)
    assert rounds_to(-long_rossby_wave_speed(beta, length), speed)
    if period is not None:
        assert rounds_to(2.0 * np.pi / highest_rossby_frequency(beta, length) / 86400.0, period)


def test_highest_rossby_frequency_is_the_top_of_the_dispersion_curve() -> None:
    radius, beta = 40e3, 2e-11
    curve = [rossby_wave_frequency(-s / radius, 0.0, beta, radius) for s in np.linspace(0.5, 1.5, 101)]
    assert max(curve) == pytest.approx(highest_rossby_frequency(beta, radius), rel=1e-14)
    assert rossby_wave_frequency(-1e-3 / radius, 0.0, beta, radius) / (-1e-3 / radius) == pytest.approx(
        long_rossby_wave_speed(beta, radius), rel=1.1e-6
    )  # short by (k Ld)^2
    # At k = -1/Ld, l = 2/Ld the bracket is 6/Ld^2, a third of the frequency at l = 0.
    oblique = rossby_wave_frequency(-1.0 / radius, 2.0 / radius, beta, radius)
    assert oblique == pytest.approx(highest_rossby_frequency(beta, radius) / 3.0, rel=1e-14)


# From memory; f = 2 Omega sin(latitude).
@pytest.mark.parametrize(("latitude", "hours"), [(15.0, "46.2379"), (30.0, "23.9345"), (45.0, "16.9242")])
def test_inertial_period(latitude: float, hours: str) -> None:
    assert rounds_to(inertial_period(coriolis_on_sphere(latitude)) / 3600.0, hours)


def test_inertial_period_of_f_1e_4() -> None:
    assert rounds_to(inertial_period(1e-4), "62831.9")


def test_adjusted_step() -> None:
    # Rossby 1938; Gill 1982, section 7.2 (from memory); energies by integration, derived.
    radius = deformation_radius(SPEED, CORIOLIS)
    assert rounds_to(SPEED, "3.16228")
    assert rounds_to(radius, "31622.8")
    assert rounds_to(float(adjusted_step_velocity(np.array(0.0), 1.0, radius, GRAVITY, CORIOLIS)), "-6.32456e-3")
    assert rounds_to(float(adjusted_step_height(np.array(radius), 1.0, radius)), "-0.632121")
    energies = step_energies(1.0, radius, GRAVITY)
    assert rounds_to(energies.potential_released, "948.683")
    assert rounds_to(energies.kinetic_kept, "316.228")


def test_energies_are_the_integrals_of_the_profiles() -> None:
    """Trapezoidal error (spacing/Ld)^2 / 12 times the slopes at x = 0, some 1e-6 of the whole; ends at exp(-40)."""
    radius = deformation_radius(SPEED, CORIOLIS)
    x = np.linspace(0.0, 20.0, 10001) * radius
    eta = adjusted_step_height(x, 1.0, radius)
    v = adjusted_step_velocity(x, 1.0, radius, GRAVITY, CORIOLIS)
    energies = step_energies(1.0, radius, GRAVITY)
    assert np.trapezoid(GRAVITY * (1.0 - eta**2), x) == pytest.approx(energies.potential_released, rel=1e-6)
    assert np.trapezoid(DEPTH * v**2, x) == pytest.approx(energies.kinetic_kept, rel=2e-6)
    slope = np.gradient(eta, x, edge_order=2)
    assert CORIOLIS * v == pytest.approx(GRAVITY * slope, abs=3e-6 * GRAVITY / radius)


# Derived: potential-vorticity inversion on the C-grid.
@pytest.mark.parametrize(("cells_per_radius", "error"), [(4, "6.4e-3"), (5, "4.3e-3"), (10, "1.2e-3"), (20, "3.0e-4")])
def test_adjusted_step_as_the_c_grid_has_it(cells_per_radius: int, error: str) -> None:
    radius = deformation_radius(SPEED, CORIOLIS)
    width = radius / cells_per_radius
    step = adjusted_step_on_c_grid(20 * cells_per_radius, width, 1.0, DEPTH, GRAVITY, CORIOLIS)
    assert rounds_to(float(np.abs(step.eta - adjusted_step_height(step.x, 1.0, radius)).max()), error)
    kinetic = DEPTH * np.sum(step.v**2)
    potential = GRAVITY * np.sum(1.0 - step.eta**2)
    # A third at every resolution; the walls, 20 Ld away, cut off exp(-20) = 2e-9.
    assert kinetic / potential == pytest.approx(1.0 / 3.0, abs=1e-8)
    geostrophic = GRAVITY * np.diff(step.eta) / width - CORIOLIS * 0.5 * (step.v[1:] + step.v[:-1])
    assert np.abs(geostrophic).max() < 1e-12 * GRAVITY / radius


def test_finite_step() -> None:
    # Derived from potential vorticity, after Rossby 1938.
    step = adjusted_finite_step(100.0, 50.0, 0.02, 1e-4)
    assert rounds_to(step.interface, "4142.14")
    assert rounds_to(step.depth, "70.7107")
    assert rounds_to(step.velocity, "-0.414214")
    around = adjusted_finite_step_depth(step.interface + np.array([-1e-6, 1e-6]), 100.0, 50.0, 0.02, 1e-4)
    assert around == pytest.approx(step.depth, rel=1e-10)
    # One deformation radius of its own side away, each side has 1/e of its departure left.
    radii = np.sqrt(0.02 * np.array([100.0, 50.0])) / 1e-4
    x = step.interface + np.array([-1.0, 1.0]) * radii
    away = adjusted_finite_step_depth(x, 100.0, 50.0, 0.02, 1e-4)
    expected = [100.0 - (100.0 - step.depth) / np.e, 50.0 + (step.depth - 50.0) / np.e]
    assert away == pytest.approx(expected, rel=1e-13)


@pytest.mark.parametrize("right", [50.0, 10.0, 1.0])
def test_finite_step_keeps_a_third_of_the_energy_and_all_the_water(right: float) -> None:
    """Trapezoidal error (1/2000)^2/12 of each side, times the slope's jump at the interface."""
    gravity, f, left = 0.02, 1e-4, 100.0
    step = adjusted_finite_step(left, right, gravity, f)
    kinetic = potential = volume = 0.0
    for depth, side, sign in ((left, step.drop, -1.0), (right, step.rise, 1.0)):
        radius = np.sqrt(gravity * depth) / f
        distance = np.linspace(0.0, 40.0, 80001) * radius
        h = depth + side * np.exp(-distance / radius)
        v = -sign * gravity / f * side / radius * np.exp(-distance / radius)
        kinetic += np.trapezoid(0.5 * h * v**2, distance)
        potential += np.trapezoid(0.5 * gravity * (depth**2 - h**2), distance)
        volume += np.trapezoid(h - depth, distance)
    # The interface moved by x0: water of depth `left` now reaches where `right` stood.
    potential -= 0.5 * gravity * (left**2 - right**2) * step.interface
    volume += (left - right) * step.interface
    assert kinetic / potential == pytest.approx(1.0 / 3.0, rel=1e-5)
    assert abs(volume) < 1e-6 * left * step.interface


def test_collapse_on_to_a_dry_side() -> None:
    # Derived; the end state that Kuo and Polvani 1997 compute.
    front = dry_collapse_front(100.0, 0.02, 1e-4)
    assert rounds_to(front, "14142.1")
    assert rounds_to(float(dry_collapse_depth(np.array(0.0), 100.0, 0.02, 1e-4)), "63.2121")
    assert rounds_to(float(dry_collapse_velocity(np.array(front), 100.0, 0.02, 1e-4)), "-1.41421")
    energies = dry_collapse_energies(100.0, 0.02, 1e-4)
    assert rounds_to(energies.kinetic_kept, "235702")
    assert rounds_to(energies.potential_released, "707107")
    assert dry_collapse_depth(np.array([1.001 * front]), 100.0, 0.02, 1e-4) == 0.0


def test_collapse_energies_are_the_integrals_of_its_profile() -> None:
    """Trapezoidal error as above; water west of x = 0 starts at H, and the rest fills what it lost."""
    front = dry_collapse_front(100.0, 0.02, 1e-4)
    x = np.linspace(-40.0, 1.0, 82001) * front
    h = dry_collapse_depth(x, 100.0, 0.02, 1e-4)
    v = dry_collapse_velocity(x, 100.0, 0.02, 1e-4)
    energies = dry_collapse_energies(100.0, 0.02, 1e-4)
    assert np.trapezoid(0.5 * h * v**2, x) == pytest.approx(energies.kinetic_kept, rel=1e-6)
    released = np.trapezoid(0.5 * 0.02 * (100.0**2 - h**2), x) - 0.5 * 0.02 * 100.0**2 * front
    assert released == pytest.approx(energies.potential_released, rel=1e-6)
    limit = adjusted_finite_step_depth(x, 100.0, 1e-8, 0.02, 1e-4)
    assert limit == pytest.approx(h, abs=0.02)  # of order sqrt(hL hR) = 1e-3 m and its move of the interface
