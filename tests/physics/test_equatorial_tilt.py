"""A uniform zonal wind over a closed layer ends at rest, with h h_x = tau_x/(rho0 g') at every latitude: exact, derived.

The C-grid holds it exactly too, because the wind acts on the arithmetic mean thickness of a face: h_i^2 is linear in i.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

from oceanbox.experiment.model import Model
from tests.building import run_days, set_state
from tests.physics.check_ocean import check_model
from tests.theory.equatorial_balance import tilted_thickness_on_centres

Array = NDArray[np.float64]
EPS = float(np.finfo(float).eps)
STRESS, GRAVITY, DEPTH = -0.05, 0.04, 150.0
YEAR = 365.25
# Few cells and low latitudes: exact all the same, and at rest within five years.
SMALL: dict[str, Any] = {
    "basin.cells_x": 30,
    "basin.cells_y": 20,
    "basin.south_km": -1000.0,
    "basin.north_km": 1000.0,
}


def exact(model: Model) -> Array:
    """The thickness at rest, (nx,), m."""
    grid = model.grid
    return np.asarray(tilted_thickness_on_centres(grid.nx, STRESS, grid.nx * grid.dx, GRAVITY, DEPTH), dtype=float)


def roundoff(model: Model) -> float:
    """Round-off of the thickness [m]: half a unit in the last place of 200 m a step, at random."""
    return EPS * 200.0 * np.sqrt(model.clock.steps)


@pytest.mark.parametrize("scheme", ["forward_backward", "runge_kutta_3"])
@pytest.mark.parametrize("advection", [True, False], ids=["advected", "not advected"])
def test_a_tilted_layer_at_rest_stays_at_rest(scheme: str, advection: bool) -> None:
    """A year without change; a thickness off by round-off moves as waves with velocities c/h times as large, c/h < 0.02 s-1."""
    model = check_model(
        "exact_tilt",
        SMALL | {"numerics.scheme": scheme, "motion.momentum_advection": advection, "motion.drag_per_day": 0.0},
    )
    grid = model.grid
    tilted = np.broadcast_to(exact(model), (1, grid.ny, grid.nx))
    set_state(model, tilted, model.theta)
    run_days(model, YEAR)
    assert model.thickness == pytest.approx(tilted, rel=0, abs=roundoff(model))
    speed = max(float(np.abs(model.velocity_x).max()), float(np.abs(model.velocity_y).max()))
    assert speed <= 0.02 * roundoff(model)


def test_a_level_layer_under_wind_comes_to_the_exact_tilt_on_every_row() -> None:
    """From rest and level, with drag: nothing moves any more after five years, and h^2 is linear to round-off."""
    model = check_model("exact_tilt", SMALL)
    run_days(model, 5.0 * YEAR)
    assert float(np.abs(model.velocity_x).max()) < 1e-10
    assert model.thickness[0] == pytest.approx(np.broadcast_to(exact(model), (20, 30)), rel=0, abs=roundoff(model))


@pytest.mark.slow
def test_the_exact_tilt_of_the_shipped_configuration_is_reached() -> None:
    """204.923 m in the first cell, 75.1793 m in the last, on every row to 3000 km from the equator, once u < 1e-10 m s-1.

    1e-6 m is what is left of the slowest waves, which lose a factor of 75 in ten years, when u has fallen so low.
    """
    model = check_model("exact_tilt")
    run_days(model, 50.0 * YEAR)
    assert float(np.abs(model.velocity_x).max()) < 1e-10
    assert model.thickness[0] == pytest.approx(np.broadcast_to(exact(model), (60, 150)), rel=0, abs=1e-6)
    assert model.thickness[0, :, 0] == pytest.approx(204.923, abs=5e-4)
    assert model.thickness[0, :, -1] == pytest.approx(75.1793, abs=5e-5)
