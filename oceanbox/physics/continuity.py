"""Volume: transports through the faces, and the thickness they leave behind."""

import numpy as np
from numpy.typing import NDArray

from oceanbox.compiling import kernel
from oceanbox.physics.limiter import limited_face_value
from oceanbox.physics.state import Constants

__all__ = ["keep_thickness_positive", "mean_thickness", "volume_transport"]

Array = NDArray[np.float64]


@kernel
def mean_thickness(h: Array, constants: Constants, hx: Array, hy: Array) -> None:
    """<h>^x on x faces and <h>^y on y faces, m, ghost faces included; in linear dynamics the rest depth everywhere."""
    rows, columns = h.shape
    if constants.linear_depth > 0.0:
        hx[:, :] = constants.linear_depth
        hy[:, :] = constants.linear_depth
        return
    for j in range(1, rows):
        for i in range(1, columns):
            hx[j, i] = 0.5 * (h[j, i - 1] + h[j, i])
            hy[j, i] = 0.5 * (h[j - 1, i] + h[j, i])


@kernel
def upwind_thickness(behind: float, west: float, east: float, beyond: float, speed: float) -> float:
    """h on a face, upwind biased and flux-limited, m."""
    if speed > 0.0:
        return limited_face_value(behind, west, east, 0.0)
    return limited_face_value(beyond, east, west, 0.0)


@kernel
def volume_transport(
    h: Array, hx: Array, hy: Array, u: Array, v: Array, constants: Constants, U: Array, V: Array
) -> None:
    """U = <h>^x u on x faces, V = <h>^y v on y faces, m2 s-1, from the thickness on faces.

    The centred mean makes the flow conserve energy together with ``momentum`` (Sadourny 1975, J. Atmos. Sci. 32, 680); an
    upwind-biased thickness trades that for monotone fronts.  All arrays (ny+4, nx+4).
    """
    rows, columns = h.shape
    if constants.upwind_thickness and constants.linear_depth == 0.0:
        for j in range(2, rows - 1):
            for n in range(columns - 3):
                i = n + 2
                U[j, i] = u[j, i] * upwind_thickness(h[j, i - 2], h[j, i - 1], h[j, i], h[j, i + 1], u[j, i])
            for i in range(1, columns - 1):
                V[j, i] = v[j, i] * upwind_thickness(h[j - 2, i], h[j - 1, i], h[j, i], h[j + 1, i], v[j, i])
        return
    for j in range(2, rows - 1):
        for i in range(1, columns - 1):
            U[j, i] = hx[j, i] * u[j, i]
            V[j, i] = hy[j, i] * v[j, i]


# A cell may lose at most this share of its water through its faces in one step.
LARGEST_OUTFLOW = 0.9


@kernel
def outflow_share(h: Array, U: Array, V: Array, j: int, i: int, dt_dx: float, dt_dy: float) -> float:
    """The share of cell (j, i) that leaves through its four faces in one step."""
    leaving = dt_dx * (max(U[j, i + 1], 0.0) + max(-U[j, i], 0.0))
    leaving += dt_dy * (max(V[j + 1, i], 0.0) + max(-V[j, i], 0.0))
    return leaving / h[j, i]


@kernel
def keep_thickness_positive(h: Array, U: Array, V: Array, dt: float, constants: Constants, share: Array) -> int:
    """Scale down the outflow of cells which would lose more than nine tenths of their water in this step.

    The scaled transports then move water, heat and salt alike, so nothing is lost; the number of faces changed is returned
    and reported.  Flux correction of the kind of Zalesak (1979, J. Comput. Phys. 31, 335), towards zero flux.
    In linear dynamics the thickness is a perturbation about a rest depth and nothing is limited.
    """
    if constants.linear_depth > 0.0:
        return 0
    rows, columns = h.shape
    dt_dx = dt / constants.dx
    dt_dy = dt / constants.dy
    worst = 0.0
    for j in range(2, rows - 2):
        for n in range(columns - 4):
            i = n + 2
            share[j, i] = outflow_share(h, U, V, j, i, dt_dx, dt_dy)
            worst = max(worst, share[j, i])
    if worst <= LARGEST_OUTFLOW:
        return 0
    nx = columns - 4
    for j in range(2, rows - 2):
        share[j, 1] = share[j, nx + 1]
        share[j, nx + 2] = share[j, 2]
    changed = 0
    for j in range(2, rows - 2):
        for n in range(columns - 3):
            i = n + 2
            donor = share[j, i - 1] if U[j, i] > 0.0 else share[j, i]
            if donor > LARGEST_OUTFLOW and U[j, i] != 0.0:
                U[j, i] *= LARGEST_OUTFLOW / donor
                changed += 1
    for j in range(3, rows - 2):
        for n in range(columns - 4):
            i = n + 2
            donor = share[j - 1, i] if V[j, i] > 0.0 else share[j, i]
            if donor > LARGEST_OUTFLOW and V[j, i] != 0.0:
                V[j, i] *= LARGEST_OUTFLOW / donor
                changed += 1
    return changed
