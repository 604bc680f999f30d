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
from oceanbox.physics.buoyancy import layer_buoyancy
from oceanbox.physics.rows import place
from oceanbox.physics.state import Constants

__all__ = ["layer_pressure", "pressure_force_x", "pressure_force_y"]

Array = NDArray[np.float64]


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
        layer_buoyancy(first, end, h[k], heat[k], salt[k], constants, b[k])
        hk, bk, Pk, dk = h[k], b[k], P[k], d[k]
        for j in range(first, end):
            here = place(j, Pk.shape[0])
            for i in range(hk.shape[1]):
                dk[here, i] = 0.5 * hk[j, i]
                Pk[here, i] = dk[here, i] * bk[here, i]
    for k in range(layers):
        for below in range(k + 1, layers):
            add_weight_below(first, end, h[below], b[below], P[k])
        for above in range(k):
            add_depth_above(first, end, h[above], d[k])


@kernel
def pressure_force_x(first: int, end: int, b: Array, P: Array, d: Array, constants: Constants, fx: Array) -> None:
    """-(P_x + <b>^x d_x) on x faces, m s-2; belts."""
    per_dx = 1.0 / constants.dx
    for j in range(first, end):
        here = place(j, fx.shape[0])
        for n in range(fx.shape[1] - 4):
            i = n + 2
            mean = 0.5 * (b[here, i] + b[here, i - 1])
            fx[here, i] = -(P[here, i] - P[here, i - 1] + mean * (d[here, i] - d[here, i - 1])) * per_dx


@kernel
def pressure_force_y(first: int, end: int, b: Array, P: Array, d: Array, constants: Constants, fy: Array) -> None:
    """-(P_y + <b>^y d_y) on y faces, m s-2; belts."""
    per_dy = 1.0 / constants.dy
    for j in range(first, end):
        here, south = place(j, fy.shape[0]), place(j - 1, fy.shape[0])
        for n in range(fy.shape[1] - 4):
            i = n + 2
            mean = 0.5 * (b[here, i] + b[south, i])
            fy[here, i] = -(P[here, i] - P[south, i] + mean * (d[here, i] - d[south, i])) * per_dy
