"""Free equatorial waves: Matsuno 1966, J. Meteorol. Soc. Jpn. 44, 25 (formulas from memory, biases of the grid derived).

A C-grid carries them slower than the continuous ocean; tests/theory/equatorial_grid_modes.py says by how much, exactly, so the
model is held to that value.  A wave that went faster would not be of this grid.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import cache
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

from tests.physics.equatorial_channel import (
    BETA,
    WAVE_SPEED,
    Wave,
    channel,
    followed_frequency,
    kelvin,
    rossby,
    stacked,
    start_wave,
    wave_itself,
    wave_on_grid,
    yanai,
    zonal_component,
)
from tests.theory.equatorial_waves import equatorial_radius, long_rossby_speed

WAVELENGTH = 5e6
WAVES: dict[str, Callable[[float], Wave]] = {
    "kelvin": kelvin,
    "rossby 1": lambda wavelength: rossby(1, wavelength),
    "rossby 2": lambda wavelength: rossby(2, wavelength),
    "rossby 3": lambda wavelength: rossby(3, wavelength),
    "yanai": yanai,
}
by_wave = pytest.mark.parametrize("name", list(WAVES))


@cache
def followed(name: str, spacing: float) -> tuple[float, float, float]:
    """(measured omega, omega of the grid, part of the state that is not the continuous wave) after a sixth of a period."""
    wave = WAVES[name](WAVELENGTH)
    model = channel(WAVELENGTH, spacing, spacing)
    start_wave(model, wave)
    mode = wave_on_grid(model, wave)
    steps = max(1, round(2.0 * np.pi / wave.frequency / 60.0 / model.clock.dt))
    frequency = followed_frequency(model, mode, wave.wavenumber, steps, samples=10)
    state, shape = stacked(zonal_component(model, wave.wavenumber)), stacked(wave_itself(model, wave))
    strange = state - shape * (state @ shape) / (shape @ shape)
    return frequency, mode.frequency, float(np.linalg.norm(strange) / np.linalg.norm(state))


def runge_kutta_3_error(angle: float) -> float:
    """Relative error of a frequency omega at omega dt = ``angle``: angle^4/30 from the stability polynomial, to next order."""
    return angle**4 / 20.0


def on_equator(field: NDArray[Any]) -> complex:
    """A field that is even in y, at the equator between the two middle rows, to fourth order."""
    half = field[field.size // 2 :]
    return complex(9.0 * half[0] - half[1]) / 8.0


@by_wave
@pytest.mark.parametrize("spacing", [100e3, 50e3])
def test_a_wave_has_the_frequency_of_its_mode_on_the_grid(name: str, spacing: float) -> None:
    """To the accuracy of the three-stage scheme, and 1e-8 for the round-off of a perturbation of 1e-3 of the depth."""
    measured, on_grid, _ = followed(name, spacing)
    dt = channel(WAVELENGTH, spacing, spacing).clock.dt
    assert measured == pytest.approx(on_grid, rel=runge_kutta_3_error(on_grid * dt) + 1e-8)


@by_wave
def test_halving_the_cells_quarters_the_bias(name: str) -> None:
    """Second order: bias = a dx^2 (1 + b dx^2 + ...), and b dx^2 is of the size of the bias itself (and the scheme's error)."""
    exact = WAVES[name](WAVELENGTH).frequency
    coarse, fine = (followed(name, spacing)[0] / exact - 1.0 for spacing in (100e3, 50e3))
    assert coarse < 0.0 and fine < 0.0
    assert coarse / fine == pytest.approx(4.0, rel=abs(coarse) + 0.01)


@by_wave
def test_a_wave_keeps_the_structure_of_the_continuous_wave_to_second_order(name: str) -> None:
    """Started from the Hermite functions, the state turns away from them as the mode of the grid differs: as dx^2 or faster.

    The tenth allowed is the next order, (dx/Le)^2 = 0.09 on the coarser grid.
    """
    coarse, fine = (followed(name, spacing)[2] for spacing in (100e3, 50e3))
    assert coarse / fine > 4.0 * 0.9


@by_wave
def test_the_production_scheme_carries_the_waves_within_two_thousandths_of_the_grid(name: str) -> None:
    """At the step it chooses for itself; 0.2 % about the biased value is what the dispersion of a sound scheme keeps."""
    wave = WAVES[name](WAVELENGTH)
    model = channel(WAVELENGTH, 100e3, 100e3, {"numerics.scheme": "forward_backward"})
    start_wave(model, wave)
    mode = wave_on_grid(model, wave)
    steps = max(1, round(2.0 * np.pi / wave.frequency / 80.0 / model.clock.dt))
    measured = followed_frequency(model, mode, wave.wavenumber, steps, samples=40)
    assert measured == pytest.approx(mode.frequency, rel=2e-3)


@pytest.mark.parametrize("n", [1, 2, 3])
def test_long_rossby_waves_travel_at_c_over_2n_plus_1(n: int) -> None:
    """Gill 1982, Atmosphere-Ocean Dynamics, chapter 11 (from memory).

    Slower by [(k Le)^2 - (omega Te)^2]/(2n + 1), with omega Te = k Le/(2n + 1), for their finite length, and by the bias of the
    grid, 25 km in y where the wave is narrow.  The squares of both, and their product, are neglected.
    """
    wavelength = 20e6
    wave = rossby(n, wavelength)
    model = channel(wavelength, 500e3, 25e3)
    start_wave(model, wave)
    mode = wave_on_grid(model, wave)
    steps = round(30.0 * 86400.0 / model.clock.dt / 10.0)
    speed = followed_frequency(model, mode, wave.wavenumber, steps, samples=10) / abs(wave.wavenumber)

    m = 2 * n + 1
    length = (wave.wavenumber * equatorial_radius(WAVE_SPEED, BETA)) ** 2 * (1.0 - 1.0 / m**2) / m
    bias = 1.0 - mode.frequency / wave.frequency
    assert 0.0 < bias < 0.01
    expected = long_rossby_speed(n, WAVE_SPEED) * (1.0 - length - bias)
    assert speed == pytest.approx(expected, rel=(length + bias) ** 2)


def test_a_long_rossby_wave_flows_eastward_over_its_equatorial_trough() -> None:
    """On the equator u = -3 p, p = g' eta/c; the height is largest at y = 1.22474 Le, with 1.88947 times its equatorial value.

    Derived for the long wave n = 1.  A quarter of a period after the start it holds to the (k Le)^2 = 1 % of a wave of finite
    length, to the bias of frequency on these cells, 1 %, and for the place of the largest height to one cell.
    """
    wave = rossby(1, 20e6)
    model = channel(20e6, 500e3, 50e3)
    start_wave(model, wave)
    model.advance(round(np.pi / 2.0 / wave.frequency / model.clock.dt))
    mode = zonal_component(model, wave.wavenumber)
    u, p = on_equator(mode.u), on_equator(mode.p)
    height = np.abs(mode.p)
    radius = equatorial_radius(WAVE_SPEED, BETA)
    tolerance = (wave.wavenumber * radius) ** 2 + 1.0 - wave_on_grid(model, wave).frequency / wave.frequency
    assert (u / p).real == pytest.approx(-3.0, rel=tolerance)
    assert height.max() / abs(p) == pytest.approx(1.88947, rel=tolerance)
    assert abs(model.grid.y[height.argmax()]) == pytest.approx(1.22474 * radius, abs=model.grid.dy)


@pytest.mark.slow
@by_wave
def test_halving_the_cells_again_quarters_the_bias_again(name: str) -> None:
    """From 50 km to 25 km, as `test_halving_the_cells_quarters_the_bias`."""
    exact = WAVES[name](WAVELENGTH).frequency
    coarse, fine = (followed(name, spacing)[0] / exact - 1.0 for spacing in (50e3, 25e3))
    assert coarse / fine == pytest.approx(4.0, rel=abs(coarse) + 0.01)
