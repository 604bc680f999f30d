"""The model itself is stable just below each stated limit and unstable just above it, on checkerboard noise."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

from oceanbox.experiment.model import Model
from oceanbox.stepping.limits import StepLimits, step_limits
from tests.building import box, replace_constants, set_state, temperature_for

Array = NDArray[np.float64]
DEPTH = 156.25
BELOW, ABOVE = 0.98, 1.02
# At 2 % above a limit the weakest growth, of the three-stage scheme, is 1.6 % a step: 1e7-fold in this many.
STEPS = 1000
# Waves of a multi-step scheme are not orthogonal: their sum may grow for a while, by a small factor, where none does.
NEVER_MORE = 2.0


@dataclass(frozen=True)
class Case:
    """A basin of ``spacing`` [m] cells with Coriolis parameter ``f`` [s-1]."""

    spacing: float
    f: float


# f dt at the limit: none, 0.6, and so large cells that rotation alone sets the limit.
CASES = {"no rotation": Case(25e3, 0.0), "rotation": Case(25e3, 1e-4), "rotation alone": Case(400e3, 1e-4)}


def linear_ocean(case: Case, scheme: str, step: float, changes: dict[str, Any] | None = None) -> Model:
    """A linear channel, long enough in y that walls cost the fastest waves 0.1 % of their frequency."""
    return box(
        {
            "basin.zonal_boundary": "periodic",
            "basin.cells_x": 16,
            "basin.cells_y": 32,
            "basin.width_km": 16e-3 * case.spacing,
            "basin.south_km": -16e-3 * case.spacing,
            "basin.north_km": 16e-3 * case.spacing,
            "basin.coriolis_at_origin_per_s": case.f,
            "basin.beta_per_m_s": 0.0,
            "layers.0.initial_thickness_m": DEPTH,
            "motion.momentum_advection": False,
            "motion.linear_about_depth_m": DEPTH,
            "numerics.scheme": scheme,
            "numerics.step_s": step,
        }
        | (changes or {})
    )


def limits(case: Case, scheme: str, viscosity: float = 0.0, diffusivity: float = 0.0) -> StepLimits:
    grid = linear_ocean(case, scheme, step=1.0).grid
    return step_limits(scheme, grid, 2.5, crossing_rate=0.0, viscosity=viscosity, diffusivity=diffusivity)


def checkerboard_noise(shape: tuple[int, int], rng: np.random.Generator) -> Array:
    """A checkerboard with a tenth of white noise, which holds every other wave as well."""
    j, i = np.indices(shape)
    return np.asarray((-1.0) ** (i + j) + 0.1 * rng.standard_normal(shape))


def stir(model: Model, size: float) -> None:
    """Checkerboard noise of ``size`` m s-1 in the velocities and of the same energy in the thickness."""
    rng = np.random.default_rng(7)
    grid = model.grid
    h, u, v = (checkerboard_noise(shape, rng) for shape in ((32, 16), (32, 17), (33, 16)))
    u[:, -1] = u[:, 0]
    v[[0, -1]] = 0.0
    set_state(
        model,
        thickness=(DEPTH + size * DEPTH / 2.5 * h)[None],
        theta=np.full((1, grid.ny, grid.nx), float(model.theta[0, 0, 0])),
        velocity_x=size * u[None],
        velocity_y=size * v[None],
    )


def amplitude(model: Model) -> float:
    """Root mean square of velocities and of the thickness in units of velocity, m s-1."""
    height = (model.thickness - DEPTH) * 2.5 / DEPTH
    return float(np.sqrt((height**2).mean() + (model.velocity_x**2).mean() + (model.velocity_y**2).mean()))


def fastest(model: Model) -> float:
    """Largest velocity, m s-1."""
    return float(max(np.abs(model.velocity_x).max(), np.abs(model.velocity_y).max()))


def growth(model: Model) -> float:
    """Final over initial amplitude after STEPS steps, or after fewer once it has grown 1e6-fold."""
    first = amplitude(model)
    for _ in range(STEPS // 50):
        model.advance(50)
        if not amplitude(model) < 1e6 * first:
            break
    return amplitude(model) / first


@pytest.mark.parametrize("scheme", ["forward_backward", "runge_kutta_3"])
@pytest.mark.parametrize("name", list(CASES))
def test_waves_are_stable_below_their_limit_and_unstable_above(name: str, scheme: str) -> None:
    limit = limits(CASES[name], scheme).waves
    for share in (BELOW, ABOVE):
        model = linear_ocean(CASES[name], scheme, share * limit)
        stir(model, size=1e-6)
        if share == BELOW:
            assert growth(model) < NEVER_MORE
        else:
            assert not growth(model) < 1e3


@pytest.mark.parametrize("scheme", ["forward_backward", "runge_kutta_3"])
@pytest.mark.parametrize("acts_on", ["velocity", "transport"])
def test_friction_is_stable_below_its_limit_and_unstable_above(acts_on: str, scheme: str) -> None:
    """In water with almost no buoyancy, so that nothing but friction acts."""
    case, viscosity = CASES["no rotation"], 1e4
    limit = limits(case, scheme, viscosity=viscosity).friction
    for share in (BELOW, ABOVE):
        model = linear_ocean(
            case,
            scheme,
            share * limit,
            {
                "motion.viscosity_m2_per_s": viscosity,
                "motion.viscosity_acts_on": acts_on,
                "layers.0.initial_temperature_degC": temperature_for(1e-12),
            },
        )
        stir(model, size=1e-9)
        before = fastest(model)
        model.advance(300)
        if share == BELOW:
            assert fastest(model) < before
        else:
            assert fastest(model) > 1e3 * before


@pytest.mark.parametrize("scheme", ["forward_backward", "runge_kutta_3"])
def test_lateral_mixing_is_stable_below_its_limit_and_unstable_above(scheme: str) -> None:
    """Temperature noise in water that gravity does not move."""
    case, diffusivity = CASES["no rotation"], 1e4
    limit = limits(case, scheme, diffusivity=diffusivity).mixing
    for share in (BELOW, ABOVE):
        model = linear_ocean(case, scheme, share * limit, {"mixing.lateral_diffusivity_m2_per_s": diffusivity})
        replace_constants(model, gravity=1e-12)
        noise = 1e-6 * checkerboard_noise((32, 16), np.random.default_rng(7))
        set_state(model, theta=(20.0 + noise)[None])
        model.advance(300)
        spread = float(np.abs(model.theta - 20.0).max() / np.abs(noise).max())
        if share == BELOW:
            assert spread < 1.0
        else:
            assert spread > 1e3


@pytest.mark.parametrize("scheme", ["forward_backward", "runge_kutta_3"])
def test_the_limits_hold_for_small_waves_of_the_full_equations(scheme: str) -> None:
    """With momentum advection and nothing linearised, in the closed box; noise so small that its growth stays linear."""
    case = CASES["rotation"]
    limit = limits(case, scheme).waves
    full = {"motion.momentum_advection": True, "motion.linear_about_depth_m": None}
    for share in (BELOW, ABOVE):
        model = linear_ocean(case, scheme, share * limit, full)
        stir(model, size=1e-12)
        if share == BELOW:
            assert growth(model) < NEVER_MORE
        else:
            assert not growth(model) < 1e3
