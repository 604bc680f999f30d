"""The difference equations of a gyre: they are met, their biases are the measured ones, and they vanish with the cells."""

import numpy as np
import pytest

from tests.theory.gyre_on_grid import GridGyre, sverdrup_bias
from tests.theory.gyres import GyreBasin
from tests.theory.munk_gyre import MunkGyre, Side
from tests.theory.printed import rounds_to
from tests.theory.stommel_gyre import StommelGyre

WEAK_BASIN = GyreBasin(length=6e6, width=3e6, stress=0.02, beta=2e-11)
BASIN = GyreBasin(length=6e6, width=3e6, stress=0.1, beta=2e-11)
F0 = 6e-5


# Measured with an independent steady solver of U, V and P on the C-grid.
@pytest.mark.parametrize(
    ("cells_y", "bias", "centre", "deepest", "east"),
    [
        (30, "3.08", "509.918", "529.639", "484.825"),
        (60, "0.37", "509.922", "528.848", "484.630"),
        (120, "0.095", "509.924", "528.776", "484.523"),
    ],
)
def test_biases_of_the_stommel_gyre(cells_y: int, bias: str, centre: str, deepest: str, east: str) -> None:
    """To the digits of the measured values; mid-basin is a corner of cells: the mean of the cells around it."""
    gyre = GridGyre(WEAK_BASIN, 2 * cells_y, cells_y, drag=1e-6)
    exact, _ = StommelGyre(WEAK_BASIN, 1e-6).maximum()
    assert rounds_to(100.0 * (gyre.streamfunction.max() / exact - 1.0), bias)
    h = gyre.thickness(F0, 0.02, 500.0)
    middle = slice(cells_y // 2 - 1, cells_y // 2 + 1)
    assert h.mean() == pytest.approx(500.0, abs=1e-9)
    for value, text in (
        (h[middle, cells_y - 1 : cells_y + 1].mean(), centre),
        (h.max(), deepest),
        (h[middle, -1].mean(), east),
    ):
        assert value == pytest.approx(float(text), abs=1e-3)


@pytest.mark.parametrize("side", ["no_slip", "free_slip"])
def test_gyres_on_a_grid_tend_to_the_exact_ones_with_the_square_of_the_cells(side: Side) -> None:
    """Stommel and Munk at once: errors fall by 4 when the cells are halved, within the next order.

    An error a e + b e^2, e = (dx/delta)^2 = 1/10 on the coarse grid and b of the size of a, falls by 4 within 3/4 e = 8 %.
    """
    errors = []
    for cells in (96, 192):
        stommel = GridGyre(WEAK_BASIN, 4 * cells, cells, drag=1e-6)  # 15.6 and 7.8 km; r/beta = 50 km
        munk = GridGyre(BASIN, 4 * cells, cells, viscosity=5e3, side=side)  # (A/beta)^(1/3) = 63 km
        x = np.arange(4 * cells + 1) * stommel.dx
        exact_stommel, exact_munk = StommelGyre(WEAK_BASIN, 1e-6).profile(x), MunkGyre(BASIN, 5e3, side).profile(x)
        errors.append(
            [
                np.abs(stommel.profile - exact_stommel).max() / exact_stommel.max(),
                np.abs(munk.profile - exact_munk).max() / exact_munk.max(),
            ]
        )
    coarse, fine = np.array(errors)
    assert (coarse < 0.01).all()
    assert coarse / fine == pytest.approx([4.0, 4.0], rel=0.08)


@pytest.mark.parametrize("side", ["no_slip", "free_slip"])
def test_pressure_of_a_gyre_on_a_grid_does_not_depend_on_the_path(side: Side) -> None:
    """Round-off: sums of some hundred terms of size f V dy."""
    gyre = GridGyre(BASIN, 40, 30, drag=1e-6, viscosity=5e4, side=side)
    pressure = gyre.pressure_without_constant(F0)
    U, V = gyre.transport_x, gyre.transport_y
    sign = 1.0 if side == "free_slip" else -1.0
    column = np.column_stack([V[:, -2], V[:, -1], sign * V[:, -1]])
    f = F0 + BASIN.beta * gyre.dy * np.arange(1, 30)
    friction = np.diff(column[:, 1], 2) / gyre.dy**2 + np.diff(column, 2, axis=1)[1:-1, 0] / gyre.dx**2
    northward = -f * 0.25 * (U[1:, -1] + U[:-1, -1] + U[1:, -2] + U[:-1, -2])
    northward += gyre.viscosity * friction - gyre.drag * V[1:-1, -1]
    largest = float(np.abs(f * V[1:-1, 0]).max()) * gyre.dy
    assert np.abs(np.diff(pressure[:, -1]) / gyre.dy - northward).max() * gyre.dy < 1e-12 * largest


def test_sverdrup_bias_is_that_of_the_interior() -> None:
    """Free-slip friction takes (A l^4 L)/(beta) of the interior's V at most; the rest is the bias of the grid."""
    gyre = GridGyre(BASIN, 60, 30, viscosity=5e3)
    angle = BASIN.meridional_wavenumber * gyre.dy
    assert sverdrup_bias(BASIN, gyre.dy) == pytest.approx(11.0 / 24.0 * angle**2, rel=angle**2)
    sverdrup = -BASIN.sverdrup_streamfunction / BASIN.length
    friction = 5e3 * BASIN.meridional_wavenumber**4 * BASIN.length / BASIN.beta
    assert gyre.transport_y[15, 40] / sverdrup - 1.0 == pytest.approx(sverdrup_bias(BASIN, gyre.dy), abs=friction)


def test_a_layer_too_thin_for_its_gyre_is_refused() -> None:
    with pytest.raises(ValueError, match="outcrops"):
        GridGyre(BASIN, 24, 12, drag=2e-6).thickness(F0, 0.02, 100.0)
