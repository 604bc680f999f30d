"""Entering into the ledger what passed through the faces in a step."""

import numpy as np
from numpy.typing import NDArray

from oceanbox.compiling import kernel
from oceanbox.physics.rows import place

__all__ = ["book"]

Array = NDArray[np.float64]


@kernel
def book(first: int, end: int, total_x: Array, total_y: Array, flux_x: Array, flux_y: Array, dt: float) -> None:
    """total += flux dt on the faces of interior cells in rows ``first`` to ``end`` - 1; totals (ny+4, nx+4), fluxes belts."""
    for j in range(first, end):
        here = place(j, flux_x.shape[0])
        for n in range(total_x.shape[1] - 3):
            i = n + 2
            total_x[j, i] += dt * flux_x[here, i]
            total_y[j, i] += dt * flux_y[here, i]
