"""Momentum in vector-invariant form: vorticity, kinetic energy, planetary rotation, pressure, friction, wind.

Tendencies are taken on the faces of interior cells; the edges decide what a wall keeps.  ``hx`` and ``hy`` are the
thickness on x and y faces (`continuity.mean_thickness`).  With the corner mean <h>^xy = (<h>^x + <h>^x)/2 of the faces south
and north of a corner, the energy-conserving form of Sadourny (1975, J. Atmos. Sci. 32, 680) is

    du = <q <V>^x>^y - K_x,    dv = -<q <U>^y>^x - K_y,    q = (f + zeta)/<h>^xy.

It is taken in two parts, zeta and f, because a scheme may step them differently; their sum conserves energy.

Rows ``first`` to ``end`` - 1 are worked on; belts are explained in `physics.rows`.  Arrays are belts unless said otherwise.
"""

import numpy as np
from numpy.typing import NDArray

from oceanbox.compiling import kernel
from oceanbox.physics.rows import place
from oceanbox.physics.state import Constants

__all__ = ["advection", "corner_terms", "friction", "kinetic_energy", "planetary_x", "planetary_y", "wind_acceleration"]

Array = NDArray[np.float64]


@kernel
def corner_terms(
    first: int,
    end: int,
    hx: Array,
    u: Array,
    v: Array,
    V: Array,
    f: Array,
    constants: Constants,
    q: Array,
    turned: Array,
) -> None:
    """On corners q = zeta/<h>^xy with zeta = v_x - u_y, and f <V>^x/<h>^xy; both halved, ready for a mean of two.

    ``u``, ``v`` and ``V`` (ny+4, nx+4); ``f`` (ny+4,) on corner rows.
    """
    columns = u.shape[1]
    per_dx = 1.0 / constants.dx
    per_dy = 1.0 / constants.dy
    for j in range(first, end):
        here, south, f_here = place(j, q.shape[0]), place(j - 1, q.shape[0]), f[j]
        for n in range(columns - 3):
            i = n + 2
            per_h = 0.5 / (hx[here, i] + hx[south, i])
            q[here, i] = per_h * ((v[j, i] - v[j, i - 1]) * per_dx - (u[j, i] - u[j - 1, i]) * per_dy)
            turned[here, i] = f_here * per_h * (V[j, i - 1] + V[j, i])


@kernel
def kinetic_energy(first: int, end: int, u: Array, v: Array, K: Array) -> None:
    """K = (<u^2>^x + <v^2>^y)/2 at centres, m2 s-2; ``u`` and ``v`` (ny+4, nx+4)."""
    columns = u.shape[1]
    for j in range(first, end):
        here = place(j, K.shape[0])
        for n in range(columns - 2):
            i = n + 1
            K[here, i] = 0.25 * (u[j, i] ** 2 + u[j, i + 1] ** 2 + v[j, i] ** 2 + v[j + 1, i] ** 2)


@kernel
def advection(
    first: int, end: int, q: Array, K: Array, U: Array, V: Array, constants: Constants, du: Array, dv: Array
) -> None:
    """du = <q <V>^x>^y - K_x, dv = -<q <U>^y>^x - K_y with q = zeta/<h>^xy; ``U``, ``V``, ``du``, ``dv`` (ny+4, nx+4)."""
    columns = du.shape[1]
    per_dx = 1.0 / constants.dx
    per_dy = 1.0 / constants.dy
    for j in range(first, end):
        here, behind, beyond = place(j, q.shape[0]), place(j - 1, q.shape[0]), place(j + 1, q.shape[0])
        for n in range(columns - 4):
            i = n + 2
            south = q[here, i] * (V[j, i - 1] + V[j, i])
            north = q[beyond, i] * (V[j + 1, i - 1] + V[j + 1, i])
            du[j, i] = south + north - (K[here, i] - K[here, i - 1]) * per_dx
            west = q[here, i] * (U[j - 1, i] + U[j, i])
            east = q[here, i + 1] * (U[j - 1, i + 1] + U[j, i + 1])
            dv[j, i] = -(west + east) - (K[here, i] - K[behind, i]) * per_dy


