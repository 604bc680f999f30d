"""The equatorial-wave formulas give the worked numbers, for c = 2.5 m/s and beta = 2.28e-11 1/(m s)."""

import numpy as np
import pytest

from tests.theory.equatorial_reflection import (
    eastern_wall_energy_shares,
    eastern_wall_height,
    eastern_wall_height_limit,
    eastern_wall_rossby_amplitudes,
    eastern_wall_rossby_height,
    western_wall_kelvin_share,
)
from tests.theory.equatorial_waves import (
    MeridionalStructure,
    basin_mode_period,
    dispersion_roots,
    equatorial_radius,
    equatorial_time,
    hermite_functions,
    inertia_gravity_frequency,
    kelvin_frequency,
    kelvin_structure,
    long_rossby_speed,
    rossby_frequency,
    wave_structure,
    yanai_frequency,
    zero_group_velocity_frequencies,
)
from tests.theory.printed import half_unit_of_last_digit, rounds_to

C, BETA, DEPTH = 2.5, 2.28e-11, 156.25
DAY = 86400.0
WAVENUMBER = 2.0 * np.pi / 5e6  # a wavelength of 5000 km


def frequency_of(kind: str, n: int, wavenumber: float) -> float:
    if kind == "rossby":
        return rossby_frequency(n, wavenumber, C, BETA)
    if kind == "inertia_gravity":
        return inertia_gravity_frequency(n, wavenumber, C, BETA)
    return yanai_frequency(wavenumber, C, BETA)


def test_a_printed_number_is_matched_to_half_a_unit_of_its_last_digit_and_no_more() -> None:
    assert half_unit_of_last_digit("9.95509e-7") == pytest.approx(5e-13)
    assert half_unit_of_last_digit("331133") == 0.5
    assert rounds_to(1.2349, "1.23") and not rounds_to(1.2351, "1.23")


def test_equatorial_scales() -> None:
    # Gill 1982, chapter 11 (from memory), radius by the reading sqrt(c/beta).
    assert rounds_to(equatorial_radius(C, BETA), "331133")
    assert rounds_to(equatorial_time(C, BETA), "132453")
    # The other convention, sqrt(c/(2 beta)), is sqrt(2) shorter.
    assert rounds_to(equatorial_radius(C, BETA) / np.sqrt(2.0), "234146")


def test_kelvin_wave_of_5000_km() -> None:
    omega = kelvin_frequency(WAVENUMBER, C)  # Gill 1982 (from memory)
    assert rounds_to(omega, "3.14159e-6")
    assert rounds_to(2.0 * np.pi / omega / DAY, "23.1481")
    assert rounds_to(15e6 / C / DAY, "69.4444")
    wave = kelvin_structure(np.array([0.0, 1.0, -2.0]) * equatorial_radius(C, BETA), C, BETA, DEPTH)
    assert wave.u == pytest.approx(np.exp([0.0, -0.5, -2.0]), rel=1e-14)
    assert wave.h == pytest.approx(wave.u * DEPTH / C, rel=1e-14)


# Matsuno 1966 (from memory): wavelength 5000 km.
@pytest.mark.parametrize(
    ("kind", "n", "direction", "omega", "period"),
    [
        ("rossby", 1, -1, "9.95509e-7", "73.0501"),
        ("rossby", 2, -1, "6.08050e-7", "119.599"),
        ("rossby", 3, -1, "4.38171e-7", "165.967"),
        ("inertia_gravity", 1, 1, "1.39189e-5", "5.22471"),
        ("inertia_gravity", 1, -1, "1.29234e-5", "5.62718"),
        ("inertia_gravity", 2, 1, "1.74677e-5", "4.16323"),
        ("inertia_gravity", 2, -1, "1.68597e-5", "4.31337"),
        ("inertia_gravity", 3, 1, "2.04360e-5", "3.55852"),
        ("inertia_gravity", 3, -1, "1.99979e-5", "3.63649"),
        ("yanai", 0, 1, "9.28231e-6", "7.83448"),
        ("yanai", 0, -1, "6.14071e-6", "11.8426"),
    ],
)
def test_dispersion_at_5000_km(kind: str, n: int, direction: int, omega: str, period: str) -> None:
    frequency = frequency_of(kind, n, direction * WAVENUMBER)
    assert rounds_to(frequency, omega)
    assert rounds_to(2.0 * np.pi / frequency / DAY, period)


