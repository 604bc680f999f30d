"""Where friction is small, wind stress alone sets transport and depth (Sverdrup 1947, from memory; depth derived, as in
Pedlosky 1996, from memory)."""

import numpy as np
import pytest

from tests.physics.gyre_runs import SteadyGyre, at, gyre_config, quickened, run_gyre
from tests.theory.gyre_on_grid import sverdrup_bias
from tests.theory.gyres import sverdrup_thickness_from_stress, sverdrup_transport, western_wall_thickness
from tests.theory.munk_gyre import MunkGyre
from tests.theory.stommel_gyre import StommelGyre

# 83 km by 83 km; nearer to the equator and with g' and stress ten times larger the basin adjusts in two years.
COARSE = {"basin.cells_x": 72, "basin.cells_y": 36, "basin.coriolis_at_origin_per_s": 1e-5}
QUARTERS = (0.25, 0.5, 0.75)


@pytest.fixture(scope="module")
def coarse() -> SteadyGyre:
    """The shipped configuration on coarse cells."""
    return run_gyre(quickened(gyre_config("sverdrup_depth", COARSE), 10.0), years=2.0)


def coriolis(gyre: SteadyGyre) -> np.ndarray:
    return gyre.model.grid.coriolis(gyre.model.grid.y)


def at_wall(gyre: SteadyGyre, column: int, outward: float) -> np.ndarray:
    """h on a meridional wall, (ny,): P_wall = P_first + outward f V_first dx/2, for the first cell is inside the current."""
    V = gyre.transport_y
    pressure = 0.5 * gyre.gravity * gyre.thickness[:, column] ** 2
    pressure += outward * coriolis(gyre) * 0.5 * (V[1:, column] + V[:-1, column]) * 0.5 * gyre.model.grid.dx
    return np.sqrt(2.0 * pressure / gyre.gravity)


def along_wall(gyre: SteadyGyre, wall: np.ndarray, y: float) -> float:
    return float(np.interp(y, gyre.model.grid.y - gyre.model.grid.y_south, wall))


def check_depth(gyre: SteadyGyre, share: float) -> None:
    """h half-way across the basin, from the wind and from h on the eastern wall."""
    basin = gyre.basin
    eastern_wall = at_wall(gyre, -1, +1.0)
    distance = 0.5 * basin.length
    for quarter in QUARTERS:
        y = quarter * basin.width
        f = gyre.model.grid.coriolis_origin + basin.beta * y
        stress, slope = float(basin.zonal_stress(y)), float(basin.zonal_stress_slope(y))
        eastern = along_wall(gyre, eastern_wall, y)
        expected = sverdrup_thickness_from_stress(distance, stress, slope, f, basin.beta, gyre.gravity, eastern)
        assert abs(float(expected) - eastern) > 20.0
        assert at(gyre.thickness, gyre.model, basin.length - distance, y) == pytest.approx(float(expected), rel=share)


def check_western_wall(gyre: SteadyGyre, share: float) -> None:
    """(g'/2)(h_e^2 - h_w^2) = tau_x L/rho0, because no volume crosses a latitude of a closed basin."""
    basin = gyre.basin
    western, eastern = at_wall(gyre, 0, -1.0), at_wall(gyre, -1, +1.0)
    for quarter in QUARTERS:
        y = quarter * basin.width
        stress = float(basin.zonal_stress(y))
        expected = western_wall_thickness(stress, basin.length, gyre.gravity, along_wall(gyre, eastern, y))
        assert along_wall(gyre, western, y) == pytest.approx(expected, rel=share)


def test_spin_up_is_over(coarse: SteadyGyre) -> None:
    """Less than a tenth of any tolerance below is left of it."""
    assert coarse.left_thickness < 0.01
    assert coarse.left_psi < 1e-4 * coarse.streamfunction.max()


