"""Generalised forward-backward stepping: one evaluation of each term a step, at nearly twice the gravity-wave limit of others.

One step from n to n+1, ring index of the memory = step count modulo 3:

1. transports U^n; the thickness equation uses their weighted mean over n, n-1, n-2;
2. the same weighted transports carry heat and salt, forward in time;
3. columns exchange with air and abyss (``physics.exchange``), which completes h, heat and salt at n+1;
4. rotation and advection at n (third-order Adams-Bashforth), pressure force weighted over n+1 ... n-2, friction at n,
   wind at n + 1/2; drag and the momentum of entrained water implicit:

       u^{n+1} = (u^n + dt force) / (1 + dt (r + w_e/h)).

Weights: ``stepping.weights``.
"""

import numpy as np
from numpy.typing import NDArray

from oceanbox.compiling import kernel
from oceanbox.grid.edges import fill_centre_edges, fill_x_face_edges, fill_y_face_edges
from oceanbox.physics.buoyancy import layer_buoyancy
from oceanbox.physics.continuity import keep_thickness_positive, volume_transport
from oceanbox.physics.exchange import exchange
from oceanbox.physics.momentum import add_friction_and_wind, pressure_force, rotation
from oceanbox.physics.state import Constants, Forcing, Ledger, State
from oceanbox.physics.tracers import concentration, mixing_flux, tracer_flux, transport_step
from oceanbox.stepping.booking import book
from oceanbox.stepping.memory import Memory, Workspace
from oceanbox.stepping.weights import pressure_weights, rotation_weights, transport_weights

__all__ = ["advance_forward_backward"]

Array = NDArray[np.float64]


@kernel
def wind_fraction(time: float, constants: Constants) -> float:
    """Fraction of the wind stress that acts at ``time`` [s]: a linear rise over the ramp, then 1."""
    if constants.wind_ramp <= 0.0:
        return 1.0
    return min(max(time / constants.wind_ramp, 0.0), 1.0)


@kernel
def weigh_transports(now: Array, before: Array, earlier: Array, weights: tuple[float, float, float], F: Array) -> None:
    """F = w0 U^n + w1 U^{n-1} + w2 U^{n-2} on all faces."""
    w0, w1, w2 = weights
    rows, columns = F.shape
    for j in range(rows):
        for i in range(columns):
            F[j, i] = w0 * now[j, i] + w1 * before[j, i] + w2 * earlier[j, i]


@kernel
def move_tracer(
    h: Array, content: Array, work: Workspace, k: int, dt: float, constants: Constants,
    advection_x: Array, advection_y: Array, mixing_x: Array, mixing_y: Array,
) -> None:  # fmt: skip
    """Advection and lateral mixing of one content of one layer, both from the field before the step, both booked."""
    tx, ty = work.tracer_x, work.tracer_y
    concentration(h, content, work.concentration)
    tracer_flux(h, work.concentration, work.flux_x[k], work.flux_y[k], dt, constants, tx, ty)
    book(advection_x, advection_y, tx, ty, dt)
    transport_step(content, tx, ty, dt, constants)
    if constants.diffusivity > 0.0:
        mixing_flux(h, work.concentration, constants, tx, ty)
        book(mixing_x, mixing_y, tx, ty, dt)
        transport_step(content, tx, ty, dt, constants)


@kernel
def update_velocity(
    u: Array, h: Array, force: Array, rotation_now: Array, rotation_before: Array, rotation_earlier: Array,
    pressure_next: Array, pressure_now: Array, pressure_before: Array, pressure_earlier: Array,
    drag: Array, gain: Array, along_x: int, steps_done: int, dt: float, constants: Constants,
) -> None:  # fmt: skip
    """u^{n+1} from the weighted terms; the oldest pressure slot then takes the newest force.

    ``along_x`` = 1 for x faces (neighbour to the west), 0 for y faces (neighbour to the south).
    """
    r0, r1, r2 = rotation_weights(steps_done)
    p0, p1, p2, p3 = pressure_weights(steps_done)
    across = 1 - along_x
    depth = constants.linear_depth
    rows, columns = u.shape
    for j in range(2, rows - 2):
        for i in range(2, columns - 2):
            total = r0 * rotation_now[j, i] + r1 * rotation_before[j, i] + r2 * rotation_earlier[j, i]
            total += p0 * pressure_next[j, i] + p1 * pressure_now[j, i]
            total += p2 * pressure_before[j, i] + p3 * pressure_earlier[j, i] + force[j, i]
            pressure_earlier[j, i] = pressure_next[j, i]
            entrained = gain[j, i] + gain[j - across, i - along_x]
            thickness = 2.0 * depth if depth > 0.0 else h[j, i] + h[j - across, i - along_x]
            u[j, i] = (u[j, i] + dt * total) / (1.0 + dt * drag[j, i] + entrained / thickness)


