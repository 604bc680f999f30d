"""The step in plain NumPy, and the one in C where there is a compiler, do what the compiled step does."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

from oceanbox.experiment.assembly import assemble_setup
from oceanbox.experiment.model import Model
from oceanbox.grid import HALO
from tests.benchmarks.basin import reference_config
from tests.benchmarks.c_step import advance_c, have_compiler
from tests.benchmarks.numpy_step import advance_numpy
from tests.building import set_state

# Thirty steps of some hundred operations, each rounded to 1.1e-16 of the largest value, are 3e-13 if no rounding cancels another.
AGREEMENT = 1e-12
STEPS = 30


def restless_basin() -> Model:
    """A coarse reference basin far from balance: waves, upwelling, cooling and outcrops in the first day."""
    model = Model(assemble_setup(reference_config(36, 20, {"numerics.step_s": 3600.0})))
    grid, rng = model.grid, np.random.default_rng(7)
    y, x = np.meshgrid(np.linspace(-1.0, 1.0, grid.ny), np.linspace(0.0, 1.0, grid.nx), indexing="ij")
    thickness = 95.0 + 60.0 * np.cos(3.0 * y) * (1.0 - x) + 5.0 * rng.random((grid.ny, grid.nx))
    theta = np.maximum(22.0 * np.cos(1.6 * y) + rng.random((grid.ny, grid.nx)), 0.5)
    u, v = np.zeros((grid.ny, grid.nx + 1)), np.zeros((grid.ny + 1, grid.nx))
    u[:, 1:-1] = 0.3 * rng.standard_normal((grid.ny, grid.nx - 1))
    v[1:-1] = 0.3 * rng.standard_normal((grid.ny - 1, grid.nx))
    set_state(model, thickness=thickness[None], theta=theta[None], velocity_x=u[None], velocity_y=v[None])
    return model


def everything(*groups: Any) -> dict[str, NDArray[np.float64]]:
    """Interior of all arrays that are named alike; on walls nothing moves and what stands there is never used."""
    inside = slice(HALO + 1, -HALO - 1)
    return {
        name: array[..., inside, inside]
        for group in groups
        for name, array in group._asdict().items()
        if array.ndim > 1
    }


@pytest.mark.parametrize(
    "advance",
    [
        pytest.param(advance_numpy, id="NumPy"),
        pytest.param(advance_c, id="C", marks=pytest.mark.skipif(not have_compiler(), reason="gcc is not installed")),
    ],
)
def test_a_step_written_independently_of_the_kernels_agrees_with_the_compiled_one(advance: Callable[..., None]) -> None:
    """State, memory and every entry of the books agree to round-off over tens of steps."""
    model, other = restless_basin(), restless_basin()
    clock = other.clock
    advance(
        other.state, other.memory, other.setup.forcing, other.constants, other.ledger, 0, 0, clock.seconds, clock.dt,
        other.exchange_every, STEPS,
    )  # fmt: skip
    model.advance(STEPS)

    expected = everything(model.state, model.ledger)
    found = everything(other.state, other.ledger)
    busy = [name for name, field in expected.items() if field.any()]
    assert {
        "entrainment_upwelling",
        "entrainment_shoaling",
        "transformation",
        "outcrop_volume",
        "heat_restoring",
    } <= set(busy)
    for name, field in expected.items():
        assert np.abs(found[name] - field).max() <= AGREEMENT * np.abs(field).max(), name
