"""Munk's gyre (Munk 1950, J. Meteorol. 7, 79, from memory); closed basins and free-slip walls derived.

The default tests run a basin of a third of the width: psi depends on the width in a known way, but fills it in a second.  Its
cells are half a boundary layer (A/beta)^(1/3) = 63 km wide, as in the shipped configuration.

Tolerance 1 %: measured beforehand, the grid changes the overshoot by less than 0.4 % at two cells a layer, and rows of 75 km
add 11/24 (pi dy/B)^2 = 0.3 % to the interior.  The exact solution has no friction at the zonal walls, the model's no-slip basin
has; but that layer, (A L/beta)^(1/4) = 150 km thick, is ten times thinner than the way to mid-basin (200 km and eight times
in the full width).
"""

import numpy as np
import pytest

from oceanbox.constants import DAYS_PER_YEAR
from tests.physics.gyre_runs import SVERDRUP, SteadyGyre, gyre_config, run_gyre
from tests.theory.munk_gyre import MunkGyre, Side, munk_overshoot, munk_width

TOLERANCE = 0.01
NARROW = {"basin.width_km": 2000.0, "basin.cells_x": 64, "basin.cells_y": 40}
SIDES: tuple[Side, Side] = ("no_slip", "free_slip")


@pytest.fixture(scope="module", params=SIDES)
def narrow(request: pytest.FixtureRequest) -> SteadyGyre:
    """The shipped gyre in a narrow basin."""
    return run_gyre(gyre_config("munk_gyre", NARROW | {"basin.side_walls": request.param}), years=3.0)


def exact_gyre(gyre: SteadyGyre) -> MunkGyre:
    return MunkGyre(gyre.basin, gyre.model.constants.viscosity, gyre.on_grid.side)


def overshoot(x: np.ndarray, psi: np.ndarray, width: float) -> float:
    """Largest psi over the straight line of the interior, ten boundary layers from the west to six from the east."""
    inside = (x > 10.0 * width) & (x < x[-1] - 6.0 * width)
    line = np.polyfit(x[inside], psi[inside], 1)
    top = int(psi.argmax())
    return float(psi[top] / np.polyval(line, x[top]))


def test_gyre_of_a_closed_basin(narrow: SteadyGyre) -> None:
    """Strength to 1 %, place to half a cell."""
    largest, place = exact_gyre(narrow).maximum()
    psi = narrow.streamfunction
    assert narrow.left_psi < 0.1 * TOLERANCE * largest
    assert psi.max() == pytest.approx(largest, rel=TOLERANCE)
    assert np.abs(narrow.model.grid.x_face[psi.max(axis=0).argmax()] - place) <= 0.5 * narrow.model.grid.dx


def test_boundary_current_overshoots_the_interior(narrow: SteadyGyre) -> None:
    """1.17 without slip, 1.31 with it; closer to the 1.163 and 1.298 of a single layer the wider the basin."""
    width = munk_width(narrow.model.constants.viscosity, narrow.model.grid.beta)
    x, middle = narrow.model.grid.x_face, narrow.model.grid.ny // 2
    exact = exact_gyre(narrow).profile(x)
    assert overshoot(x, narrow.streamfunction[middle], width) == pytest.approx(
        overshoot(x, exact, width), rel=TOLERANCE
    )


def test_streamfunction_between_free_slip_walls_solves_the_difference_equations() -> None:
    """Exact on the grid; its x and y are told apart by cells of 83 km by 75 km."""
    changes = {"basin.width_km": 4000.0, "basin.cells_x": 48, "basin.cells_y": 40, "motion.viscosity_m2_per_s": 2e4}
    config = gyre_config("munk_gyre", changes | {"basin.side_walls": "free_slip"})
    gyre = run_gyre(config, years=6.0)
    expected = gyre.on_grid.streamfunction
    assert gyre.left_psi < 1e-4 * expected.max()
    assert np.abs(gyre.streamfunction - expected).max() < gyre.left_psi
    thickness = gyre.on_grid.thickness(0.0, gyre.gravity, 500.0)
    assert np.ptp(thickness) > 20.0
    assert np.abs(gyre.thickness - thickness).max() < gyre.left_thickness < 0.01


@pytest.mark.slow
@pytest.mark.parametrize(
    ("side", "strength", "place"), [("no_slip", 34.0353, 224493.0), ("free_slip", 38.8695, 150766.0)]
)
def test_the_shipped_configuration_reaches_the_published_gyre_from_rest(
    side: Side, strength: float, place: float
) -> None:
    """31 km, half a boundary layer."""
    config = gyre_config("munk_gyre", {"basin.side_walls": side})
    gyre = run_gyre(config, years=config.evolve.duration_days / DAYS_PER_YEAR)
    x, psi = gyre.model.grid.x_face, gyre.streamfunction
    assert gyre.left_psi < 0.2 * TOLERANCE * psi.max()
    assert psi.max() / SVERDRUP == pytest.approx(strength, rel=TOLERANCE)
    assert np.abs(x[psi.max(axis=0).argmax()] - place) <= 0.5 * gyre.model.grid.dx
    width = munk_width(gyre.model.constants.viscosity, gyre.model.grid.beta)
    single_layer, _ = munk_overshoot(side)
    assert overshoot(x, psi[gyre.model.grid.ny // 2], width) == pytest.approx(single_layer, rel=TOLERANCE)
