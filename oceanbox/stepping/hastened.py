"""Steps towards a steady state that need not be true on the way: every cell and every face at a pace of its own.

Where the tendencies F of a state x vanish they also vanish times any positive factor.  A model

    x_t = pace(place, state) F(x),    pace > 0,

therefore has the steady states of the unaltered one, and may reach them much sooner.  Thickness, heat and salt of a cell go as
fast as the water that crosses it allows: the calm interior, where planetary waves and the flushing of the gyres take decades,
twenty times as fast, a boundary current hardly faster.  Velocities go slowly, which slows gravity waves and so keeps the step
long (Bryan 1984, J. Phys. Oceanogr. 14, 666).

One step, of the very terms and columns of ``stepping.forward_backward``:

1. water, heat and salt move and columns exchange, as in a true step of ``dt``, and the ledger books that true step;
2. what it changed is taken ``pace`` times: what is added so is in no ledger;
3. u from the new pressure and v, then v from the new u, over ``dt`` times the pace of the face.

With pace p at centres and s on faces gravity waves obey h_t = -p H div u, u_t = -s b grad h, which conserves
Int b h^2/p + H u^2/s for any p and s: linear waves are stable where the step resolves them.  The limits are in `set_pace`.
"""

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from oceanbox.compiling import kernel
from oceanbox.grid import Grid
from oceanbox.grid.edges import fill_centre_edges, fill_x_face_edges, fill_y_face_edges
from oceanbox.physics.continuity import limit_outflow, mean_thickness, outflow_share, transport_x, transport_y
from oceanbox.physics.entrainment import mixed_layer_transport
from oceanbox.physics.exchange import exchange
from oceanbox.physics.momentum import (
    advection,
    corner_terms,
    friction,
    kinetic_energy,
    planetary_x,
    planetary_y,
    wind_acceleration,
)
from oceanbox.physics.pressure import layer_pressure, pressure_forces
from oceanbox.physics.state import Constants, Forcing, Ledger, State
from oceanbox.physics.tracers import concentration, tracer_flux, transport_step
from oceanbox.stepping.booking import book
from oceanbox.stepping.forward_backward import fill_edges, wind_fraction
from oceanbox.stepping.memory import Workspace

__all__ = ["Hastening", "advance_hastened", "empty_hastening"]

Array = NDArray[np.float64]
# Share of a cell's water that may cross it in one step at its pace: below the half under which no new extremum is made.
LARGEST_SHARE = 0.4
# omega dt of the fastest gravity wave at its pace; a forward-backward step is stable below 2, with rotation somewhat less.
WAVE_ANGLE = 1.2
# f dt at the pace of a face.
TURN_ANGLE = 1.0
# Mixing, shoaling: share of their change that a step may make.
MIXING_SHARE = 0.5
SHOALING_SHARE = 0.7
# A cell changes its thickness by at most this share in one step.
LARGEST_CHANGE = 0.1
# The pace follows the flow every few steps.
STEPS_OF_A_PACE = 15


class Hastening(NamedTuple):
    """The paces, and scratch; all follow from the state, so a restart needs none of it."""

    pace: Array  # (ny+4, nx+4) of thickness, heat and salt, centres, about 1 to the limit
    pace_x: Array  # of u, x faces, at most 1
    pace_y: Array  # of v, y faces
    before: Array  # (3, L, ny+4, nx+4) thickness, heat and salt before the step
    advection_x: Array  # (L, ny+4, nx+4) vorticity flux and Bernoulli gradient
    advection_y: Array
    pressure_x: Array  # (L, ny+4, nx+4) pressure force
    pressure_y: Array


def empty_hastening(grid: Grid, layers: int) -> Hastening:
    """Room for the paces of a model."""
    flat, deep = grid.shape, (layers, *grid.shape)
    return Hastening(
        np.ones(flat), np.ones(flat), np.ones(flat), np.zeros((3, *deep)), *(np.zeros(deep) for _ in range(4))
    )


@kernel
def square_of_wave_speed(h: Array, b: Array, j: int, i: int) -> float:
    """c^2 = sum of b h over the layers, m2 s-2; at least that of water that is hardly lighter than the abyss."""
    total = 0.0
    for k in range(h.shape[0]):
        total += b[k, j, i] * h[k, j, i]
    return max(total, 0.01)


