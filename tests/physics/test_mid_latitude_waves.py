"""Waves of a layer away from the equator: Gill 1982, Atmosphere-Ocean Dynamics, chapters 7, 11 and 12 (from memory)."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

from oceanbox.experiment.model import Model
from tests.building import box, set_state, temperature_for
from tests.theory.adjustment import (
    beta_on_sphere,
    coriolis_on_sphere,
    deformation_radius,
    inertial_period,
    long_rossby_wave_speed,
    rossby_wave_frequency,
)

Array = NDArray[np.float64]
DAY = 86400.0
DEPTH = 500.0
GRAVITY = 0.02
WAVE_SPEED = float(np.sqrt(GRAVITY * DEPTH))


def linear_channel(
    length: float, width: float, cells: tuple[int, int], f: float, beta: float, changes: dict[str, Any] | None = None
) -> Model:
    """A linear channel, periodic in x, ``length`` by ``width`` [m] in (nx, ny) ``cells``, with f = ``f`` in mid-channel."""
    return box(
        {
            "basin.zonal_boundary": "periodic",
            "basin.width_km": 1e-3 * length,
            "basin.south_km": -0.5e-3 * width,
            "basin.north_km": 0.5e-3 * width,
            "basin.cells_x": cells[0],
            "basin.cells_y": cells[1],
            "basin.coriolis_at_origin_per_s": f,
            "basin.beta_per_m_s": beta,
            "motion.momentum_advection": False,
            "motion.linear_about_depth_m": DEPTH,
            "layers.0.initial_thickness_m": DEPTH,
            "layers.0.initial_temperature_degC": temperature_for(GRAVITY),
            "numerics.scheme": "runge_kutta_3",
        }
        | (changes or {})
    )


def phase_velocity(model: Model, wavenumber: float, days: float) -> Array:
    """Zonal phase velocity on every row, (ny,), m s-1, from the phase of the thickness sampled ten times."""
    grid = model.grid
    wave = np.exp(-1j * wavenumber * grid.x)
    steps = round(days * DAY / 10.0 / model.clock.dt)
    times, phases = [], []
    for _ in range(10):
        model.advance(steps)
        times.append(model.clock.seconds)
        phases.append(np.angle((model.thickness[0] - DEPTH) @ wave))
    return np.asarray(-np.polyfit(times, np.unwrap(phases, axis=0), 1)[0] / wavenumber)


@pytest.mark.parametrize("latitude", [15.0, 30.0, 45.0])
def test_a_long_rossby_wave_travels_west_at_beta_times_the_radius_squared(latitude: float) -> None:
    """-beta Ld^2, each row at its own speed: a wave long against Ld is unaffected by cells larger than Ld.

    Neglected: (k Ld)^2 for the finite length of 5000 km, (beta Ld/f)^2 for the change of f within Ld, (k dx)^2/24 of the grid.
    """
    f, beta = coriolis_on_sphere(latitude), beta_on_sphere(latitude)
    radius = deformation_radius(WAVE_SPEED, f)
    k = 2.0 * np.pi / 5e6
    model = linear_channel(5e6, 1.2e6, (50, 24), f, beta)
    grid = model.grid
    height = np.tile(np.cos(k * grid.x), (grid.ny, 1))
    balanced = -GRAVITY * k * np.sin(k * grid.x) / grid.coriolis(grid.y_face)[:, None]
    balanced[[0, -1]] = 0.0
    set_state(model, (DEPTH + height)[None], model.theta, velocity_y=balanced[None])
    speeds = phase_velocity(model, k, days=100.0)

    neglected = (k * radius) ** 2 + (beta * radius / f) ** 2 + (k * grid.dx) ** 2 / 24.0
    in_the_middle = 0.5 * (speeds[grid.ny // 2 - 1] + speeds[grid.ny // 2])
    assert in_the_middle == pytest.approx(long_rossby_wave_speed(beta, radius), rel=neglected)


def rossby_frequency_on_c_grid(model: Model, k: float, l: float, radius: float) -> float:  # noqa: E741
    """omega [s-1] of a quasi-geostrophic wave sin(l y) on the grid, f at corners; derived.

    With K, L the differences of the grid and C = cos(k dx/2) cos(l dy/2) its average, zeta_t = -f C D - beta <v> and
    C f v = g K eta give omega = -beta K cos(k dx/2) cos(l dy)/(K^2 + L^2 + C^2 Ld^-2).
    """
    dx, dy = model.grid.dx, model.grid.dy
    K, L = 2.0 / dx * np.sin(0.5 * k * dx), 2.0 / dy * np.sin(0.5 * l * dy)
    average = np.cos(0.5 * k * dx) * np.cos(0.5 * l * dy)
    turning = model.grid.beta * K * np.cos(0.5 * k * dx) * np.cos(l * dy)
    return float(-turning / (K**2 + L**2 + (average / radius) ** 2))


def potential_vorticity(model: Model) -> Array:
    """Linear potential vorticity zeta - f <eta>/H on corners off the walls, (ny-1, nx), s-1; gravity waves carry none."""
    grid = model.grid
    u, v, height = model.velocity_x[0][:, :-1], model.velocity_y[0][1:-1], model.thickness[0] - DEPTH
    vorticity = (v - np.roll(v, 1, axis=1)) / grid.dx - np.diff(u, axis=0) / grid.dy
    around = height + np.roll(height, 1, axis=1)
    return np.asarray(vorticity - grid.coriolis(grid.y_face[1:-1])[:, None] / DEPTH * 0.25 * (around[1:] + around[:-1]))


@pytest.mark.parametrize("per_radius", [0.5, 1.0, 2.0])
def test_rossby_waves_of_any_length_obey_their_dispersion_relation(per_radius: float) -> None:
    """omega = -beta k/(k^2 + l^2 + Ld^-2), for k Ld = 1/2, 1 and 2 with l = pi/width in a channel three radii wide.

    Against the grid's own relation to (beta width/f)^2, the order of quasi-geostrophy; against the continuous one to
    (k dx)^2/4 + (l dy)^2/2 + (dx/Ld)^2/2, more than all averages and differences of the grid together.
    """
    f, beta = 1e-4, 2e-11
    radius = deformation_radius(WAVE_SPEED, f)
    width = 3.0 * radius
    k, l = per_radius / radius, np.pi / width  # noqa: E741
    model = linear_channel(2.0 * np.pi / k, width, (round(20.0 * np.pi / per_radius), 30), f, beta)
    grid = model.grid
    y, y_face = grid.y - grid.y_face[0], grid.y_face - grid.y_face[0]
    height = np.outer(np.sin(l * y), np.cos(k * grid.x))
    along = -GRAVITY * l / grid.coriolis(grid.y)[:, None] * np.outer(np.cos(l * y), np.cos(k * grid.x_face))
    across = -GRAVITY * k / grid.coriolis(grid.y_face)[:, None] * np.outer(np.sin(l * y_face), np.sin(k * grid.x))
    set_state(model, (DEPTH + height)[None], model.theta, velocity_x=along[None], velocity_y=across[None])

    shape, wave = np.sin(l * y_face[1:-1]), np.exp(-1j * k * grid.x_face[:-1])
    times, phases = [], []
    for _ in range(10):
        model.advance(round(DAY / model.clock.dt))
        times.append(model.clock.seconds)
        phases.append(np.angle(shape @ potential_vorticity(model) @ wave))
    measured = -np.polyfit(times, np.unwrap(phases), 1)[0]

    of_grid = 0.25 * (k * grid.dx) ** 2 + 0.5 * (l * grid.dy) ** 2 + 0.5 * (grid.dx / radius) ** 2
    assert measured == pytest.approx(rossby_frequency_on_c_grid(model, k, l, radius), rel=(beta * width / f) ** 2)
    assert measured == pytest.approx(rossby_wave_frequency(k, l, beta, radius), rel=of_grid)


@pytest.mark.parametrize(("latitude", "hours"), [(15.0, 46.2379), (30.0, 23.9345), (45.0, 16.9242)])
@pytest.mark.parametrize("scheme", ["runge_kutta_3", "forward_backward"])
def test_water_without_pressure_turns_once_in_an_inertial_period(latitude: float, hours: float, scheme: str) -> None:
    """2 pi/f; the shape sin(l y) is exact on the C-grid, with f replaced by its average f cos(l dy/2).

    Frequency error of the schemes at an angle f dt of a tenth: (f dt)^4/30 for the three-stage one, (f dt)^2/24 for rotation
    of u and v in turn, which moreover makes a circle an ellipse and its angle unsteady: allow as much again.
    """
    f = coriolis_on_sphere(latitude)
    dt = 0.1 / f
    still = {
        "layers.0.initial_temperature_degC": temperature_for(1e-12),
        "numerics.step_s": dt,
        "numerics.scheme": scheme,
    }
    model = linear_channel(4e5, 2e6, (4, 40), f, 0.0, still)
    grid = model.grid
    l = np.pi / (grid.ny * grid.dy)  # noqa: E741
    shape, shape_face = np.sin(l * (grid.y - grid.y_face[0])), np.sin(l * (grid.y_face - grid.y_face[0]))
    set_state(model, velocity_x=np.tile(shape[:, None], (1, grid.nx + 1))[None])

    times, angles = [], []
    for _ in range(126):
        model.advance(1)
        times.append(model.clock.seconds)
        along, across = shape @ model.velocity_x[0][:, 0], shape_face @ model.velocity_y[0][:, 0]
        angles.append(np.arctan2(across, along))
    period = -2.0 * np.pi / np.polyfit(times, np.unwrap(angles), 1)[0]
    average = np.cos(0.5 * l * grid.dy)
    of_scheme = {"runge_kutta_3": 0.1**4 / 20.0, "forward_backward": 0.1**2 / 12.0}[scheme]
    assert period == pytest.approx(inertial_period(f) / average, rel=of_scheme)
    assert period / 3600.0 == pytest.approx(hours, rel=of_scheme + 1.0 / average - 1.0)