# Matsuno 1966 (from memory), in units of Le and Te.
@pytest.mark.parametrize(
    ("kind", "n", "k", "omega"),
    [
        ("rossby", 1, -0.5, "0.154992"),
        ("rossby", 2, -0.5, "0.0954035"),
        ("rossby", 3, -0.5, "0.0690109"),
        ("inertia_gravity", 1, -0.5, "1.72028"),
        ("inertia_gravity", 2, -0.5, "2.24210"),
        ("inertia_gravity", 3, -0.5, "2.65741"),
        ("yanai", 0, -0.5, "0.780776"),
        ("yanai", 0, 1.0, "1.618034"),
        ("inertia_gravity", 1, 1.0, "2.11491"),
    ],
)
def test_dispersion_without_dimensions(kind: str, n: int, k: float, omega: str) -> None:
    frequency = frequency_of(kind, n, k / equatorial_radius(C, BETA))
    assert rounds_to(frequency * equatorial_time(C, BETA), omega)


@pytest.mark.parametrize("n", [1, 2, 7])
def test_dispersion_roots_satisfy_the_cubic(n: int) -> None:
    """Round-off of a root of a cubic with coefficients of order one: some 1e-15, times the slope of order 10 n."""
    time, k = equatorial_time(C, BETA), 0.7
    omega = dispersion_roots(n, k / equatorial_radius(C, BETA), C, BETA) * time
    assert np.abs(omega**3 - (k**2 + 2 * n + 1) * omega - k).max() < 1e-13 * n


def test_the_wrong_branch_is_refused() -> None:
    with pytest.raises(ValueError, match="negative wavenumber"):
        rossby_frequency(1, WAVENUMBER, C, BETA)
    with pytest.raises(ValueError, match="n >= 1"):
        dispersion_roots(0, WAVENUMBER, C, BETA)


def test_group_velocity_vanishes_at_the_edges_of_the_gap() -> None:
    # Derived: 1 -+ 1/sqrt(2) for n = 1.
    time, radius = equatorial_time(C, BETA), equatorial_radius(C, BETA)
    for omega, text, root in zip(
        zero_group_velocity_frequencies(1, C, BETA), ("0.292893", "1.707107"), (1, 2), strict=True
    ):
        assert rounds_to(omega * time, text)
        k = -0.5 / (omega * time)
        step = 1e-4
        around = [dispersion_roots(1, (k + d) / radius, C, BETA)[root] * time for d in (-step, step)]
        assert abs(around[1] - around[0]) / (2.0 * step) < 1e-7  # step^2 times a third derivative of order one


# Gill 1982 (from memory).
@pytest.mark.parametrize(
    ("n", "speed"), [(1, "0.833333"), (2, "0.500000"), (3, "0.357143"), (4, "0.277778"), (5, "0.227273")]
)
def test_long_rossby_speeds(n: int, speed: str) -> None:
    assert rounds_to(long_rossby_speed(n, C), speed)


def test_rossby_phase_speed_falls_short_of_the_long_wave_limit() -> None:
    # Derived from the dispersion relation.
    assert rounds_to(rossby_frequency(1, -WAVENUMBER, C, BETA) / WAVENUMBER, "0.792201")
    omega = rossby_frequency(1, -WAVENUMBER / 2.0, C, BETA)
    assert rounds_to(omega, "5.16947e-7")
    assert rounds_to(omega / (WAVENUMBER / 2.0), "0.822747")


def test_hermite_functions_are_orthonormal() -> None:
    """The trapezoidal rule is exact to round-off for smooth functions that vanish at both ends."""
    y = np.linspace(-14.0, 14.0, 2001)
    psi = hermite_functions(12, y)
    assert np.abs(psi @ psi.T * (y[1] - y[0]) - np.eye(12)).max() < 1e-12


def residuals(
    structure_at: dict[int, MeridionalStructure], k: float, omega: float, y: np.ndarray, step: float
) -> float:
    """Largest residual [m s-2] of the three equations, y derivatives by central differences of `step` metres."""
    here, gravity = structure_at[0], C**2 / DEPTH
    v_y = (structure_at[1].v - structure_at[-1].v) / (2.0 * step)
    h_y = (structure_at[1].h - structure_at[-1].h) / (2.0 * step)
    zonal = omega * here.u - BETA * y * here.v - gravity * k * here.h
    meridional = -omega * here.v + BETA * y * here.u + gravity * h_y
    continuity = (omega * here.h - k * DEPTH * here.u + DEPTH * v_y) * gravity / C
    return float(max(np.abs(r).max() for r in (zonal, meridional, continuity)))