@kernel
def planetary_x(
    first: int, end: int, hx: Array, turned: Array, V: Array, f: Array, constants: Constants, du: Array
) -> None:
    """du += <(f/<h>^xy) <V>^x>^y; without momentum advection du += <f <V>^x>^y/<h>^x.

    The second form makes the Coriolis force on transport linear, so that Sverdrup balance beta V = curl(tau)/rho0 holds for
    any h; where h is uniform the two agree.  ``f`` is given on corner rows, ``V`` (ny+4, nx+4).
    """
    columns = V.shape[1]
    for j in range(first, end):
        here, north = place(j, du.shape[0]), place(j + 1, du.shape[0])
        if constants.momentum_advection:
            for n in range(columns - 4):
                i = n + 2
                du[here, i] += turned[here, i] + turned[north, i]
        else:
            f_south = 0.25 * f[j]
            f_north = 0.25 * f[j + 1]
            for n in range(columns - 4):
                i = n + 2
                turning = f_south * (V[j, i - 1] + V[j, i]) + f_north * (V[j + 1, i - 1] + V[j + 1, i])
                du[here, i] += turning / hx[here, i]


@kernel
def planetary_y(
    first: int, end: int, hx: Array, hy: Array, U: Array, f: Array, constants: Constants, turned: Array, dv: Array
) -> None:
    """dv -= <(f/<h>^xy) <U>^y>^x; without momentum advection dv -= <f <U>^y>^x/<h>^y.  ``turned`` is scratch."""
    columns = dv.shape[1]
    for j in range(first, end):
        here, south = place(j, dv.shape[0]), place(j - 1, dv.shape[0])
        if constants.momentum_advection:
            f_here = 0.5 * f[j]
            for n in range(columns - 3):
                i = n + 2
                turned[here, i] = f_here * (U[south, i] + U[here, i]) / (hx[here, i] + hx[south, i])
            for n in range(columns - 4):
                i = n + 2
                dv[here, i] -= turned[here, i] + turned[here, i + 1]
        else:
            f_here = 0.25 * f[j]
            for n in range(columns - 4):
                i = n + 2
                turning = U[south, i] + U[here, i] + U[south, i + 1] + U[here, i + 1]
                dv[here, i] -= f_here * turning / hy[here, i]


@kernel
def wind_acceleration(stress: Array, thickness: Array, fraction: float, du: Array) -> None:
    """du += fraction tau/(rho0 h) on faces; ``stress`` is tau/rho0 and ``thickness`` h on the same faces, all rows."""
    rows, columns = stress.shape
    for j in range(2, rows - 2):
        for n in range(columns - 4):
            i = n + 2
            du[j, i] += fraction * stress[j, i] / thickness[j, i]


@kernel
def laplacian(middle: float, west: float, east: float, south: float, north: float, ax: float, ay: float) -> float:
    """A (u_xx + u_yy) with ``ax`` = A/dx^2 and ``ay`` = A/dy^2."""
    return ax * (west + east - 2.0 * middle) + ay * (south + north - 2.0 * middle)


@kernel
def friction(
    first: int, end: int, u: Array, v: Array, hx: Array, hy: Array, constants: Constants, du: Array, dv: Array
) -> None:
    """du = A lap(u) and dv = A lap(v), or A lap(h u)/h where friction acts on transport; ``u`` and ``v`` (ny+4, nx+4)."""
    columns = u.shape[1]
    ax = constants.viscosity / constants.dx**2
    ay = constants.viscosity / constants.dy**2
    for j in range(first, end):
        here, behind, beyond = place(j, du.shape[0]), place(j - 1, du.shape[0]), place(j + 1, du.shape[0])
        if constants.viscosity_on_transport:
            for field, h, out in ((u, hx, du), (v, hy, dv)):
                for n in range(columns - 4):
                    i = n + 2
                    middle, west, east = (
                        h[here, i] * field[j, i],
                        h[here, i - 1] * field[j, i - 1],
                        h[here, i + 1] * field[j, i + 1],
                    )
                    south, north = h[behind, i] * field[j - 1, i], h[beyond, i] * field[j + 1, i]
                    out[here, i] = laplacian(middle, west, east, south, north, ax, ay) / h[here, i]
        else:
            for n in range(columns - 4):
                i = n + 2
                du[here, i] = laplacian(u[j, i], u[j, i - 1], u[j, i + 1], u[j - 1, i], u[j + 1, i], ax, ay)
                dv[here, i] = laplacian(v[j, i], v[j, i - 1], v[j, i + 1], v[j - 1, i], v[j + 1, i], ax, ay)