@kernel
def advance_forward_backward(
    state: State,
    memory: Memory,
    forcing: Forcing,
    constants: Constants,
    ledger: Ledger,
    work: Workspace,
    steps_done: int,
    history: int,
    start_time: float,
    dt: float,
    steps: int,
) -> None:
    """Take ``steps`` steps of ``dt`` seconds in place.

    ``steps_done`` counts all steps since the memory was made (it selects the ring slot), ``history`` the steps of this
    ``dt`` behind us (it selects the starting weights), ``start_time`` [s] is the model time of the state.
    """
    h, heat, salt, u, v = state
    layers = h.shape[0]
    periodic = constants.periodic_x
    sign = constants.tangential_sign
    for n in range(steps):
        now = (steps_done + n) % 3
        before = (steps_done + n + 2) % 3
        earlier = (steps_done + n + 1) % 3
        done = history + n
        wind = wind_fraction(start_time + (n + 0.5) * dt, constants)
        for k in range(layers):
            volume_transport(h[k], u[k], v[k], constants, memory.transport_x[now, k], memory.transport_y[now, k])
            rotation(
                h[k], u[k], v[k], memory.transport_x[now, k], memory.transport_y[now, k], forcing.coriolis, constants,
                work.vorticity, work.kinetic, memory.rotation_x[now, k], memory.rotation_y[now, k],
            )  # fmt: skip
            weights = transport_weights(done)
            fx, fy = work.flux_x[k], work.flux_y[k]
            tx, ty = memory.transport_x, memory.transport_y
            weigh_transports(tx[now, k], tx[before, k], tx[earlier, k], weights, fx)
            weigh_transports(ty[now, k], ty[before, k], ty[earlier, k], weights, fy)
            ledger.limited_faces[0] += keep_thickness_positive(h[k], fx, fy, dt, constants, work.share)
            move_tracer(
                h[k], heat[k], work, k, dt, constants, ledger.heat_advection_x[k], ledger.heat_advection_y[k],
                ledger.heat_mixing_x[k], ledger.heat_mixing_y[k],
            )  # fmt: skip
            move_tracer(
                h[k], salt[k], work, k, dt, constants, ledger.salt_advection_x[k], ledger.salt_advection_y[k],
                ledger.salt_mixing_x[k], ledger.salt_mixing_y[k],
            )  # fmt: skip
            book(ledger.volume_x[k], ledger.volume_y[k], fx, fy, dt)
            transport_step(h[k], fx, fy, dt, constants)
        exchange(
            h[0],
            heat[0],
            salt[0],
            u[0],
            v[0],
            forcing,
            constants,
            wind,
            dt,
            ledger,
            work.mixed_x,
            work.mixed_y,
            work.gain[0],
        )
        for k in range(layers):
            fill_centre_edges(h[k], periodic)
            fill_centre_edges(heat[k], periodic)
            fill_centre_edges(salt[k], periodic)
            fill_centre_edges(work.gain[k], periodic)
            layer_buoyancy(h[k], heat[k], salt[k], constants, work.buoyancy[k])
        # The newest pressure force goes to scratch first: four levels are needed, three are kept.
        pressure_force(h, work.buoyancy, constants, work.layer_pair, work.flux_x, work.flux_y)
        for k in range(layers):
            work.force_x[k, :, :] = 0.0
            work.force_y[k, :, :] = 0.0
            acting = wind if k == 0 else 0.0
            add_friction_and_wind(h[k], u[k], v[k], acting, forcing, constants, work.force_x[k], work.force_y[k])
            rx, ry = memory.rotation_x, memory.rotation_y
            px, py = memory.pressure_x, memory.pressure_y
            # Pressure slots: 'before' holds n, 'earlier' n-1, 'now' n-2 and takes n+1.
            update_velocity(
                u[k], h[k], work.force_x[k], rx[now, k], rx[before, k], rx[earlier, k],
                work.flux_x[k], px[before, k], px[earlier, k], px[now, k], forcing.drag_x, work.gain[k], 1, done, dt, constants,
            )  # fmt: skip
            update_velocity(
                v[k], h[k], work.force_y[k], ry[now, k], ry[before, k], ry[earlier, k],
                work.flux_y[k], py[before, k], py[earlier, k], py[now, k], forcing.drag_y, work.gain[k], 0, done, dt, constants,
            )  # fmt: skip
            fill_x_face_edges(u[k], periodic, sign)
            fill_y_face_edges(v[k], periodic, sign)