@kernel
def share_crossing(u: Array, v: Array, j: int, i: int, dt_dx: float, dt_dy: float) -> float:
    """|u| dt/dx + |v| dt/dy of the fastest layer on the faces of a cell."""
    largest = 1e-6
    for k in range(u.shape[0]):
        along_x = max(abs(u[k, j, i]), abs(u[k, j, i + 1])) * dt_dx
        along_y = max(abs(v[k, j, i]), abs(v[k, j + 1, i])) * dt_dy
        largest = max(largest, along_x + along_y)
    return largest


@kernel
def set_pace(
    state: State, forcing: Forcing, constants: Constants, work: Workspace, hastening: Hastening,
    limit: float, rossby: float, dt: float,
) -> None:  # fmt: skip
    """The paces that the present flow allows; edges of the state and ``work.buoyancy`` must be filled.  Belts hold all rows.

    Centres, p the smallest of
        ``limit``;
        what lets ``LARGEST_SHARE`` of the water cross the cell in a step;
        what mixing and shoaling bear in a step;
        geostrophy: velocities are slowed by s^-1 = a p, a = (c k dt/``WAVE_ANGLE``)^2, so currents adjust to the pressure in
        a p/f, which must stay short against the time p^-1 dx/u in which water crosses the cell:
        p^2 a u/(f dx) < ``rossby``, f not less than (beta c)^(1/2).
    Faces, s the smallest of 1, TURN_ANGLE/(f dt) and 1/(a p) of both neighbours.
    """
    h, _, _, u, v = state
    f, b = forcing.coriolis, work.buoyancy
    pace, pace_x, pace_y = hastening.pace, hastening.pace_x, hastening.pace_y
    rows, columns = pace.shape
    curvature = 4.0 * (1.0 / constants.dx**2 + 1.0 / constants.dy**2)
    per_speed = (dt / WAVE_ANGLE) ** 2 * curvature
    highest = min(limit, MIXING_SHARE / max(2.0 * constants.diffusivity * curvature * dt, 1e-12))
    beta = abs(f[3] - f[2]) / constants.dy
    for j in range(2, rows - 2):
        f_here = 0.5 * abs(f[j] + f[j + 1])
        for n in range(columns - 4):
            i = n + 2
            c2 = square_of_wave_speed(h, b, j, i)
            share = share_crossing(u, v, j, i, dt / constants.dx, dt / constants.dy)
            p = min(highest, LARGEST_SHARE / share)
            if h[0, j, i] < 1.2 * constants.shoaling_depth:
                p = min(p, SHOALING_SHARE * constants.shoaling_time / dt)
            turning = max(f_here, np.sqrt(beta * np.sqrt(c2)), 1e-9)
            pace[j, i] = min(p, np.sqrt(rossby * turning * dt / (share * max(c2 * per_speed, 0.1))))
    fill_centre_edges(2, rows - 2, pace, constants.periodic_x)
    for j in range(2, rows - 1):
        turn = max(1.0, dt / TURN_ANGLE * max(abs(f[j]), abs(f[j + 1])))
        for n in range(columns - 3):
            i = n + 2
            here = pace[j, i] * square_of_wave_speed(h, b, j, i)
            west = pace[j, i - 1] * square_of_wave_speed(h, b, j, i - 1)
            south = pace[j - 1, i] * square_of_wave_speed(h, b, j - 1, i)
            pace_x[j, i] = 1.0 / max(turn, per_speed * max(here, west))
            pace_y[j, i] = 1.0 / max(turn, per_speed * max(here, south))


@kernel
def take_pace(h: Array, heat: Array, salt: Array, before: Array, k: int, pace: Array) -> None:
    """x = x_0 + p (x - x_0) for thickness, heat and salt alike, so that a uniform temperature stays uniform."""
    rows, columns = h.shape
    h0, heat0, salt0 = before[0, k], before[1, k], before[2, k]
    for j in range(2, rows - 2):
        for n in range(columns - 4):
            i = n + 2
            change = h[j, i] - h0[j, i]
            p = min(pace[j, i], LARGEST_CHANGE * h0[j, i] / max(abs(change), 1e-12))
            h[j, i] = h0[j, i] + p * change
            heat[j, i] = heat0[j, i] + p * (heat[j, i] - heat0[j, i])
            salt[j, i] = salt0[j, i] + p * (salt[j, i] - salt0[j, i])


