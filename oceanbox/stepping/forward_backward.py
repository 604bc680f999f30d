"""Generalised forward-backward stepping: one evaluation of each term a step, at nearly twice the gravity-wave limit of others.

One step from n to n+1, ring index of the memory = step count modulo 3:

1. transports U^n; the thickness equation uses their weighted mean over n, n-1, n-2;
2. the same weighted transports carry heat and salt, forward in time;
3. every few steps columns exchange with air and abyss (``physics.exchange``) over the time since they last did: these terms
   take days and would otherwise be most of the cost;
4. velocity: vorticity flux and Bernoulli gradient at n (third-order Adams-Bashforth), pressure force weighted over
   n+1 ... n-2, friction at n, wind at n + 1/2, drag implicit;
5. planetary rotation in turn: u^{n+1} from v^n, then v^{n+1} from u^{n+1}, neutral for f dt < 2.

Weights: ``stepping.weights``; limits: ``stepping.limits``.
"""

import numpy as np
from numpy.typing import NDArray

from oceanbox.compiling import kernel
from oceanbox.grid.edges import fill_centre_edges, fill_x_face_edges, fill_y_face_edges
from oceanbox.physics.buoyancy import layer_buoyancy
from oceanbox.physics.continuity import keep_thickness_positive, mean_thickness, volume_transport
from oceanbox.physics.exchange import dilute_momentum, exchange
from oceanbox.physics.momentum import advection, friction, planetary_x, planetary_y, pressure_force, wind_acceleration
from oceanbox.physics.state import Constants, Forcing, Ledger, State
from oceanbox.physics.tracers import concentration, mixing_flux, tracer_flux, transport_step
from oceanbox.stepping.booking import book
from oceanbox.stepping.memory import Memory, Workspace
from oceanbox.stepping.weights import advection_weights, pressure_weights, transport_weights

__all__ = ["advance_forward_backward", "wind_fraction"]

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
def move_water(
    state: State, memory: Memory, constants: Constants, ledger: Ledger, work: Workspace,
    now: int, before: int, earlier: int, history: int, dt: float,
) -> None:  # fmt: skip
    """Steps 1 and 2 for every layer: volume, heat and salt move with the weighted transports, all booked."""
    h, heat, salt, u, v = state
    tx, ty = memory.transport_x, memory.transport_y
    weights = transport_weights(history)
    for k in range(h.shape[0]):
        volume_transport(h[k], work.thickness_x[k], work.thickness_y[k], u[k], v[k], constants, tx[now, k], ty[now, k])
        fx, fy = work.flux_x[k], work.flux_y[k]
        weigh_transports(tx[now, k], tx[before, k], tx[earlier, k], weights, fx)
        weigh_transports(ty[now, k], ty[before, k], ty[earlier, k], weights, fy)
        ledger.limited_faces[0] += keep_thickness_positive(h[k], fx, fy, dt, constants, work.share)
        move_tracer(
            h[k], heat[k], work, k, dt, constants, ledger.heat_advection_x[k], ledger.heat_advection_y[k],
            ledger.heat_mixing_x[k], ledger.heat_mixing_y[k],
        )  # fmt: skip
        if constants.salty:
            move_tracer(
                h[k], salt[k], work, k, dt, constants, ledger.salt_advection_x[k], ledger.salt_advection_y[k],
                ledger.salt_mixing_x[k], ledger.salt_mixing_y[k],
            )  # fmt: skip
        book(ledger.volume_x[k], ledger.volume_y[k], fx, fy, dt)
        transport_step(h[k], fx, fy, dt, constants)


@kernel
def fill_layer_edges(state: State, work: Workspace, constants: Constants) -> None:
    """Ghost cells of the contents, buoyancy everywhere, thickness on faces."""
    h, heat, salt, _, _ = state
    for k in range(h.shape[0]):
        fill_centre_edges(h[k], constants.periodic_x)
        fill_centre_edges(heat[k], constants.periodic_x)
        fill_centre_edges(salt[k], constants.periodic_x)
        layer_buoyancy(h[k], heat[k], salt[k], constants, work.buoyancy[k])
        mean_thickness(h[k], constants, work.thickness_x[k], work.thickness_y[k])