@pytest.mark.parametrize(
    ("kind", "n", "direction"),
    [("rossby", 1, -1), ("rossby", 4, -1), ("inertia_gravity", 2, 1), ("yanai", 0, -1), ("kelvin", -1, 1)],
)
def test_structures_satisfy_the_linear_equations(kind: str, n: int, direction: int) -> None:
    """Central differences leave (step/Le)^2/6 times third derivatives of order (2n+1)^(3/2), here under 1e-6 in all."""
    radius, k = equatorial_radius(C, BETA), direction * WAVENUMBER
    y = np.linspace(-6.0, 6.0, 301) * radius
    step = 1e-4 * radius
    if kind == "kelvin":
        omega = kelvin_frequency(k, C)
        structure = {d: kelvin_structure(y + d * step, C, BETA, DEPTH) for d in (-1, 0, 1)}
    else:
        omega = frequency_of(kind, n, k)
        structure = {d: wave_structure(y + d * step, n, k, omega, C, BETA, DEPTH) for d in (-1, 0, 1)}
    unit = float(max(np.abs(structure[0].u).max(), np.abs(structure[0].v).max())) / equatorial_time(C, BETA)
    assert residuals(structure, k, omega, y, step) < 1e-6 * unit


def test_shape_of_the_long_rossby_wave() -> None:
    # Derived: height maxima at sqrt(3/2) Le, where u vanishes; u = -3 p on the equator.
    radius = equatorial_radius(C, BETA)
    k = -1e-5 / radius
    omega = rossby_frequency(1, k, C, BETA)
    y = np.array([0.0, np.sqrt(1.5), np.sqrt(1.5) - 1e-3, np.sqrt(1.5) + 1e-3]) * radius
    wave = wave_structure(y, 1, k, omega, C, BETA, DEPTH)
    assert rounds_to(np.sqrt(1.5), "1.22474")
    assert rounds_to(wave.h[1] / wave.h[0], "1.88947")
    assert wave.h[1] / wave.h[0] > max(wave.h[2:] / wave.h[0])
    assert abs(wave.u[1] / wave.u[0]) < 1e-9  # (k Le)^2 times a number of order one
    assert wave.u[0] / (wave.h[0] * C / DEPTH) == pytest.approx(-3.0, abs=1e-8)


def test_reflection_at_an_eastern_wall() -> None:
    # Cane and Sarachik 1977 for the method (from memory); numbers derived.
    shares = eastern_wall_energy_shares(201)
    assert shares[:5] == pytest.approx([1 / 2, 1 / 8, 1 / 16, 5 / 128, 7 / 256], rel=1e-14)
    assert rounds_to(shares.sum(), "0.960")  # up to n = 401
    amplitudes = eastern_wall_rossby_amplitudes(4)
    assert amplitudes[0] == pytest.approx(np.sqrt(2.0), rel=1e-15)
    assert amplitudes[1:] / amplitudes[:-1] == pytest.approx(np.sqrt([3 / 2, 5 / 4, 7 / 6]), rel=1e-14)
    assert rounds_to(eastern_wall_height_limit(), "1.41421")
    assert eastern_wall_rossby_height(np.array(0.0), 1) == pytest.approx(0.5, rel=1e-14)


@pytest.mark.parametrize("y", [0.0, 0.5, 1.0])
def test_height_along_an_eastern_wall_becomes_uniform(y: float) -> None:
    """Partial sums swing about the limit and so bracket it; the swing falls about as one over the number of waves."""
    early, late = (np.array([eastern_wall_height(y, m + i) for i in range(40)]) for m in (20, 120))
    for sums in (early, late):
        assert sums.min() < eastern_wall_height_limit() < sums.max()
    assert np.ptp(late) < 0.5 * np.ptp(early)
    assert np.ptp(late) < 0.005


def test_a_western_wall_returns_half_the_energy_of_the_first_rossby_wave() -> None:
    # Derived from Int u dy = 0 of the short waves.
    assert western_wall_kelvin_share(1) == pytest.approx(0.5, rel=1e-14)
    assert western_wall_kelvin_share(2) == 0.0
    # By reciprocity every wave returns the share that an eastern wall sends into it.
    shares = eastern_wall_energy_shares(5)
    assert [western_wall_kelvin_share(n) for n in (1, 3, 5, 7, 9)] == pytest.approx(shares, rel=1e-12)


def test_basin_mode_period() -> None:
    # Cane and Moore 1981 (from memory).
    assert rounds_to(basin_mode_period(15e6, C) / DAY, "277.778")
    assert rounds_to(15e6 / long_rossby_speed(1, C) / DAY, "208.333")
    assert basin_mode_period(15e6, C, 2) == pytest.approx(basin_mode_period(15e6, C) / 2.0)
