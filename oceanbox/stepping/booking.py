"""Entering into the ledger what passed through the faces in a step."""

import numpy as np
from numpy.typing import NDArray

from oceanbox.compiling import kernel

__all__ = ["book"]

Array = NDArray[np.float64]


@kernel
def book(total_x: Array, total_y: Array, flux_x: Array, flux_y: Array, dt: float) -> None:
    """total += flux dt on every face of interior cells; (ny+4, nx+4)."""
    rows, columns = flux_x.shape
    for j in range(2, rows - 1):
        for n in range(columns - 3):
            i = n + 2
            total_x[j, i] += dt * flux_x[j, i]
            total_y[j, i] += dt * flux_y[j, i]
