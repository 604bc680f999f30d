"""Heat and salt: advection by the very transports that move the water, and lateral mixing."""

import numpy as np
from numpy.typing import NDArray

from oceanbox.compiling import kernel
from oceanbox.physics.limiter import limited_face_value
from oceanbox.physics.state import Constants

__all__ = ["concentration", "mixing_flux", "tracer_flux", "transport_step"]

Array = NDArray[np.float64]


@kernel
def concentration(h: Array, content: Array, c: Array) -> None:
    """Theta = (h Theta)/h in every cell, ghost cells included."""
    rows, columns = h.shape
    for j in range(rows):
        for i in range(columns):
            c[j, i] = content[j, i] / h[j, i]


@kernel
def carried(far: float, up: float, down: float, share: float, centred: bool) -> float:
    """The value a face carries: flux-limited, or the plain mean for the energy identity."""
    if centred:
        return 0.5 * (up + down)
    return limited_face_value(far, up, down, share)


@kernel
def tracer_flux(h: Array, c: Array, U: Array, V: Array, dt: float, constants: Constants, Fx: Array, Fy: Array) -> None:
    """F = U c on x faces and V c on y faces; c flux-limited, Courant-corrected for a forward step of ``dt``.

    ``dt = 0`` gives the instantaneous flux that a multi-stage scheme needs.  A forward step makes no new extremum where the
    shares s of a cell's water that leave through its faces have sum s (2 - s) <= 1, for which it is enough that at most half of
    it leaves; a uniform c stays uniform in any flow because water and tracer move together.
    """
    rows, columns = c.shape
    dt_dx = dt / constants.dx
    dt_dy = dt / constants.dy
    centred = constants.centred_tracers
    for j in range(2, rows - 2):
        for n in range(columns - 3):
            i = n + 2
            flow = U[j, i]
            if flow > 0.0:
                share = flow * dt_dx / h[j, i - 1]
                Fx[j, i] = flow * carried(c[j, i - 2], c[j, i - 1], c[j, i], share, centred)
            else:
                share = -flow * dt_dx / h[j, i]
                Fx[j, i] = flow * carried(c[j, i + 1], c[j, i], c[j, i - 1], share, centred)
    for j in range(2, rows - 1):
        for n in range(columns - 4):
            i = n + 2
            flow = V[j, i]
            if flow > 0.0:
                share = flow * dt_dy / h[j - 1, i]
                Fy[j, i] = flow * carried(c[j - 2, i], c[j - 1, i], c[j, i], share, centred)
            else:
                share = -flow * dt_dy / h[j, i]
                Fy[j, i] = flow * carried(c[j + 1, i], c[j, i], c[j - 1, i], share, centred)


@kernel
def mixing_flux(h: Array, c: Array, constants: Constants, Fx: Array, Fy: Array) -> None:
    """F = -kappa_h <h> c_x on x faces, -kappa_h <h> c_y on y faces; none through a wall."""
    rows, columns = c.shape
    across_x = 0.5 * constants.diffusivity / constants.dx
    across_y = 0.5 * constants.diffusivity / constants.dy
    for j in range(2, rows - 1):
        for n in range(columns - 3):
            i = n + 2
            Fx[j, i] = -across_x * (h[j, i - 1] + h[j, i]) * (c[j, i] - c[j, i - 1])
            Fy[j, i] = -across_y * (h[j - 1, i] + h[j, i]) * (c[j, i] - c[j - 1, i])


@kernel
def transport_step(content: Array, Fx: Array, Fy: Array, dt: float, constants: Constants) -> None:
    """content -= dt (F_x + F_y) in interior cells: water (F = U, V), heat or salt."""
    rows, columns = content.shape
    dt_dx = dt / constants.dx
    dt_dy = dt / constants.dy
    for j in range(2, rows - 2):
        for n in range(columns - 4):
            i = n + 2
            content[j, i] -= dt_dx * (Fx[j, i + 1] - Fx[j, i]) + dt_dy * (Fy[j + 1, i] - Fy[j, i])
