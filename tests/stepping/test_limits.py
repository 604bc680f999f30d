"""The stated stability limits against the published ones and against the amplification factors of the schemes."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from oceanbox.grid import Grid
from oceanbox.stepping.limits import StepLimits, largest_amplification, step_limits
from tests.theory.stability import (
    c_grid_gravity_wave_frequency,
    decay_limit,
    generalised_forward_backward_factors,
    highest_gravity_wave_frequency,
    largest_factor,
    oscillation_limit,
    runge_kutta_factors,
    stability_limit,
)

SQUARE = Grid(
    nx=8, ny=6, dx=25e3, dy=25e3, y_south=-75e3, coriolis_origin=0.0, beta=0.0, periodic_x=False, no_slip=False
)
OBLONG = replace(SQUARE, dx=100e3, dy=40e3)
WAVE_SPEED = 2.5
# The bisection ends at a relative width of 1e-4; a growth of 2e-5 a step counts as neutral, which moves the limit by less.
BISECTION = 2e-4
SCHEMES = ("forward_backward", "runge_kutta_3", "runge_kutta_4")


def limits(scheme: str, grid: Grid, wave_speed: float = WAVE_SPEED) -> StepLimits:
    """Limits for waves alone."""
    return step_limits(scheme, grid, wave_speed, crossing_rate=0.0, viscosity=0.0, diffusivity=0.0)


@pytest.mark.parametrize(("scheme", "seconds"), [("runge_kutta_3", 6123.72), ("runge_kutta_4", 10000.0)])
def test_gravity_waves_limit_the_step_to_the_published_number(scheme: str, seconds: float) -> None:
    """sqrt(3) and 2 sqrt(2) over omega = 2 c sqrt(1/dx^2 + 1/dy^2); 25 km, c = 2.5 m s-1."""
    assert limits(scheme, SQUARE).waves == pytest.approx(seconds, rel=BISECTION)


@pytest.mark.parametrize("grid", [SQUARE, OBLONG], ids=["square cells", "oblong cells"])
def test_gravity_waves_limit_each_scheme_at_its_largest_stable_angle(grid: Grid) -> None:
    """omega dt = 1.7802 for the forward-backward scheme (Shchepetkin and McWilliams 2005), from the theory of each scheme."""
    omega = highest_gravity_wave_frequency(WAVE_SPEED, grid.dx, grid.dy)
    angles = {
        "forward_backward": stability_limit(generalised_forward_backward_factors),
        "runge_kutta_3": oscillation_limit(lambda z: runge_kutta_factors(z, 3)),
        "runge_kutta_4": oscillation_limit(lambda z: runge_kutta_factors(z, 4)),
    }
    for scheme, angle in angles.items():
        assert limits(scheme, grid).waves * omega == pytest.approx(angle, rel=BISECTION), scheme


@pytest.mark.parametrize(
    ("scheme", "angle"),
    [("forward_backward", 2.0), ("runge_kutta_3", math.sqrt(3.0)), ("runge_kutta_4", math.sqrt(8.0))],
)
def test_rotation_alone_limits_f_dt(scheme: str, angle: float) -> None:
    """u and v turned one after the other are neutral for f dt < 2; f is the largest of the basin, here at its northern wall."""
    beta_plane = replace(SQUARE, beta=2e-11, coriolis_origin=1e-4)
    largest = 1e-4 + 2e-11 * 75e3
    assert limits(scheme, beta_plane, wave_speed=0.0).waves * largest == pytest.approx(angle, rel=BISECTION)
    mirrored = replace(SQUARE, beta=2e-11, coriolis_origin=-1e-4)
    assert limits(scheme, mirrored, wave_speed=0.0).waves * largest == pytest.approx(angle, rel=BISECTION)


@pytest.mark.parametrize("scheme", SCHEMES)
@pytest.mark.parametrize("f", [0.0, 1e-4, 4e-4])
def test_every_step_below_the_limit_is_stable_and_the_next_is_not(scheme: str, f: float) -> None:
    """The bisection takes for granted that stability is lost once and for all; growth below 1e-9 is round-off."""
    grid = replace(SQUARE, coriolis_origin=f)
    limit = limits(scheme, grid).waves
    for share in np.arange(0.05, 1.0, 0.05):
        assert largest_amplification(scheme, grid, WAVE_SPEED, f, share * limit) < 1.0 + 1e-9
    assert largest_amplification(scheme, grid, WAVE_SPEED, f, 1.02 * limit) > 1.01


@pytest.mark.parametrize("share", [0.3, 0.9, 1.1])
def test_the_amplification_of_each_scheme_is_that_of_its_theory(share: float) -> None:
    """Without rotation the fastest wave of the fan is the checkerboard, and above the limit it is the one that grows."""
    checkerboard = float(
        c_grid_gravity_wave_frequency(np.pi / SQUARE.dx, np.pi / SQUARE.dy, WAVE_SPEED, SQUARE.dx, SQUARE.dy)
    )
    for scheme in SCHEMES:
        dt = share * limits(scheme, SQUARE).waves
        angle = checkerboard * dt
        factors = {
            "forward_backward": generalised_forward_backward_factors(angle),
            "runge_kutta_3": runge_kutta_factors(1j * angle, 3),
            "runge_kutta_4": runge_kutta_factors(1j * angle, 4),
        }[scheme]
        # The mean flow, with factor 1, is in the fan too.
        expected = max(largest_factor(factors), 1.0)
        assert largest_amplification(scheme, SQUARE, WAVE_SPEED, 0.0, dt) == pytest.approx(expected, rel=1e-9), scheme


def test_friction_and_mixing_are_limited_on_the_real_axis() -> None:
    """dt A 4 (1/dx^2 + 1/dy^2) up to 2 for a forward step, 2.51275 and 2.78529 for three and four stages."""
    stiffness = 4.0 * (1.0 / OBLONG.dx**2 + 1.0 / OBLONG.dy**2)
    real_axis = {
        "forward_backward": 2.0,
        "runge_kutta_3": decay_limit(lambda z: runge_kutta_factors(z, 3)),
        "runge_kutta_4": decay_limit(lambda z: runge_kutta_factors(z, 4)),
    }
    for scheme, angle in real_axis.items():
        both = step_limits(scheme, OBLONG, WAVE_SPEED, crossing_rate=0.0, viscosity=8e3, diffusivity=500.0)
        assert both.friction == pytest.approx(angle / (8e3 * stiffness), rel=1e-5)
        assert both.mixing == pytest.approx(angle / (500.0 * stiffness), rel=1e-5)


def test_a_current_may_carry_half_a_cell_away_in_a_step() -> None:
    assert step_limits("forward_backward", SQUARE, WAVE_SPEED, 4e-5, 0.0, 0.0).flow == pytest.approx(12500.0)


def test_what_is_absent_does_not_limit_the_step() -> None:
    calm = limits("forward_backward", SQUARE)
    assert math.isinf(calm.friction) and math.isinf(calm.mixing) and math.isinf(calm.flow)
    assert calm.smallest == calm.waves


@pytest.mark.parametrize(
    ("limit", "cause"),
    [
        ("waves", "gravity waves and rotation"),
        ("friction", "viscosity"),
        ("mixing", "lateral mixing"),
        ("flow", "advection"),
    ],
)
def test_the_smallest_limit_is_named_as_the_cause(limit: str, cause: str) -> None:
    shares = replace(StepLimits(waves=2e3, friction=3e3, mixing=4e3, flow=5e3), **{limit: 1e3})
    assert shares.smallest == 1e3
    assert shares.cause == cause
