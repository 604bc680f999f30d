"""Heat and salt: advection by the very transports that move the water, and lateral mixing.

Rows ``first`` to ``end`` - 1 are worked on; belts are explained in `physics.rows`.
"""

import numpy as np
from numpy.typing import NDArray

from oceanbox.compiling import kernel
from oceanbox.physics.limiter import limited_face_value
from oceanbox.physics.rows import place
from oceanbox.physics.state import Constants

__all__ = ["concentration", "tracer_flux", "transport_step"]

Array = NDArray[np.float64]


@kernel
def concentration(first: int, end: int, h: Array, content: Array, per_h: Array, c: Array) -> None:
    """1/h and Theta = (h Theta)/h in every cell, ghost cells included; ``h`` and ``content`` (ny+4, nx+4), the others belts."""
    for j in range(first, end):
        here = place(j, c.shape[0])
        for i in range(h.shape[1]):
            per_h[here, i] = 1.0 / h[j, i]
            c[here, i] = content[j, i] * per_h[here, i]


@kernel
def carried(far: float, up: float, down: float, share: float, centred: bool) -> float:
    """The value a face carries: flux-limited, or the plain mean for the energy identity."""
    if centred:
        return 0.5 * (up + down)
    return limited_face_value(far, up, down, share)


@kernel
def face_flux(
    flow: float, dt_per_width: float, per_behind: float, per_beyond: float,
    far_behind: float, behind: float, beyond: float, far_beyond: float, centred: bool,
) -> float:  # fmt: skip
    """``flow`` times the value it carries: of two cells on either side of the face, the ones it comes from decide."""
    forward = flow > 0.0
    share = abs(flow) * dt_per_width * (per_behind if forward else per_beyond)
    far = far_behind if forward else far_beyond
    up = behind if forward else beyond
    down = beyond if forward else behind
    return flow * carried(far, up, down, share, centred)


@kernel
def tracer_flux(
    first: int, end: int, h: Array, per_h: Array, c: Array, U: Array, V: Array, dt: float, booked: float,
    constants: Constants, advected_x: Array, advected_y: Array, mixed_x: Array, mixed_y: Array, Fx: Array, Fy: Array,
) -> None:  # fmt: skip
    """F = U c - kappa_h <h> c_x on x faces and V c - kappa_h <h> c_y on y faces; both parts booked over ``booked`` seconds.

    c is flux-limited and Courant-corrected for a forward step of ``dt``; ``dt = 0`` gives the instantaneous flux that a
    multi-stage scheme needs.  A forward step makes no new extremum where the shares s of a cell's water that leave through its
    faces have sum s (2 - s) <= 1, for which it is enough that at most half of it leaves; a uniform c stays uniform in any flow
    because water and tracer move together.  Nothing mixes through a wall.

    ``h`` and the books (ny+4, nx+4), all else belts.  The rows are those of the y faces, the northern wall included.
    """
    rows, columns = h.shape
    dt_dx = dt / constants.dx
    dt_dy = dt / constants.dy
    across_x = 0.5 * constants.diffusivity / constants.dx
    across_y = 0.5 * constants.diffusivity / constants.dy
    centred = constants.centred_tracers
    belt = c.shape[0]
    for j in range(first, min(end, rows - 2)):
        here = place(j, belt)
        for n in range(columns - 3):
            i = n + 2
            west, east = c[here, i - 1], c[here, i]
            moved = face_flux(
                U[here, i],
                dt_dx,
                per_h[here, i - 1],
                per_h[here, i],
                c[here, i - 2],
                west,
                east,
                c[here, i + 1],
                centred,
            )
            mixed = -across_x * (h[j, i - 1] + h[j, i]) * (east - west)
            advected_x[j, i] += booked * moved
            mixed_x[j, i] += booked * mixed
            Fx[here, i] = moved + mixed
    for j in range(first, end):
        farther, behind, here, beyond = place(j - 2, belt), place(j - 1, belt), place(j, belt), place(j + 1, belt)
        for n in range(columns - 4):
            i = n + 2
            south, north = c[behind, i], c[here, i]
            moved = face_flux(
                V[here, i], dt_dy, per_h[behind, i], per_h[here, i], c[farther, i], south, north, c[beyond, i], centred
            )
            mixed = -across_y * (h[j - 1, i] + h[j, i]) * (north - south)
            advected_y[j, i] += booked * moved
            mixed_y[j, i] += booked * mixed
            Fy[here, i] = moved + mixed


@kernel
def transport_step(first: int, end: int, content: Array, Fx: Array, Fy: Array, dt: float, constants: Constants) -> None:
    """content -= dt (F_x + F_y) in interior cells: water (F = U, V), heat or salt; ``content`` (ny+4, nx+4), F belts."""
    columns = content.shape[1]
    dt_dx = dt / constants.dx
    dt_dy = dt / constants.dy
    for j in range(first, end):
        here, north = place(j, Fx.shape[0]), place(j + 1, Fx.shape[0])
        for n in range(columns - 4):
            i = n + 2
            content[j, i] -= dt_dx * (Fx[here, i + 1] - Fx[here, i]) + dt_dy * (Fy[north, i] - Fy[here, i])
