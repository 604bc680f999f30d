"""Momentum in vector-invariant form: vorticity, kinetic energy, planetary rotation, pressure, friction, wind.

Tendencies are 2-D compute arrays on the faces of interior cells; the edges decide what a wall keeps.  ``hx`` and ``hy`` are the
thickness on x and y faces (`continuity.mean_thickness`).  With the corner mean <h>^xy = (<h>^x + <h>^x)/2 of the faces south
and north of a corner, the energy-conserving form of Sadourny (1975, J. Atmos. Sci. 32, 680) is

    du = <q <V>^x>^y - K_x,    dv = -<q <U>^y>^x - K_y,    q = (f + zeta)/<h>^xy.

It is taken in two parts, zeta and f, because a scheme may step them differently; their sum conserves energy.
"""

import numpy as np
from numpy.typing import NDArray

from oceanbox.compiling import kernel
from oceanbox.physics.state import Constants

__all__ = ["advection", "friction", "planetary_x", "planetary_y", "pressure_force", "wind_acceleration"]

Array = NDArray[np.float64]


@kernel
def advection(
    hx: Array, u: Array, v: Array, U: Array, V: Array, constants: Constants, q: Array, K: Array, du: Array, dv: Array
) -> None:
    """du = <q <V>^x>^y - K_x, dv = -<q <U>^y>^x - K_y with q = zeta/<h>^xy, zeta = v_x - u_y, K = (<u^2>^x + <v^2>^y)/2.

    ``q`` (corners) and ``K`` (centres) are scratch.
    """
    rows, columns = u.shape
    per_dx = 1.0 / constants.dx
    per_dy = 1.0 / constants.dy
    for j in range(2, rows - 1):
        for n in range(columns - 3):
            i = n + 2
            zeta = (v[j, i] - v[j, i - 1]) * per_dx - (u[j, i] - u[j - 1, i]) * per_dy
            q[j, i] = 0.5 * zeta / (hx[j, i] + hx[j - 1, i])
    for j in range(1, rows - 1):
        for i in range(1, columns - 1):
            K[j, i] = 0.25 * (u[j, i] ** 2 + u[j, i + 1] ** 2 + v[j, i] ** 2 + v[j + 1, i] ** 2)
    for j in range(2, rows - 2):
        for n in range(columns - 4):
            i = n + 2
            south = q[j, i] * (V[j, i - 1] + V[j, i])
            north = q[j + 1, i] * (V[j + 1, i - 1] + V[j + 1, i])
            du[j, i] = south + north - (K[j, i] - K[j, i - 1]) * per_dx
            west = q[j, i] * (U[j - 1, i] + U[j, i])
            east = q[j, i + 1] * (U[j - 1, i + 1] + U[j, i + 1])
            dv[j, i] = -(west + east) - (K[j, i] - K[j - 1, i]) * per_dy


@kernel
def planetary_x(hx: Array, V: Array, f: Array, constants: Constants, du: Array) -> None:
    """du = <(f/<h>^xy) <V>^x>^y; without momentum advection du = <f <V>^x>^y/<h>^x.

    The second form makes the Coriolis force on transport linear, so that Sverdrup balance beta V = curl(tau)/rho0 holds for
    any h; where h is uniform the two agree.  ``f`` is given on corner rows.
    """
    rows, columns = hx.shape
    if constants.momentum_advection:
        for j in range(2, rows - 2):
            f_south = 0.5 * f[j]
            f_north = 0.5 * f[j + 1]
            for n in range(columns - 4):
                i = n + 2
                south = f_south * (V[j, i - 1] + V[j, i]) / (hx[j, i] + hx[j - 1, i])
                north = f_north * (V[j + 1, i - 1] + V[j + 1, i]) / (hx[j + 1, i] + hx[j, i])
                du[j, i] = south + north
        return
    for j in range(2, rows - 2):
        f_south = 0.25 * f[j]
        f_north = 0.25 * f[j + 1]
        for n in range(columns - 4):
            i = n + 2
            turned = f_south * (V[j, i - 1] + V[j, i]) + f_north * (V[j + 1, i - 1] + V[j + 1, i])
            du[j, i] = turned / hx[j, i]


