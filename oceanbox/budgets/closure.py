"""How well a budget closes, in the only sense that means something: residual against the sum of absolute terms.

The fluxes through the four faces of a cell count one by one in that sum: what the cell's water did, not what was left of it.
"""

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from oceanbox.budgets.rates import BUDGETS, budget_maps
from oceanbox.budgets.units import Water
from oceanbox.grid import Grid
from oceanbox.physics.state import Ledger, State

__all__ = ["Closure", "closure"]

Array = NDArray[np.float64]


class Closure(NamedTuple):
    """Relative residuals: the worst cell, and the basin as a whole."""

    worst_cell: float
    basin: float


def _through_faces(grid: Grid, x: Array, y: Array) -> Array:
    """Sum of the absolute amounts through the four faces of each cell, per area, (ny, nx)."""
    across_x = np.abs(grid.x_faces(x).sum(axis=0)) / grid.dx
    across_y = np.abs(grid.y_faces(y).sum(axis=0)) / grid.dy
    return across_x[:, 1:] + across_x[:, :-1] + across_y[1:] + across_y[:-1]


def closure(grid: Grid, ledger: Ledger, before: State, after: State) -> dict[str, Closure]:
    """Closure of ``volume``, ``heat`` and ``salt`` over what the ledger covers.  A budget of zeros closes: 0."""
    maps = budget_maps(grid, ledger, before, after, 1.0, Water(1.0, 1.0))
    zero = np.zeros_like(ledger.volume_x)
    faces = {
        "volume": ((ledger.volume_x, ledger.volume_y), (zero, zero)),
        "heat": (
            (ledger.heat_advection_x, ledger.heat_advection_y),
            (ledger.heat_mixing_x, ledger.heat_mixing_y),
        ),
        "salt": (
            (ledger.salt_advection_x, ledger.salt_advection_y),
            (ledger.salt_mixing_x, ledger.salt_mixing_y),
        ),
    }
    inner = {"volume_convergence", "heat_advection", "heat_mixing", "salt_advection", "salt_mixing"}
    found = {}
    for budget, (terms, storage, residual) in BUDGETS.items():
        absolute = np.zeros((grid.ny, grid.nx))
        for name in (*terms, storage):
            if name not in inner:
                absolute += np.abs(maps[name])
        for pair in faces[budget]:
            absolute += _through_faces(grid, *pair)
        missing = np.abs(maps[residual])
        whole = float(absolute.sum())
        worst = float(np.max(missing / np.where(absolute > 0.0, absolute, np.inf)))
        found[budget] = Closure(worst, float(abs(maps[residual].sum())) / whole if whole > 0.0 else 0.0)
    return found