def test_interior_transport_is_the_curl_of_the_stress(coarse: SteadyGyre) -> None:
    """beta V = curl(tau)/rho0 from mid-basin to a sixth of the width from the east, times what friction leaves and grid adds.

    Friction takes 0.2 % to 0.8 % (exact, tests/theory/munk_gyre.py) and rows of 83 km add 0.35 %.  The grid changes friction
    itself by (l dy)^2 = 0.8 % of it, 6e-5; the boundary current has decayed to exp(-3000/252) = 7e-6 of its nine times
    larger V.
    """
    basin, grid = coarse.basin, coarse.model.grid
    exact = MunkGyre(basin, coarse.model.constants.viscosity, "free_slip")
    columns = (grid.x > 0.5 * basin.length) & (grid.x < 5.0 / 6.0 * basin.length)
    y = grid.y_face[1:-1] - grid.y_south
    curl = -basin.zonal_stress_slope(y)[:, np.newaxis]
    ratio = coarse.transport_y[1:-1, columns] / (curl * sverdrup_transport(1.0, basin.beta, basin.density))
    left_by_friction = exact.profile_derivative(grid.x[columns], 1) * -basin.length / basin.sverdrup_streamfunction
    assert (np.abs(left_by_friction - 1.0) < 0.008).all()
    expected = left_by_friction * (1.0 + sverdrup_bias(basin, grid.dy))
    assert np.abs(ratio - expected).max() < 1e-4


def test_interior_depth_follows_from_the_wind(coarse: SteadyGyre) -> None:
    """0.3 %: friction takes 0.3 % of the Sverdrup transport, the grid adds 0.35 %, both to the 10 % by which h rises."""
    check_depth(coarse, 0.003)


def test_depth_on_the_western_wall_follows_from_the_wind(coarse: SteadyGyre) -> None:
    """0.5 %: what the zonal momentum identity leaves out, friction, and the half cell from the first centre to the wall."""
    check_western_wall(coarse, 0.005)
    # Not so in the first cell, which lies inside the current.
    middle = coarse.model.grid.ny // 2
    assert coarse.thickness[middle, 0] - at_wall(coarse, 0, -1.0)[middle] > 20.0


@pytest.mark.parametrize(("drag", "lost_percent"), [(1e-6, 8.0), (5e-7, 4.0)])
def test_drag_eats_the_interior_transport(drag: float, lost_percent: float) -> None:
    """Mid-basin psi falls short of Sverdrup's by 8.0 % (r = 1e-6 s-1), by half as much with half the drag.

    The grid adds the bias of the interior; its other effects are of second order in the cell over the basin, 3e-4.
    """
    changes = {
        "basin.cells_x": 60,
        "basin.cells_y": 30,
        "basin.coriolis_at_origin_per_s": 0.0,
        "motion.drag_per_day": drag * 86400.0,
    }
    gyre = run_gyre(quickened(gyre_config("stommel_gyre", changes), 10.0), years=1.5)
    basin = gyre.basin
    share = gyre.streamfunction[15, 30] / (0.5 * basin.sverdrup_streamfunction)
    exact = float(StommelGyre(basin, drag).streamfunction(0.5 * basin.length, 0.5 * basin.width))
    exact_share = exact / (0.5 * basin.sverdrup_streamfunction)
    assert 100.0 * (1.0 - exact_share) == pytest.approx(lost_percent, abs=0.2)
    assert share == pytest.approx(exact_share * (1.0 + sverdrup_bias(basin, gyre.model.grid.dy)), abs=5e-4)


FULL_GRID = {"basin.cells_x": 192, "basin.cells_y": 96, "motion.viscosity_m2_per_s": 5e3}


@pytest.mark.slow
@pytest.mark.parametrize(
    ("changes", "faster", "years"), [({}, 1.0, 40.0), (FULL_GRID, 10.0, 7.0)], ids=["shipped", "full_grid"]
)
def test_depth_from_rest(changes: dict[str, float], faster: float, years: float) -> None:
    """As shipped, 62.5 km and A = 40000 m2 s-1; and on 31 km with A = 5000.  h_e = 400 m, hence 459.330, 478.500 and 454.470 m
    at 3000 km and 425.083, 400.000 and 373.235 m on the western wall.

    The spin-up may leave a fifth of the tolerance, 0.3 m.
    """
    gyre = run_gyre(quickened(gyre_config("sverdrup_depth", changes), faster), years)
    assert gyre.left_thickness < 0.3
    check_depth(gyre, 0.003)
    check_western_wall(gyre, 0.005)
    assert at_wall(gyre, -1, +1.0) == pytest.approx(400.0, rel=0.003)
    for quarter, interior, wall in zip(QUARTERS, (459.330, 478.500, 454.470), (425.083, 400.0, 373.235), strict=True):
        y = quarter * gyre.basin.width
        assert at(gyre.thickness, gyre.model, 3e6, y) == pytest.approx(interior, rel=0.003)
        assert along_wall(gyre, at_wall(gyre, 0, -1.0), y) == pytest.approx(wall, rel=0.005)
