"""Adjustment of a step in thickness under rotation: Rossby 1938, J. Mar. Res. 1, 239; Gill 1982, section 7.2 (from memory)."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

from oceanbox.experiment.model import Model
from tests.physics.check_ocean import check_model
from tests.theory.adjustment import (
    adjusted_finite_step,
    adjusted_finite_step_depth,
    adjusted_step_height,
    adjusted_step_on_c_grid,
    adjusted_step_velocity,
    deformation_radius,
    dry_collapse_depth,
    dry_collapse_front,
)

Array = NDArray[np.float64]
F = 1e-4
GRAVITY = 0.02
DEPTH = 500.0
RADIUS = deformation_radius(np.sqrt(GRAVITY * DEPTH), F)
INERTIAL_PERIOD = 2.0 * np.pi / F


@dataclass(frozen=True)
class Adjusted:
    """Profiles in y, (ny,): y [m]; h at the start and in the mean of the end [m]; u [m s-1]; the dye of the northern water."""

    y: Array
    before: Array
    thickness: Array
    velocity: Array
    dye: Array
    spacing: float

    def energies(self, within: float) -> tuple[float, float]:
        """(Potential energy released, kinetic energy kept) [m4 s-2] where |y| < ``within`` [m]."""
        near = np.abs(self.y) < within
        released = 0.5 * GRAVITY * float((self.before**2 - self.thickness**2)[near].sum()) * self.spacing
        kept = 0.5 * float((self.thickness * self.velocity**2)[near].sum()) * self.spacing
        return released, kept


def settle(model: Model, periods: float, averaged: float) -> Adjusted:
    """Run for ``periods`` inertial periods, then average over ``averaged`` more with a weight sin^2.

    A wave near f that is left behind decays as (f t)^(-3/2), 1/500 after ten periods (Cahn 1945, J. Meteorol. 2, 113), and the
    weighted mean over N of its periods keeps less than 1/N^3 of it.
    """
    before = model.thickness[0, :, 0]
    model.advance(round(periods * INERTIAL_PERIOD / model.clock.dt))
    count = round(averaged * INERTIAL_PERIOD / model.clock.dt)
    weights = np.sin(np.pi * (np.arange(count) + 0.5) / count) ** 2
    thickness, velocity, salt = (np.zeros(model.grid.ny) for _ in range(3))
    column = (0, slice(2, -2), 2)
    for weight in weights / weights.sum():
        model.advance(1)
        thickness += weight * model.state.thickness[column]
        velocity += weight * model.state.velocity_x[column]
        salt += weight * model.state.salt[column]
    return Adjusted(model.grid.y, before, thickness, velocity, salt / thickness, model.grid.dy)


def deep_step(south: float, north: float, cells_per_radius: int, changes: dict[str, Any] | None = None) -> Model:
    """The nonlinear step from ``south`` to ``north`` [m], both coloured by a dye, within 15 radii of the deeper water."""
    radius = deformation_radius(np.sqrt(GRAVITY * south), F)
    return check_model(
        "rossby_adjustment",
        {
            "basin.south_km": -15e-3 * radius,
            "basin.north_km": 15e-3 * radius,
            "basin.cells_y": 30 * cells_per_radius,
            "layers.0.initial_thickness_m": {"points": [[-1e-6, south], [1e-6, north]]},
            "layers.0.initial_salinity_g_per_kg": {"points": [[-1e-6, 35.0], [1e-6, 36.0]]},
            "water.haline_contraction_kg_per_g": 0.0,
            "motion.momentum_advection": True,
            "motion.linear_about_depth_m": None,
            "motion.sponge.width_km": 5e-3 * radius,
        }
        | (changes or {}),
    )


@cache
def small_step(cells_per_radius: int, scheme: str = "runge_kutta_3") -> Adjusted:
    """The linear step of +-1 m of ``configs/checks/rossby_adjustment.yaml``."""
    model = check_model("rossby_adjustment", {"basin.cells_y": 60 * cells_per_radius, "numerics.scheme": scheme})
    return settle(model, periods=10.0, averaged=5.0)


@pytest.mark.parametrize("scheme", ["forward_backward", "runge_kutta_3"])
@pytest.mark.parametrize("cells_per_radius", [4, 10])
def test_a_small_step_settles_into_the_balance_of_the_grid(cells_per_radius: int, scheme: str) -> None:
    """Exact on the C-grid (derived); 1e-4 of the step is above the waves that are left, 2e-5 (see `settle`)."""
    end = small_step(cells_per_radius, scheme)
    exact = adjusted_step_on_c_grid(30 * cells_per_radius, end.spacing, 1.0, DEPTH, GRAVITY, F)
    near = np.abs(end.y) < 10.0 * RADIUS
    assert end.thickness[near] - DEPTH == pytest.approx(exact.eta[near], rel=0, abs=1e-4)
    # x northward in place of eastward turns the current along the step from v to -u.
    scale = GRAVITY / (F * RADIUS)
    assert end.velocity[near] == pytest.approx(-exact.v[near], rel=0, abs=1e-4 * scale)


def test_a_small_step_settles_into_an_exponential_of_the_deformation_radius() -> None:
    """eta = -eta0 sign(y) (1 - exp(-|y|/Ld)), and the current is g eta0/(f Ld) exp(-|y|/Ld).

    The averages of the grid enter twice, each with a relative error of (dy/Ld)^2/8.
    """
    end = small_step(10)
    near = np.abs(end.y) < 10.0 * RADIUS
    tolerance = 0.25 * (end.spacing / RADIUS) ** 2
    height = adjusted_step_height(end.y[near], 1.0, RADIUS)
    current = -adjusted_step_velocity(end.y[near], 1.0, RADIUS, GRAVITY, F)
    assert end.thickness[near] - DEPTH == pytest.approx(height, rel=0, abs=tolerance)
    assert end.velocity[near] == pytest.approx(current, rel=0, abs=tolerance * GRAVITY / (F * RADIUS))


@pytest.mark.parametrize("cells_per_radius", [4, 10])
def test_a_third_of_the_energy_a_small_step_releases_stays_as_motion(cells_per_radius: int) -> None:
    """1/3 at every resolution (derived); waves of 2e-5 of the step that are left leave 1e-4 of the energy uncertain."""
    released, kept = small_step(cells_per_radius).energies(within=10.0 * RADIUS)
    assert kept / released == pytest.approx(1.0 / 3.0, rel=2e-4)


def interface_of(end: Adjusted) -> float:
    """Where the waters of the two sides meet [m], from the dye."""
    first = int(np.argmax(end.dye > 0.5))
    return float(np.interp(0.5, end.dye[first - 1 : first + 1], end.y[first - 1 : first + 1]))


def check_finite_step(end: Adjusted, south: float, north: float, off_interface: float) -> None:
    """The interface to ``off_interface`` [m], the thickness to 2 % of the deeper water's, the third of energy to 1 %."""
    radius = deformation_radius(np.sqrt(GRAVITY * south), F)
    exact = adjusted_finite_step(south, north, GRAVITY, F)
    near = np.abs(end.y) < 8.0 * radius
    depth = adjusted_finite_step_depth(end.y[near], south, north, GRAVITY, F)
    assert interface_of(end) == pytest.approx(exact.interface, abs=off_interface)
    assert end.thickness[near] == pytest.approx(depth, rel=0, abs=0.02 * south)
    assert np.interp(exact.interface, end.y, end.thickness) == pytest.approx(exact.depth, rel=0.02)
    released, kept = end.energies(within=8.0 * radius)
    assert kept / released == pytest.approx(1.0 / 3.0, rel=0.01)