@kernel
def update_velocity(
    u: Array, force: Array, advection_now: Array, advection_before: Array, advection_earlier: Array,
    pressure_next: Array, pressure_now: Array, pressure_before: Array, pressure_earlier: Array,
    drag: Array, history: int, dt: float,
) -> None:  # fmt: skip
    """u^{n+1} = (u^n + dt [weighted terms + force])/(1 + dt r); the oldest pressure slot then takes the newest force."""
    a0, a1, a2 = advection_weights(history)
    p0, p1, p2, p3 = pressure_weights(history)
    rows, columns = u.shape
    for j in range(2, rows - 2):
        for n in range(columns - 4):
            i = n + 2
            total = a0 * advection_now[j, i] + a1 * advection_before[j, i] + a2 * advection_earlier[j, i]
            total += p0 * pressure_next[j, i] + p1 * pressure_now[j, i]
            total += p2 * pressure_before[j, i] + p3 * pressure_earlier[j, i] + force[j, i]
            pressure_earlier[j, i] = pressure_next[j, i]
            u[j, i] = (u[j, i] + dt * total) / (1.0 + dt * drag[j, i])


@kernel
def push_velocity(
    state: State, memory: Memory, forcing: Forcing, constants: Constants, work: Workspace,
    now: int, before: int, earlier: int, history: int, wind: float, dt: float,
) -> None:  # fmt: skip
    """Steps 4 and 5 for every layer; ``wind`` is the fraction of the stress that acts, on the top layer alone."""
    h, _, _, u, v = state
    ax, ay = memory.advection_x, memory.advection_y
    px, py = memory.pressure_x, memory.pressure_y
    sign, periodic = constants.tangential_sign, constants.periodic_x
    for k in range(u.shape[0]):
        hx, hy = work.thickness_x[k], work.thickness_y[k]
        force_x, force_y = work.force_x[k], work.force_y[k]
        # force_x already holds the planetary rotation by v^n.  Pressure slots: 'before' n, 'earlier' n-1, 'now' n-2.
        friction(u[k], hx, constants, force_x)
        if k == 0:
            wind_acceleration(forcing.wind_x, hx, wind, force_x)
        update_velocity(
            u[k], force_x, ax[now, k], ax[before, k], ax[earlier, k],
            work.pressure_x[k], px[before, k], px[earlier, k], px[now, k], forcing.drag_x, history, dt,
        )  # fmt: skip
        fill_x_face_edges(u[k], periodic, sign)
        volume_transport(h[k], hx, hy, u[k], v[k], constants, work.flux_x[k], work.flux_y[k])
        planetary_y(hx, hy, work.flux_x[k], forcing.coriolis, constants, force_y)
        friction(v[k], hy, constants, force_y)
        if k == 0:
            wind_acceleration(forcing.wind_y, hy, wind, force_y)
        update_velocity(
            v[k], force_y, ay[now, k], ay[before, k], ay[earlier, k],
            work.pressure_y[k], py[before, k], py[earlier, k], py[now, k], forcing.drag_y, history, dt,
        )  # fmt: skip
        fill_y_face_edges(v[k], periodic, sign)


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
    exchange_every: int,
    steps: int,
) -> None:
    """Take ``steps`` steps of ``dt`` seconds in place.

    ``steps_done`` counts all steps since the memory was made (it selects the ring slot), ``history`` the steps of this ``dt``
    behind us (it selects the starting weights), ``start_time`` [s] is the model time of the state.  Columns exchange after
    every ``exchange_every`` steps and after the last one, over the time since they last did: no time is owed at the end.
    """
    h, heat, salt, u, v = state
    fill_layer_edges(state, work, constants)
    owed = 0
    for n in range(steps):
        now = (steps_done + n) % 3
        before = (steps_done + n + 2) % 3
        earlier = (steps_done + n + 1) % 3
        wind = wind_fraction(start_time + (n + 0.5) * dt, constants)
        move_water(state, memory, constants, ledger, work, now, before, earlier, history + n, dt)
        tx, ty = memory.transport_x, memory.transport_y
        for k in range(h.shape[0]):
            hx = work.thickness_x[k]
            planetary_x(hx, ty[now, k], forcing.coriolis, constants, work.force_x[k])
            if constants.momentum_advection:
                advection(
                    hx, u[k], v[k], tx[now, k], ty[now, k], constants, work.vorticity, work.kinetic,
                    memory.advection_x[now, k], memory.advection_y[now, k],
                )  # fmt: skip
        owed += 1
        exchanging = owed == exchange_every or n == steps - 1
        if exchanging:
            exchange(
                h[0], heat[0], salt[0], u[0], v[0], forcing, constants, wind, owed * dt, ledger,
                work.mixed_x, work.mixed_y, work.gain[0],
            )  # fmt: skip
        fill_layer_edges(state, work, constants)
        pressure_force(h, work.buoyancy, constants, work.layer_pair, work.pressure_x, work.pressure_y)
        push_velocity(state, memory, forcing, constants, work, now, before, earlier, history + n, wind, dt)
        if exchanging:
            dilute_momentum(u[0], v[0], work.thickness_x[0], work.thickness_y[0], work.gain[0], constants)
            owed = 0
