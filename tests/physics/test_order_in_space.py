"""The full equations converge at second order as cells shrink: halving dx and dy quarters what a finer grid corrects."""

from __future__ import annotations

from itertools import pairwise
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

from oceanbox.experiment.model import Model
from oceanbox.stepping.runge_kutta import CLASSICAL_4
from tests.building import box, replace_constants, set_state

Array = NDArray[np.float64]
RADIUS = 200e3
# Cells of 62.5, 31.25 and 15.625 km; the next order is (dx/R)^2 = 0.1 of the error on the coarsest, which moves log2 by 0.14.
REFINEMENTS = (2, 4, 8)
NEXT_ORDER = 0.15


def eddy_after_a_day(refinement: int, changes: dict[str, Any], centred_tracers: bool) -> Model:
    """A warm, smooth eddy in mid-basin, so far from the walls that it does not know of them; steps shrink with the cells."""
    model = box(
        {
            "basin.cells_x": 20 * refinement,
            "basin.cells_y": 16 * refinement,
            "basin.width_km": 2500.0,
            "basin.south_km": -1000.0,
            "basin.north_km": 1000.0,
            "basin.coriolis_at_origin_per_s": 3e-5,
            "motion.viscosity_m2_per_s": 2e3,
            "motion.drag_per_day": 0.05,
            "mixing.lateral_diffusivity_m2_per_s": 2e3,
            "numerics.scheme": "runge_kutta_3",
            "numerics.step_s": 4800.0 / refinement,
        }
        | changes,
        CLASSICAL_4,
    )
    replace_constants(model, centred_tracers=centred_tracers)
    grid = model.grid
    x, y = (grid.x - 1250e3) / RADIUS, grid.y / RADIUS
    x_face, y_face = (grid.x_face - 1250e3) / RADIUS, grid.y_face / RADIUS

    def bump(along: Array, across: Array) -> Array:
        return np.asarray(np.exp(-(along[None, :] ** 2 + across[:, None] ** 2)))

    velocity_x = 0.5 * y[:, None] * bump(x_face, y)
    velocity_y = -0.3 * (1.0 + x[None, :]) * bump(x, y_face)
    velocity_x[:, [0, -1]], velocity_y[[0, -1]] = 0.0, 0.0
    set_state(
        model,
        thickness=(150.0 + 30.0 * bump(x, y))[None],
        theta=(20.0 + 3.0 * bump(x - 0.3, y))[None],
        velocity_x=velocity_x[None],
        velocity_y=velocity_y[None],
    )
    model.advance(18 * refinement)
    return model


def fields(model: Model) -> dict[str, Array]:
    """Thickness, temperature and velocities of the layer."""
    return {
        "thickness": model.thickness[0],
        "temperature": model.theta[0],
        "velocity_x": model.velocity_x[0],
        "velocity_y": model.velocity_y[0],
    }


def on_coarser_cells(fine: dict[str, Array]) -> dict[str, Array]:
    """Means over the fine points around each coarse point, second order."""

    def pairs(field: Array) -> Array:
        return np.asarray(0.5 * (field[::2] + field[1::2]))

    return {
        "thickness": pairs(pairs(fine["thickness"]).T).T,
        "temperature": pairs(pairs(fine["temperature"]).T).T,
        "velocity_x": pairs(fine["velocity_x"])[:, ::2],
        "velocity_y": pairs(fine["velocity_y"].T).T[::2],
    }


def corrections(changes: dict[str, Any], centred_tracers: bool) -> list[dict[str, Array]]:
    """What each refinement changes, coarse minus fine, per field."""
    states = [fields(eddy_after_a_day(refinement, changes, centred_tracers)) for refinement in REFINEMENTS]
    return [
        {name: coarse[name] - onto for name, onto in on_coarser_cells(fine).items()}
        for coarse, fine in pairwise(states)
    ]


@pytest.mark.parametrize("advection", [True, False], ids=["advected momentum", "momentum not advected"])
def test_the_equations_are_second_order_in_space(advection: bool) -> None:
    """Largest correction of every field; tracers centred, since a limiter gives up an order at an extremum."""
    first, second = corrections({"motion.momentum_advection": advection}, centred_tracers=True)
    for name in first:
        order = np.log2(np.abs(first[name]).max() / np.abs(second[name]).max())
        assert order == pytest.approx(2.0, abs=NEXT_ORDER), name


def test_upwind_biased_thickness_keeps_second_order_where_the_layer_is_smooth() -> None:
    """Mean correction, which the one extremum of thickness hardly touches."""
    first, second = corrections({"numerics.thickness_flux": "upwind_biased"}, centred_tracers=True)
    for name in ("thickness", "velocity_x", "velocity_y"):
        order = np.log2(np.abs(first[name]).mean() / np.abs(second[name]).mean())
        assert order > 2.0 - NEXT_ORDER, name


def test_limited_tracers_keep_second_order_in_the_mean() -> None:
    """The limiter flattens the extremum, a few cells that shrink with the grid."""
    first, second = corrections({}, centred_tracers=False)
    order = np.log2(np.abs(first["temperature"]).mean() / np.abs(second["temperature"]).mean())
    assert order > 2.0 - NEXT_ORDER
