"""The biases of equatorial waves on a C-grid, 4-point energy-conserving Coriolis average with f at corners."""

import numpy as np
import pytest

from tests.theory.equatorial_grid_modes import (
    Channel,
    CoriolisPlace,
    GridMode,
    channel_operator,
    kelvin_frequency_on_c_grid,
    matching_grid_mode,
)
from tests.theory.equatorial_waves import (
    inertia_gravity_frequency,
    kelvin_frequency,
    kelvin_structure,
    rossby_frequency,
    wave_structure,
    yanai_frequency,
)
from tests.theory.printed import rounds_to

C, BETA, DEPTH = 2.5, 2.28e-11, 156.25
WAVENUMBER = 2.0 * np.pi / 5e6


def wave_on_grid(name: str, cell: float, place: CoriolisPlace = "corner") -> tuple[float, float, GridMode]:
    """Wavenumber, continuous frequency and grid mode of a named wave of 5000 km in a channel of +-3500 km."""
    channel = Channel(cell, cell, 3.5e6, C, BETA, place)
    if name == "kelvin":
        omega = kelvin_frequency(WAVENUMBER, C)
        centre, face = (kelvin_structure(y, C, BETA, DEPTH) for y in (channel.y_centre, channel.y_face))
        return WAVENUMBER, omega, matching_grid_mode(channel, WAVENUMBER, centre, face, DEPTH)
    n, k = int(name[-1]), -WAVENUMBER if name.startswith("rossby") else WAVENUMBER
    if name.startswith("rossby"):
        omega = rossby_frequency(n, k, C, BETA)
    else:
        omega = inertia_gravity_frequency(n, k, C, BETA) if n > 0 else yanai_frequency(k, C, BETA)
    centre, face = (wave_structure(y, n, k, omega, C, BETA, DEPTH) for y in (channel.y_centre, channel.y_face))
    return k, omega, matching_grid_mode(channel, k, centre, face, DEPTH)


# Derived: eigenvalues of the semi-discrete operator; per cent of the continuous frequency.
@pytest.mark.parametrize(
    ("cell", "biases"),
    [
        (25e3, ("-0.004", "-0.30", "-0.52", "-0.74", "-0.06", "-0.08")),
        (50e3, ("-0.016", "-1.19", "-2.07", "-2.92", "-0.25", "-0.32")),
        (100e3, ("-0.066", "-4.66", "-7.99", "-11.1", "-1.00", "-1.28")),
        (200e3, ("-0.26", "-17", "-28", None, "-3.9", "-5.1")),
    ],
)
def test_bias_of_each_wave(cell: float, biases: tuple[str | None, ...]) -> None:
    names = ("kelvin", "rossby_1", "rossby_2", "rossby_3", "yanai_0", "inertia_gravity_1")
    for name, bias in zip(names, biases, strict=True):
        if bias is None:  # see test_a_wave_too_short_for_the_grid_is_refused
            continue
        _, omega, mode = wave_on_grid(name, cell)
        assert rounds_to(100.0 * (mode.frequency / omega - 1.0), bias), name


@pytest.mark.parametrize("name", ["rossby_1", "rossby_2", "rossby_3", "yanai_0"])
def test_bias_falls_fourfold_when_cells_are_halved(name: str) -> None:
    """The next term is smaller by about (dx/Le)^2, 9 % at 100 km and 2 % at 50 km: ratios within 4 +- 0.3."""
    biases = [mode.frequency / omega - 1.0 for _, omega, mode in (wave_on_grid(name, d) for d in (100e3, 50e3))]
    assert biases[0] / biases[1] == pytest.approx(4.0, abs=0.3)


def test_place_of_the_coriolis_parameter_changes_the_sign_of_the_rossby_bias() -> None:
    _, omega, at_corner = wave_on_grid("rossby_1", 50e3, "corner")
    _, _, at_centre = wave_on_grid("rossby_1", 50e3, "centre")
    assert at_corner.frequency < omega < at_centre.frequency


# Derived: sin(a)/a - 1 with a = k dx/2, nearly -(k dx)^2/24.
@pytest.mark.parametrize(
    ("dx", "error"), [(25e3, "-4.112e-5"), (50e3, "-1.645e-4"), (100e3, "-6.578e-4"), (200e3, "-2.630e-3")]
)
def test_kelvin_wave_is_slowed_by_the_zonal_difference_alone(dx: float, error: str) -> None:
    exact, biased = kelvin_frequency(WAVENUMBER, C), kelvin_frequency_on_c_grid(WAVENUMBER, C, dx)
    assert rounds_to(biased / exact - 1.0, error)
    _, _, mode = wave_on_grid("kelvin", dx)
    assert mode.frequency == pytest.approx(biased, rel=1e-10)  # round-off of a matrix of size 1e-3 s-1 or less


def test_grid_mode_solves_the_channel_equations() -> None:
    k, _, mode = wave_on_grid("rossby_2", 100e3)
    fields = np.concatenate([mode.u, mode.w, mode.p])
    operator = channel_operator(Channel(100e3, 100e3, 3.5e6, C, BETA), k)
    residual = np.abs(operator @ fields - mode.frequency * fields).max()
    assert residual < 1e-13 * np.abs(operator).sum(axis=1).max() * np.abs(fields).max()


def test_a_wave_too_short_for_the_grid_is_refused() -> None:
    with pytest.raises(ValueError, match="closest wave of the grid"):
        wave_on_grid("rossby_3", 200e3)
