"""Momentum in vector-invariant form: rotation, kinetic energy, pressure, friction, wind.

Tendencies are 2-D compute arrays, overwritten on the faces of interior cells; the edges decide what a wall keeps.
"""

import numpy as np
from numpy.typing import NDArray

from oceanbox.compiling import kernel
from oceanbox.physics.state import Constants, Forcing

__all__ = ["add_friction_and_wind", "kinetic_energy", "potential_vorticity", "pressure_force", "rotation"]

Array = NDArray[np.float64]


@kernel
def potential_vorticity(h: Array, u: Array, v: Array, f: Array, constants: Constants, q: Array) -> None:
    """q = (f + v_x - u_y)/<h>^xy at corners, m-1 s-1."""
    rows, columns = h.shape
    per_dx = 1.0 / constants.dx
    per_dy = 1.0 / constants.dy
    for j in range(2, rows - 1):
        for i in range(2, columns - 1):
            zeta = (v[j, i] - v[j, i - 1]) * per_dx - (u[j, i] - u[j - 1, i]) * per_dy
            q[j, i] = 4.0 * (f[j] + zeta) / (h[j, i] + h[j, i - 1] + h[j - 1, i] + h[j - 1, i - 1])


@kernel
def kinetic_energy(u: Array, v: Array, K: Array) -> None:
    """K = (<u^2>^x + <v^2>^y)/2 at centres, m2 s-2, one ghost cell included on the south and west."""
    rows, columns = u.shape
    for j in range(1, rows - 1):
        for i in range(1, columns - 1):
            K[j, i] = 0.25 * (u[j, i] ** 2 + u[j, i + 1] ** 2 + v[j, i] ** 2 + v[j + 1, i] ** 2)


@kernel
def rotation(
    h: Array,
    u: Array,
    v: Array,
    U: Array,
    V: Array,
    f: Array,
    constants: Constants,
    q: Array,
    K: Array,
    du: Array,
    dv: Array,
) -> None:
    """Vorticity flux and Bernoulli gradient, or the planetary part alone.

    With momentum advection (Sadourny 1975, J. Atmos. Sci. 32, 680, energy-conserving form)

        du = <q <V>^x>^y - K_x,    dv = -<q <U>^y>^x - K_y.

    Without it, or in linear dynamics,

        du = <f <V>^x>^y / <h>^x,   dv = -<f <U>^y>^x / <h>^y,

    which makes the Coriolis force on transport linear, so that Sverdrup balance beta V = curl(tau)/rho0 holds for any h.
    """
    rows, columns = h.shape
    per_dx = 1.0 / constants.dx
    per_dy = 1.0 / constants.dy
    if constants.momentum_advection and constants.linear_depth == 0.0:
        potential_vorticity(h, u, v, f, constants, q)
        kinetic_energy(u, v, K)
        for j in range(2, rows - 2):
            for i in range(2, columns - 2):
                south = q[j, i] * (V[j, i - 1] + V[j, i])
                north = q[j + 1, i] * (V[j + 1, i - 1] + V[j + 1, i])
                du[j, i] = 0.25 * (south + north) - (K[j, i] - K[j, i - 1]) * per_dx
                west = q[j, i] * (U[j - 1, i] + U[j, i])
                east = q[j, i + 1] * (U[j - 1, i + 1] + U[j, i + 1])
                dv[j, i] = -0.25 * (west + east) - (K[j, i] - K[j - 1, i]) * per_dy
        return
    depth = constants.linear_depth
    for j in range(2, rows - 2):
        for i in range(2, columns - 2):
            hx = depth if depth > 0.0 else 0.5 * (h[j, i] + h[j, i - 1])
            hy = depth if depth > 0.0 else 0.5 * (h[j, i] + h[j - 1, i])
            du[j, i] = 0.25 * (f[j] * (V[j, i - 1] + V[j, i]) + f[j + 1] * (V[j + 1, i - 1] + V[j + 1, i])) / hx
            dv[j, i] = -0.25 * f[j] * (U[j - 1, i] + U[j, i] + U[j - 1, i + 1] + U[j, i + 1]) / hy


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
            for i in range(2, columns - 2):
                bx = 0.5 * (bk[j, i] + bk[j, i - 1])
                by = 0.5 * (bk[j, i] + bk[j - 1, i])
                fxk[j, i] = -(P[j, i] - P[j, i - 1] + bx * (d[j, i] - d[j, i - 1])) * per_dx
                fyk[j, i] = -(P[j, i] - P[j - 1, i] + by * (d[j, i] - d[j - 1, i])) * per_dy


@kernel
def add_friction_and_wind(
    h: Array, u: Array, v: Array, wind: float, forcing: Forcing, constants: Constants, du: Array, dv: Array
) -> None:
    """du += A lap(u) + wind tau_x/(rho0 <h>^x), likewise dv; with friction on transport A lap(<h> u)/<h>.

    ``wind`` is the fraction of the stress that acts now; 0 for a layer that the wind does not touch.
    """
    rows, columns = h.shape
    ax = constants.viscosity / constants.dx**2
    ay = constants.viscosity / constants.dy**2
    depth = constants.linear_depth
    wind_x = forcing.wind_x
    wind_y = forcing.wind_y
    for j in range(2, rows - 2):
        for i in range(2, columns - 2):
            hx = depth if depth > 0.0 else 0.5 * (h[j, i] + h[j, i - 1])
            hy = depth if depth > 0.0 else 0.5 * (h[j, i] + h[j - 1, i])
            du[j, i] += wind * wind_x[j, i] / hx
            dv[j, i] += wind * wind_y[j, i] / hy
    if constants.viscosity == 0.0:
        return
    if constants.viscosity_on_transport and depth == 0.0:
        for j in range(2, rows - 2):
            for i in range(2, columns - 2):
                hx = h[j, i] + h[j, i - 1]
                west = (h[j, i - 1] + h[j, i - 2]) * u[j, i - 1]
                east = (h[j, i + 1] + h[j, i]) * u[j, i + 1]
                south = (h[j - 1, i] + h[j - 1, i - 1]) * u[j - 1, i]
                north = (h[j + 1, i] + h[j + 1, i - 1]) * u[j + 1, i]
                here = hx * u[j, i]
                du[j, i] += (ax * (west + east - 2.0 * here) + ay * (south + north - 2.0 * here)) / hx
                hy = h[j, i] + h[j - 1, i]
                west = (h[j, i - 1] + h[j - 1, i - 1]) * v[j, i - 1]
                east = (h[j, i + 1] + h[j - 1, i + 1]) * v[j, i + 1]
                south = (h[j - 1, i] + h[j - 2, i]) * v[j - 1, i]
                north = (h[j + 1, i] + h[j, i]) * v[j + 1, i]
                here = hy * v[j, i]
                dv[j, i] += (ax * (west + east - 2.0 * here) + ay * (south + north - 2.0 * here)) / hy
        return
    for j in range(2, rows - 2):
        for i in range(2, columns - 2):
            du[j, i] += ax * (u[j, i - 1] + u[j, i + 1] - 2.0 * u[j, i]) + ay * (
                u[j - 1, i] + u[j + 1, i] - 2.0 * u[j, i]
            )
            dv[j, i] += ax * (v[j, i - 1] + v[j, i + 1] - 2.0 * v[j, i]) + ay * (
                v[j - 1, i] + v[j + 1, i] - 2.0 * v[j, i]
            )
