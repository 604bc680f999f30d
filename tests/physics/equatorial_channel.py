"""Single equatorial waves in a linear channel that is periodic in x: put in, followed, measured.

A wave of zonal wavenumber k is u = u(y) cos(kx), v = v(y) sin(kx), h = h(y) cos(kx) at the start (tests/theory).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from oceanbox.experiment.model import Model
from tests.building import set_state
from tests.physics.check_ocean import check_model
from tests.theory.equatorial_grid_modes import Channel, GridMode, matching_grid_mode
from tests.theory.equatorial_waves import (
    MeridionalStructure,
    kelvin_frequency,
    kelvin_structure,
    rossby_frequency,
    wave_structure,
    yanai_frequency,
)

Array = NDArray[np.float64]

BETA = 2.28e-11
DEPTH = 156.25
WAVE_SPEED = 2.5  # g' = 0.04
HALF_WIDTH = 3.5e6
# Small beside the depth, large beside its round-off.
AMPLITUDE = 1e-3  # m s-1


@dataclass(frozen=True)
class Wave:
    """A free wave: k [m-1], omega [s-1] of the continuous ocean, and its structure at any y [m]."""

    wavenumber: float
    frequency: float
    structure: Callable[[Array], MeridionalStructure]


def kelvin(wavelength: float) -> Wave:
    """The Kelvin wave of ``wavelength`` [m]."""
    k = 2.0 * np.pi / wavelength
    return Wave(k, kelvin_frequency(k, WAVE_SPEED), lambda y: kelvin_structure(y, WAVE_SPEED, BETA, DEPTH))


def _hermite_wave(n: int, k: float, omega: float) -> Wave:
    return Wave(k, omega, lambda y: wave_structure(y, n, k, omega, WAVE_SPEED, BETA, DEPTH))


def rossby(n: int, wavelength: float) -> Wave:
    """The Rossby wave n of ``wavelength`` [m]."""
    k = -2.0 * np.pi / wavelength
    return _hermite_wave(n, k, rossby_frequency(n, k, WAVE_SPEED, BETA))


def yanai(wavelength: float) -> Wave:
    """The eastward mixed Rossby-gravity wave of ``wavelength`` [m]."""
    k = 2.0 * np.pi / wavelength
    return _hermite_wave(0, k, yanai_frequency(k, WAVE_SPEED, BETA))


def channel(wavelength: float, dx: float, dy: float, changes: dict[str, Any] | None = None) -> Model:
    """A calm channel one ``wavelength`` [m] long, with cells ``dx`` by ``dy`` [m], without wind and drag."""
    return check_model(
        "equatorial_waves",
        {
            "basin.zonal_boundary": "periodic",
            "basin.width_km": 1e-3 * wavelength,
            "basin.south_km": -1e-3 * HALF_WIDTH,
            "basin.north_km": 1e-3 * HALF_WIDTH,
            "basin.cells_x": round(wavelength / dx),
            "basin.cells_y": round(2.0 * HALF_WIDTH / dy),
            "motion.drag_per_day": 0.0,
            "surface.wind.zonal_stress_N_per_m2": 0.0,
            "numerics.scheme": "runge_kutta_3",
        }
        | (changes or {}),
    )


def start_wave(model: Model, wave: Wave) -> None:
    """Make the continuous ``wave`` the state of ``model``."""
    grid, k = model.grid, wave.wavenumber
    centre, face = wave.structure(grid.y), wave.structure(grid.y_face)
    thickness = DEPTH + AMPLITUDE * np.outer(centre.h, np.cos(k * grid.x))
    along = AMPLITUDE * np.outer(centre.u, np.cos(k * grid.x_face))
    across = AMPLITUDE * np.outer(face.v, np.sin(k * grid.x))
    across[[0, -1]] = 0.0
    set_state(model, thickness[None], model.theta, velocity_x=along[None], velocity_y=across[None])


def wave_on_grid(model: Model, wave: Wave) -> GridMode:
    """The wave of the grid, exact in time, that resembles the continuous ``wave``."""
    grid = model.grid
    place = Channel(grid.dx, grid.dy, HALF_WIDTH, WAVE_SPEED, BETA)
    face = wave.structure(grid.y_face[1:-1])
    return matching_grid_mode(place, wave.wavenumber, wave.structure(grid.y), face, DEPTH)


def wave_itself(model: Model, wave: Wave) -> GridMode:
    """The continuous ``wave`` on the points of the grid, as a mode to project on."""
    grid = model.grid
    centre, face = wave.structure(grid.y), wave.structure(grid.y_face[1:-1])
    return GridMode(wave.frequency, centre.u, -face.v, centre.h * WAVE_SPEED / DEPTH)


def zonal_component(model: Model, wavenumber: float) -> GridMode:
    """Complex (u, w, p) of the state at one wavenumber, in the velocity unit and phases of GridMode."""
    grid, k = model.grid, wavenumber
    u = 2.0 * np.mean(model.velocity_x[0][:, :-1] * np.exp(-1j * k * grid.x_face[:-1]), axis=1)
    v = 2.0 * np.mean(model.velocity_y[0][1:-1] * np.exp(-1j * k * grid.x), axis=1)
    p = 2.0 * np.mean((model.thickness[0] - DEPTH) * np.exp(-1j * k * grid.x), axis=1) * WAVE_SPEED / DEPTH
    return GridMode(np.nan, u, -1j * v, p)


def stacked(mode: GridMode) -> NDArray[np.complex128]:
    """u, w and p of a mode one below the other."""
    return np.concatenate([mode.u, mode.w, mode.p])


def followed_frequency(model: Model, mode: GridMode, wavenumber: float, steps: int, samples: int) -> float:
    """omega [s-1] from the phase of the state's projection on ``mode``, sampled every ``steps`` steps.

    Waves of the grid are orthogonal, so what else is in the state does not disturb the phase.  The line is fitted through
    samples after the start alone: a scheme with a memory makes its first steps differently.
    """
    times, phases = [], []
    for _ in range(samples):
        model.advance(steps)
        times.append(model.clock.seconds)
        phases.append(np.angle(stacked(zonal_component(model, wavenumber)) @ stacked(mode)))
    return -float(np.polyfit(times, np.unwrap(phases), 1)[0])