@kernel
def push_at_pace(
    u: Array, force: Array, advected: Array, pressure: Array, drag: Array, gain: Array, thickness: Array,
    west: int, south: int, pace: Array, dt: float,
) -> None:  # fmt: skip
    """u = (u + s dt [force + advected + pressure])/(1 + s dt [r + w_e/h]) on faces between (j, i) and (j - south, i - west)."""
    rows, columns = u.shape
    per_dt = 1.0 / dt
    for j in range(2, rows - 2):
        for n in range(columns - 4):
            i = n + 2
            step = dt * pace[j, i]
            dilution = 0.5 * per_dt * (gain[j, i] + gain[j - south, i - west]) / thickness[j, i]
            total = force[j, i] + advected[j, i] + pressure[j, i]
            u[j, i] = (u[j, i] + step * total) / (1.0 + step * (drag[j, i] + dilution))


@kernel
def old_forces(
    state: State, k: int, forcing: Forcing, constants: Constants, work: Workspace, hastening: Hastening
) -> None:
    """Transports, friction, rotation by v and advection of layer ``k``, left in ``work`` and ``hastening``."""
    h, u, v = state.thickness[k], state.velocity_x[k], state.velocity_y[k]
    last = h.shape[0] - 1
    hx, hy, fx, fy = work.thickness_x[k], work.thickness_y[k], work.flux_x[k], work.flux_y[k]
    mean_thickness(1, last + 1, h, constants, hx, hy)
    transport_x(2, last, h, hx, u, constants, fx)
    transport_y(2, last, h, hy, v, constants, fy)
    friction(2, last - 1, u, v, hx, hy, constants, work.force_x[k], work.force_y[k])
    if constants.momentum_advection:
        corner_terms(2, last, hx, u, v, fy, forcing.coriolis, constants, work.vorticity[k], work.turned[k])
        kinetic_energy(1, last, u, v, work.kinetic[k])
        advection(
            2, last - 1, work.vorticity[k], work.kinetic[k], fx, fy, constants, hastening.advection_x[k],
            hastening.advection_y[k],
        )  # fmt: skip
    planetary_x(2, last - 1, hx, work.turned[k], fy, forcing.coriolis, constants, work.force_x[k])


@kernel
def move_water(state: State, k: int, constants: Constants, ledger: Ledger, work: Workspace, dt: float) -> None:
    """Step 1 for layer ``k``: volume, heat and salt move with the present transports, all booked."""
    h, heat, salt = state.thickness[k], state.heat[k], state.salt[k]
    rows = h.shape[0]
    fx, fy, per_h, tx, ty = work.flux_x[k], work.flux_y[k], work.per_thickness[k], work.tracer_x[k], work.tracer_y[k]
    concentration(0, rows, h, heat, per_h, work.temperature[k])
    if outflow_share(2, rows - 2, per_h, fx, fy, dt, constants, work.share[k]) > 0:
        ledger.limited_faces[0] += limit_outflow(2, rows - 1, rows, fx, fy, work.share[k])
    tracer_flux(
        2, rows - 1, h, per_h, work.temperature[k], fx, fy, dt, dt, constants, ledger.heat_advection_x[k],
        ledger.heat_advection_y[k], ledger.heat_mixing_x[k], ledger.heat_mixing_y[k], tx, ty,
    )  # fmt: skip
    transport_step(2, rows - 2, heat, tx, ty, dt, constants)
    if constants.salty:
        concentration(0, rows, h, salt, per_h, work.salinity[k])
        tracer_flux(
            2, rows - 1, h, per_h, work.salinity[k], fx, fy, dt, dt, constants, ledger.salt_advection_x[k],
            ledger.salt_advection_y[k], ledger.salt_mixing_x[k], ledger.salt_mixing_y[k], tx, ty,
        )  # fmt: skip
        transport_step(2, rows - 2, salt, tx, ty, dt, constants)
    book(2, rows - 1, ledger.volume_x[k], ledger.volume_y[k], fx, fy, dt)
    transport_step(2, rows - 2, h, fx, fy, dt, constants)


