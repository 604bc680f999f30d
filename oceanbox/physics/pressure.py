"""Layer mean of the hydrostatic pressure force.

With m_i = h_i b_i, P_i = m_i/2 + sum_{j>i} m_j and d_i = h_i/2 + sum_{j<i} h_j,

    force_i = -grad(P_i) - <b_i> grad(d_i),

for one layer -[b h_x + (h/2) b_x] (Ripa 1993, Geophys. Astrophys. Fluid Dyn. 70, 85).  The mean <b_i> is the face value a
centred flux of m_i carries, which makes the two exchange energy exactly.

Rows ``first`` to ``end`` - 1 are worked on; belts are explained in `physics.rows`.
"""

import numpy as np
from numpy.typing import NDArray

from oceanbox.compiling import kernel
from oceanbox.physics.buoyancy import buoyancy
from oceanbox.physics.rows import place
from oceanbox.physics.state import Constants

__all__ = ["layer_pressure", "pressure_force", "pressure_forces"]

Array = NDArray[np.float64]


@kernel
def own_pressure(
    first: int, end: int, h: Array, heat: Array, salt: Array, constants: Constants, b: Array, P: Array, d: Array
) -> None:
    """b, P = h b/2 and d = h/2 of one layer; ``h``, ``heat``, ``salt`` (ny+4, nx+4), the others belts."""
    for j in range(first, end):
        here = place(j, P.shape[0])
        if constants.salty:
            for i in range(h.shape[1]):
                per_h = 1.0 / h[j, i]
                b[here, i] = buoyancy(heat[j, i] * per_h, salt[j, i] * per_h, constants)
                d[here, i] = 0.5 * h[j, i]
                P[here, i] = d[here, i] * b[here, i]
        else:
            for i in range(h.shape[1]):
                b[here, i] = buoyancy(heat[j, i] / h[j, i], 0.0, constants)
                d[here, i] = 0.5 * h[j, i]
                P[here, i] = d[here, i] * b[here, i]


@kernel
def add_weight_below(first: int, end: int, h: Array, b: Array, P: Array) -> None:
    """P += m of a layer below; ``h`` (ny+4, nx+4), the others belts."""
    for j in range(first, end):
        here = place(j, P.shape[0])
        for i in range(h.shape[1]):
            P[here, i] += h[j, i] * b[here, i]


@kernel
def add_depth_above(first: int, end: int, h: Array, d: Array) -> None:
    """d += h of a layer above; ``h`` (ny+4, nx+4), ``d`` a belt."""
    for j in range(first, end):
        here = place(j, d.shape[0])
        for i in range(h.shape[1]):
            d[here, i] += h[j, i]


@kernel
def layer_pressure(
    first: int, end: int, h: Array, heat: Array, salt: Array, constants: Constants, b: Array, P: Array, d: Array
) -> None:
    """b, P and d of all layers, ghost cells included; ``h``, ``heat``, ``salt`` (L, ny+4, nx+4), the others (L, belt)."""
    layers = h.shape[0]
    for k in range(layers):
        own_pressure(first, end, h[k], heat[k], salt[k], constants, b[k], P[k], d[k])
    for k in range(layers):
        for below in range(k + 1, layers):
            add_weight_below(first, end, h[below], b[below], P[k])
        for above in range(k):
            add_depth_above(first, end, h[above], d[k])


@kernel
def pressure_force(
    P: float, P_behind: float, b: float, b_behind: float, d: float, d_behind: float, per_width: float
) -> float:
    """-(P_x + <b>^x d_x) on a face, m s-2, from the cells beyond and behind it."""
    return -(P - P_behind + 0.5 * (b + b_behind) * (d - d_behind)) * per_width


@kernel
def pressure_forces(
    first: int, end: int, b: Array, P: Array, d: Array, constants: Constants, fx: Array, fy: Array
) -> None:
    """The force on x and y faces; ``b``, ``P``, ``d`` belts, ``fx`` and ``fy`` (ny+4, nx+4)."""
    per_dx = 1.0 / constants.dx
    per_dy = 1.0 / constants.dy
    for j in range(first, end):
        here, south = place(j, P.shape[0]), place(j - 1, P.shape[0])
        for n in range(fx.shape[1] - 4):
            i = n + 2
            fx[j, i] = pressure_force(
                P[here, i], P[here, i - 1], b[here, i], b[here, i - 1], d[here, i], d[here, i - 1], per_dx
            )
            fy[j, i] = pressure_force(P[here, i], P[south, i], b[here, i], b[south, i], d[here, i], d[south, i], per_dy)