@kernel
def planetary_y(hx: Array, hy: Array, U: Array, f: Array, constants: Constants, dv: Array) -> None:
    """dv = -<(f/<h>^xy) <U>^y>^x; without momentum advection dv = -<f <U>^y>^x/<h>^y."""
    rows, columns = hx.shape
    if constants.momentum_advection:
        for j in range(2, rows - 2):
            f_here = 0.5 * f[j]
            for n in range(columns - 4):
                i = n + 2
                west = (U[j - 1, i] + U[j, i]) / (hx[j, i] + hx[j - 1, i])
                east = (U[j - 1, i + 1] + U[j, i + 1]) / (hx[j, i + 1] + hx[j - 1, i + 1])
                dv[j, i] = -f_here * (west + east)
        return
    for j in range(2, rows - 2):
        f_here = 0.25 * f[j]
        for n in range(columns - 4):
            i = n + 2
            dv[j, i] = -f_here * (U[j - 1, i] + U[j, i] + U[j - 1, i + 1] + U[j, i + 1]) / hy[j, i]


@kernel
def pressure_force(h: Array, b: Array, constants: Constants, work: Array, fx: Array, fy: Array) -> None:
    """Layer mean of the hydrostatic pressure force, all layers: h, b, fx, fy (L, ny+4, nx+4), m s-2.

    With m_i = h_i b_i, P_i = m_i/2 + sum_{j>i} m_j and d_i = h_i/2 + sum_{j<i} h_j,

        force_i = -grad(P_i) - <b_i> grad(d_i),

    for one layer -[b h_x + (h/2) b_x] (Ripa 1993, Geophys. Astrophys. Fluid Dyn. 70, 85).  The mean <b_i> is the face
    value a centred flux of m_i carries, which makes the two exchange energy exactly.  ``work`` is (2, ny+4, nx+4): P and d.
    """
    layers, rows, columns = h.shape
    per_dx = 1.0 / constants.dx
    per_dy = 1.0 / constants.dy
    P = work[0]
    d = work[1]
    for k in range(layers):
        hk = h[k]
        bk = b[k]
        for j in range(1, rows - 1):
            for i in range(1, columns - 1):
                P[j, i] = 0.5 * hk[j, i] * bk[j, i]
                d[j, i] = 0.5 * hk[j, i]
        for other in range(layers):
            ho = h[other]
            bo = b[other]
            if other > k:
                for j in range(1, rows - 1):
                    for i in range(1, columns - 1):
                        P[j, i] += ho[j, i] * bo[j, i]
            elif other < k:
                for j in range(1, rows - 1):
                    for i in range(1, columns - 1):
                        d[j, i] += ho[j, i]
        fxk = fx[k]
        fyk = fy[k]
        for j in range(2, rows - 2):
            for n in range(columns - 4):
                i = n + 2
                bx = 0.5 * (bk[j, i] + bk[j, i - 1])
                by = 0.5 * (bk[j, i] + bk[j - 1, i])
                fxk[j, i] = -(P[j, i] - P[j, i - 1] + bx * (d[j, i] - d[j, i - 1])) * per_dx
                fyk[j, i] = -(P[j, i] - P[j - 1, i] + by * (d[j, i] - d[j - 1, i])) * per_dy


@kernel
def wind_acceleration(stress: Array, thickness: Array, fraction: float, du: Array) -> None:
    """du += fraction tau/(rho0 h) on faces; ``stress`` is tau/rho0 and ``thickness`` h on the same faces."""
    rows, columns = du.shape
    for j in range(2, rows - 2):
        for n in range(columns - 4):
            i = n + 2
            du[j, i] += fraction * stress[j, i] / thickness[j, i]


@kernel
def friction(u: Array, thickness: Array, constants: Constants, du: Array) -> None:
    """du += A lap(u), or A lap(h u)/h where friction acts on transport; ``thickness`` is h on the faces of u."""
    rows, columns = u.shape
    ax = constants.viscosity / constants.dx**2
    ay = constants.viscosity / constants.dy**2
    if constants.viscosity == 0.0:
        return
    h = thickness
    if constants.viscosity_on_transport:
        for j in range(2, rows - 2):
            for n in range(columns - 4):
                i = n + 2
                here = 2.0 * h[j, i] * u[j, i]
                across_x = h[j, i - 1] * u[j, i - 1] + h[j, i + 1] * u[j, i + 1] - here
                across_y = h[j - 1, i] * u[j - 1, i] + h[j + 1, i] * u[j + 1, i] - here
                du[j, i] += (ax * across_x + ay * across_y) / h[j, i]
        return
    for j in range(2, rows - 2):
        for n in range(columns - 4):
            i = n + 2
            across_x = u[j, i - 1] + u[j, i + 1] - 2.0 * u[j, i]
            across_y = u[j - 1, i] + u[j + 1, i] - 2.0 * u[j, i]
            du[j, i] += ax * across_x + ay * across_y
