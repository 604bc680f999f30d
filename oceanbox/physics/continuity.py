"""Volume: transports through the faces, and the thickness they leave behind.

Rows ``first`` to ``end`` - 1 are worked on; belts are explained in `physics.rows`.
"""

import numpy as np
from numpy.typing import NDArray

from oceanbox.compiling import kernel
from oceanbox.physics.limiter import limited_face_value
from oceanbox.physics.rows import place
from oceanbox.physics.state import Constants

__all__ = [
    "LARGEST_OUTFLOW",
    "centred_transports",
    "limit_outflow",
    "mean_thickness",
    "outflow_share",
    "transport_x",
    "transport_y",
]

Array = NDArray[np.float64]


@kernel
def mean_thickness(first: int, end: int, h: Array, constants: Constants, hx: Array, hy: Array) -> None:
    """<h>^x on x faces and <h>^y on y faces, m, ghost faces included; in linear dynamics the rest depth everywhere.

    ``h`` (ny+4, nx+4), ``hx`` and ``hy`` belts; ``first`` is at least 1.
    """
    columns = h.shape[1]
    depth = constants.linear_depth
    for j in range(first, end):
        here = place(j, hx.shape[0])
        for n in range(columns - 1):
            i = n + 1
            hx[here, i] = depth if depth > 0.0 else 0.5 * (h[j, i - 1] + h[j, i])
            hy[here, i] = depth if depth > 0.0 else 0.5 * (h[j - 1, i] + h[j, i])


@kernel
def upwind_thickness(behind: float, west: float, east: float, beyond: float, speed: float) -> float:
    """h on a face, upwind biased and flux-limited, m."""
    if speed > 0.0:
        return limited_face_value(behind, west, east, 0.0)
    return limited_face_value(beyond, east, west, 0.0)


@kernel
def transport_x(first: int, end: int, h: Array, hx: Array, u: Array, constants: Constants, U: Array) -> None:
    """U = <h>^x u on x faces, m2 s-1, from the thickness on faces.

    The centred mean makes the flow conserve energy together with ``momentum`` (Sadourny 1975, J. Atmos. Sci. 32, 680); an
    upwind-biased thickness trades that for monotone fronts.  ``h`` and ``u`` (ny+4, nx+4), ``hx`` a belt, ``U`` either.
    """
    columns = h.shape[1]
    upwind = constants.upwind_thickness and constants.linear_depth == 0.0
    for j in range(first, end):
        out, here = place(j, U.shape[0]), place(j, hx.shape[0])
        if upwind:
            for n in range(columns - 3):
                i = n + 2
                U[out, i] = u[j, i] * upwind_thickness(h[j, i - 2], h[j, i - 1], h[j, i], h[j, i + 1], u[j, i])
        else:
            for n in range(columns - 2):
                i = n + 1
                U[out, i] = hx[here, i] * u[j, i]


@kernel
def transport_y(first: int, end: int, h: Array, hy: Array, v: Array, constants: Constants, V: Array) -> None:
    """V = <h>^y v on y faces, as `transport_x`; ``first`` is at least 2, ``end`` at most the last row."""
    columns = h.shape[1]
    upwind = constants.upwind_thickness and constants.linear_depth == 0.0
    for j in range(first, end):
        out, here = place(j, V.shape[0]), place(j, hy.shape[0])
        if upwind:
            for n in range(columns - 2):
                i = n + 1
                V[out, i] = v[j, i] * upwind_thickness(h[j - 2, i], h[j - 1, i], h[j, i], h[j + 1, i], v[j, i])
        else:
            for n in range(columns - 2):
                i = n + 1
                V[out, i] = hy[here, i] * v[j, i]


@kernel
def centred_transports(
    first: int, end: int, h: Array, u: Array, v: Array, weights: tuple[float, float, float], constants: Constants,
    before_x: Array, earlier_x: Array, before_y: Array, earlier_y: Array,
    hx: Array, hy: Array, U: Array, V: Array, F: Array, G: Array,
) -> None:  # fmt: skip
    """`mean_thickness`, `transport_x` and `transport_y` for centred thickness, and F = w0 U + w1 U' + w2 U'', in one pass.

    U' and U'' are the transports of the steps before; ``hx``, ``hy``, ``F``, ``G`` belts, all else (ny+4, nx+4).
    """
    w0, w1, w2 = weights
    depth = constants.linear_depth
    for j in range(first, end):
        here = place(j, F.shape[0])
        for n in range(h.shape[1] - 2):
            i = n + 1
            hx[here, i] = depth if depth > 0.0 else 0.5 * (h[j, i - 1] + h[j, i])
            hy[here, i] = depth if depth > 0.0 else 0.5 * (h[j - 1, i] + h[j, i])
            U[j, i] = hx[here, i] * u[j, i]
            V[j, i] = hy[here, i] * v[j, i]
            F[here, i] = w0 * U[j, i] + w1 * before_x[j, i] + w2 * earlier_x[j, i]
            G[here, i] = w0 * V[j, i] + w1 * before_y[j, i] + w2 * earlier_y[j, i]


# A cell may lose at most this share of its water through its faces in one step.
LARGEST_OUTFLOW = 0.9


@kernel
def outflow_share(
    first: int, end: int, per_h: Array, U: Array, V: Array, dt: float, constants: Constants, share: Array
) -> int:
    """The share of its water that leaves each cell through its four faces in a step; how many cells lose too much.

    All belts.  In linear dynamics the thickness is a perturbation about a rest depth and no cell loses too much.
    """
    if constants.linear_depth > 0.0:
        return 0
    columns = U.shape[1]
    dt_dx = dt / constants.dx
    dt_dy = dt / constants.dy
    crowded = 0
    for j in range(first, end):
        here, north = place(j, U.shape[0]), place(j + 1, U.shape[0])
        for n in range(columns - 4):
            i = n + 2
            leaving = dt_dx * (max(U[here, i + 1], 0.0) + max(-U[here, i], 0.0))
            leaving += dt_dy * (max(V[north, i], 0.0) + max(-V[here, i], 0.0))
            share[here, i] = leaving * per_h[here, i]
            crowded += share[here, i] > LARGEST_OUTFLOW
    return crowded


@kernel
def limit_outflow(first: int, end: int, rows: int, U: Array, V: Array, share: Array) -> int:
    """Scale down the outflow of cells which would lose more than nine tenths of their water in this step.

    The scaled transports then move water, heat and salt alike, so nothing is lost; the number of faces changed is returned
    and reported.  Flux correction of the kind of Zalesak (1979, J. Comput. Phys. 31, 335), towards zero flux.
    ``share`` holds these rows and the one south of them; all belts of ``rows`` compute rows.
    """
    columns = U.shape[1]
    nx = columns - 4
    changed = 0
    for j in range(first, min(end, rows - 2)):
        here, south = place(j, U.shape[0]), place(j - 1, U.shape[0])
        share[here, 1] = share[here, nx + 1]
        share[here, nx + 2] = share[here, 2]
        for n in range(columns - 3):
            i = n + 2
            donor = share[here, i - 1] if U[here, i] > 0.0 else share[here, i]
            if donor > LARGEST_OUTFLOW and U[here, i] != 0.0:
                U[here, i] *= LARGEST_OUTFLOW / donor
                changed += 1
            donor = share[south, i] if V[here, i] > 0.0 else share[here, i]
            if j > 2 and i < nx + 2 and donor > LARGEST_OUTFLOW and V[here, i] != 0.0:
                V[here, i] *= LARGEST_OUTFLOW / donor
                changed += 1
    return changed