def test_a_step_of_any_height_settles_where_potential_vorticity_says() -> None:
    """100 m beside 50 m: interface at 4142.14 m, 70.7107 m deep (derived).

    2 % of the way is 0.09 of these cells; the profile has a kink at the interface, which a cell rounds off.
    """
    end = settle(deep_step(100.0, 50.0, cells_per_radius=15), periods=8.0, averaged=4.0)
    check_finite_step(end, 100.0, 50.0, off_interface=0.02 * 4142.14)


def test_a_tenfold_step_settles_where_potential_vorticity_says() -> None:
    """100 m beside 10 m, as above; the shallow side has six cells in its radius, so the interface is known to half a cell."""
    end = settle(deep_step(100.0, 10.0, cells_per_radius=20), periods=8.0, averaged=4.0)
    check_finite_step(end, 100.0, 10.0, off_interface=0.5 * end.spacing)


FILM = 0.1  # m, where the ground is to be dry


def collapse(cells_per_radius: int, step: float) -> Adjusted:
    """100 m of water let go beside a film, with upwind-biased thickness; the step [s] suits its front, 2 sqrt(g'H) fast."""
    model = deep_step(
        100.0,
        FILM,
        cells_per_radius,
        {
            "numerics.thickness_flux": "upwind_biased",
            "numerics.scheme": "forward_backward",
            "numerics.step_s": step,
        },
    )
    volume = model.thickness.sum()
    end = settle(model, periods=8.0, averaged=4.0)
    steps_taken = model.clock.steps
    assert model.thickness.min() > 0.0
    assert model.thickness.sum() == pytest.approx(volume, rel=np.finfo(float).eps * steps_taken)
    return end


def distance_from_collapsed(end: Adjusted) -> float:
    """Int |h - exact| dy over (H a): the share of a full radius of water that is not where it belongs."""
    radius = dry_collapse_front(100.0, GRAVITY, F)
    near = np.abs(end.y) < 4.0 * radius
    exact = np.maximum(dry_collapse_depth(end.y, 100.0, GRAVITY, F), FILM)
    return float(np.abs(end.thickness - exact)[near].sum() * end.spacing / (100.0 * radius))


def test_water_let_go_on_dry_ground_comes_to_rest_one_radius_ahead() -> None:
    """h = H [1 - exp((y - a)/a)], a = sqrt(g'H)/f = 14142 m (derived; Kuo and Polvani 1997, J. Phys. Oceanogr. 27, 1614).

    To a cell: all the water that is out of place is less than what a shift of the front by one cell moves, H dy, and the place
    where 5 % of the depth is left lies within one.  Behind the front, up to a/2, the thickness holds to 2 % of H.  Ahead of it
    a monotone scheme leaves a thin tail.
    """
    end = collapse(cells_per_radius=10, step=150.0)
    radius = dry_collapse_front(100.0, GRAVITY, F)
    assert distance_from_collapsed(end) < end.spacing / radius
    last = int(np.argmax(end.thickness < 5.0))
    shallow = np.interp(-5.0, -end.thickness[last - 1 : last + 1], end.y[last - 1 : last + 1])
    assert shallow == pytest.approx(radius * (1.0 + np.log(0.95)), abs=end.spacing)
    behind = (end.y > -4.0 * radius) & (end.y < 0.5 * radius)
    exact = dry_collapse_depth(end.y[behind], 100.0, GRAVITY, F)
    assert end.thickness[behind] == pytest.approx(exact, rel=0, abs=2.0)


def test_the_collapse_on_dry_ground_converges_at_first_order() -> None:
    """What is out of place halves with the cells, as behind the front of any monotone scheme; a tenth for higher orders."""
    coarse = distance_from_collapsed(collapse(cells_per_radius=10, step=150.0))
    fine = distance_from_collapsed(collapse(cells_per_radius=20, step=75.0))
    assert coarse / fine > 2.0 * 0.9