@kernel
def move_contents(
    state: State, forcing: Forcing, constants: Constants, ledger: Ledger, work: Workspace, hastening: Hastening,
    wind: float, dt: float,
) -> None:  # fmt: skip
    """Steps 1 and 2; leaves the forces of the old state in ``work`` and ``hastening``."""
    h, heat, salt, u, v = state
    before = hastening.before
    before[0], before[1], before[2] = h, heat, salt
    for k in range(h.shape[0]):
        old_forces(state, k, forcing, constants, work, hastening)
        move_water(state, k, constants, ledger, work, dt)
    last, Mx, My = h.shape[1] - 1, work.mixed_x[0], work.mixed_y[0]
    if constants.mixed_depth > 0.0:
        fill_centre_edges(2, last - 1, h[0], constants.periodic_x)
        mixed_layer_transport(2, last, h[0], u[0], v[0], forcing.shear_x, forcing.shear_y, wind, constants, Mx, My)
    exchange(
        2, last - 1, h[0], heat[0], salt[0], forcing, constants, dt, ledger, Mx, My, work.gain[0], work.heating[0]
    )  # fmt: skip
    fill_centre_edges(2, last - 1, work.gain[0], constants.periodic_x)
    for k in range(h.shape[0]):
        take_pace(h[k], heat[k], salt[k], before, k, hastening.pace)


@kernel
def push_velocities(
    state: State, forcing: Forcing, constants: Constants, work: Workspace, hastening: Hastening, wind: float, dt: float
) -> None:
    """Step 3 for every layer; edges of thickness, heat and salt and ``work.buoyancy`` must be filled."""
    h, _, _, u, v = state
    sign, periodic, rows = constants.tangential_sign, constants.periodic_x, h.shape[1]
    for k in range(h.shape[0]):
        hx, hy, fx = work.later_thickness_x[k], work.later_thickness_y[k], work.later_transport_x[k]
        force_x, force_y = work.force_x[k], work.force_y[k]
        px, py = hastening.pressure_x[k], hastening.pressure_y[k]
        mean_thickness(1, rows, h[k], constants, hx, hy)
        pressure_forces(2, rows - 2, work.buoyancy[k], work.pressure[k], work.depth[k], constants, px, py)
        if k == 0:
            wind_acceleration(forcing.wind_x, hx, wind, force_x)
            wind_acceleration(forcing.wind_y, hy, wind, force_y)
        push_at_pace(
            u[k], force_x, hastening.advection_x[k], px, forcing.drag_x, work.gain[k], hx, 1, 0, hastening.pace_x, dt
        )  # fmt: skip
        fill_x_face_edges(2, rows - 2, u[k], periodic, sign)
        transport_x(2, rows - 2, h[k], hx, u[k], constants, fx)
        planetary_y(3, rows - 2, hx, hy, fx, forcing.coriolis, constants, work.later_turned[k], force_y)
        push_at_pace(
            v[k], force_y, hastening.advection_y[k], py, forcing.drag_y, work.gain[k], hy, 0, 1, hastening.pace_y, dt
        )  # fmt: skip
        fill_y_face_edges(2, rows - 2, v[k], periodic, sign)


@kernel
def advance_hastened(
    state: State,
    hastening: Hastening,
    forcing: Forcing,
    constants: Constants,
    ledger: Ledger,
    work: Workspace,
    limit: float,
    rossby: float,
    start_time: float,
    dt: float,
    steps: int,
) -> None:
    """Take ``steps`` steps of ``dt`` seconds in place, contents at most ``limit`` times as fast as they would truly go.

    ``rossby`` bounds how far currents may be from geostrophy (`set_pace`); ``start_time`` [s] is the model time of the state,
    and a step counts as ``dt`` of it.  Not for linear dynamics.
    """
    h, heat, salt, _, _ = state
    rows = h.shape[1]
    fill_edges(state, constants)
    layer_pressure(0, rows, h, heat, salt, constants, work.buoyancy, work.pressure, work.depth)
    for n in range(steps):
        if n % STEPS_OF_A_PACE == 0:
            set_pace(state, forcing, constants, work, hastening, limit, rossby, dt)
        wind = wind_fraction(start_time + (n + 0.5) * dt, constants)
        move_contents(state, forcing, constants, ledger, work, hastening, wind, dt)
        fill_edges(state, constants)
        layer_pressure(0, rows, h, heat, salt, constants, work.buoyancy, work.pressure, work.depth)
        push_velocities(state, forcing, constants, work, hastening, wind, dt)
