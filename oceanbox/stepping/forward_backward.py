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

The basin is swept once a step, from south to north in bands of rows.  Each part of the step follows as many rows behind the
front of the band as its neighbours to the north and the part before it need (`open_band` 0, `move_band` 1 and 2,
`exchange_band` and `close_band` 3), so that a row is finished while it is still in the processor's cache.  Each row is worked
out from the same numbers whatever the height of the bands: results do not depend on it.
"""

import numpy as np
from numpy.typing import NDArray

from oceanbox.compiling import kernel, part
from oceanbox.grid.edges import fill_centre_edges, fill_x_face_edges, fill_y_face_edges
from oceanbox.physics.continuity import (
    centred_transports,
    limit_outflow,
    mean_thickness,
    outflow_share,
    transport_x,
    transport_y,
)
from oceanbox.physics.entrainment import mixed_layer_transport
from oceanbox.physics.exchange import dilute_momentum, exchange
from oceanbox.physics.momentum import advection, corner_terms, friction, kinetic_energy, planetary_x, planetary_y
from oceanbox.physics.pressure import layer_pressure, pressure_force
from oceanbox.physics.rows import place, window
from oceanbox.physics.state import Constants, Forcing, Ledger, State
from oceanbox.physics.tracers import concentration, tracer_flux, transport_step
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
def weigh_transports(
    first: int, end: int, now: Array, before: Array, earlier: Array, weights: tuple[float, float, float], F: Array
) -> None:
    """F = w0 U^n + w1 U^{n-1} + w2 U^{n-2}; transports (ny+4, nx+4), ``F`` a belt."""
    w0, w1, w2 = weights
    for j in range(first, end):
        here = place(j, F.shape[0])
        for i in range(F.shape[1]):
            F[here, i] = w0 * now[j, i] + w1 * before[j, i] + w2 * earlier[j, i]


@part
def open_band(
    band: int, height: int, k: int, state: State, memory: Memory, forcing: Forcing, constants: Constants, work: Workspace,
    slots: tuple[int, int, int], history: int,
) -> None:  # fmt: skip
    """What the old state of layer ``k`` says about the rows of a band: step 1, vorticity, kinetic energy, friction, rotation."""
    h, u, v = state.thickness[k], state.velocity_x[k], state.velocity_y[k]
    now, before, earlier = slots
    hx, hy = work.thickness_x[k], work.thickness_y[k]
    tx, ty = memory.transport_x, memory.transport_y
    rows = h.shape[0]

    first, end = window(band, height, 0, 0, rows)
    concentration(first, end, h, state.heat[k], work.per_thickness[k], work.temperature[k])
    if constants.salty:
        concentration(first, end, h, state.salt[k], work.per_thickness[k], work.salinity[k])

    first, end = window(band, height, 0, 1, rows)
    weights = transport_weights(history)
    fx, fy = work.flux_x[k], work.flux_y[k]
    if constants.upwind_thickness and constants.linear_depth == 0.0:
        mean_thickness(first, end, h, constants, hx, hy)
        first, end = window(band, height, 0, 2, rows - 1)
        transport_x(first, end, h, hx, u, constants, tx[now, k])
        transport_y(first, end, h, hy, v, constants, ty[now, k])
        weigh_transports(first, end, tx[now, k], tx[before, k], tx[earlier, k], weights, fx)
        weigh_transports(first, end, ty[now, k], ty[before, k], ty[earlier, k], weights, fy)
    else:
        centred_transports(
            first, end, h, u, v, weights, constants, tx[before, k], tx[earlier, k], ty[before, k], ty[earlier, k],
            hx, hy, tx[now, k], ty[now, k], fx, fy,
        )  # fmt: skip
    first, end = window(band, height, 0, 2, rows - 1)
    if constants.momentum_advection:
        corner_terms(
            first, end, hx, u, v, ty[now, k], forcing.coriolis, constants, work.vorticity[k], work.turned[k]
        )  # fmt: skip
        first, end = window(band, height, 0, 1, rows - 1)
        kinetic_energy(first, end, u, v, work.kinetic[k])

    first, end = window(band, height, 1, 2, rows - 2)
    friction(first, end, u, v, hx, hy, constants, work.force_x[k], work.force_y[k])
    planetary_x(first, end, hx, work.turned[k], ty[now, k], forcing.coriolis, constants, work.force_x[k])
    if constants.momentum_advection:
        advection(
            first, end, work.vorticity[k], work.kinetic[k], tx[now, k], ty[now, k], constants,
            memory.advection_x[now, k], memory.advection_y[now, k],
        )  # fmt: skip


@part
def move_band(
    band: int, height: int, k: int, crowded: int, state: State, constants: Constants, ledger: Ledger, work: Workspace,
    dt: float,
) -> int:  # fmt: skip
    """Step 2 for layer ``k``: volume, heat and salt move with the weighted transports, all booked.

    ``crowded`` counts the cells of the band before that would lose too much water; returns the same of this one.
    """
    h, heat, salt = state.thickness[k], state.heat[k], state.salt[k]
    fx, fy, per_h = work.flux_x[k], work.flux_y[k], work.per_thickness[k]
    rows = h.shape[0]

    first, end = window(band, height, 1, 2, rows - 2)
    crowded_now = outflow_share(first, end, per_h, fx, fy, dt, constants, work.share[k])
    if crowded + crowded_now > 0:
        ledger.limited_faces[0] += limit_outflow(first, end, rows, fx, fy, work.share[k])
    first, end = window(band, height, 1, 2, rows - 1)
    book(first, end, ledger.volume_x[k], ledger.volume_y[k], fx, fy, dt)
    tracer_flux(
        first, end, h, per_h, work.temperature[k], fx, fy, dt, dt, constants, ledger.heat_advection_x[k],
        ledger.heat_advection_y[k], ledger.heat_mixing_x[k], ledger.heat_mixing_y[k], work.tracer_x[k], work.tracer_y[k],
    )  # fmt: skip
    if constants.salty:
        tracer_flux(
            first, end, h, per_h, work.salinity[k], fx, fy, dt, dt, constants, ledger.salt_advection_x[k],
            ledger.salt_advection_y[k], ledger.salt_mixing_x[k], ledger.salt_mixing_y[k], work.salt_x[k], work.salt_y[k],
        )  # fmt: skip

    first, end = window(band, height, 2, 2, rows - 2)
    transport_step(first, end, h, fx, fy, dt, constants)
    transport_step(first, end, heat, work.tracer_x[k], work.tracer_y[k], dt, constants)
    fill_centre_edges(first, end, h, constants.periodic_x)
    if constants.salty:
        transport_step(first, end, salt, work.salt_x[k], work.salt_y[k], dt, constants)
    return crowded_now


@part
def exchange_band(
    band: int, height: int, state: State, forcing: Forcing, constants: Constants, ledger: Ledger, work: Workspace,
    wind: float, owed: float,
) -> None:  # fmt: skip
    """Step 3: the columns of the top layer exchange with air and abyss over ``owed`` seconds."""
    h, heat, salt, u, v = state
    rows = h.shape[1]
    Mx, My = work.mixed_x[0], work.mixed_y[0]
    if constants.mixed_depth > 0.0:
        first, end = window(band, height, 2, 2, rows - 1)
        mixed_layer_transport(
            first, end, h[0], u[0], v[0], forcing.shear_x, forcing.shear_y, wind, constants, Mx, My
        )  # fmt: skip
    first, end = window(band, height, 3, 2, rows - 2)
    exchange(
        first, end, h[0], heat[0], salt[0], forcing, constants, owed, ledger, Mx, My, work.gain[0], work.heating[0]
    )


@kernel
def stepped_velocity(
    u: float, force: float, advections: tuple[float, float, float], pressures: tuple[float, float, float, float],
    advection_weight: tuple[float, float, float], pressure_weight: tuple[float, float, float, float],
    h: float, stress: float, drag: float, dt: float,
) -> float:  # fmt: skip
    """u^{n+1} = (u^n + dt [weighted terms + force + tau/(rho0 h)])/(1 + dt r), written with one division."""
    a0, a1, a2 = advection_weight
    p0, p1, p2, p3 = pressure_weight
    total = a0 * advections[0] + a1 * advections[1] + a2 * advections[2] + force
    total += p0 * pressures[0] + p1 * pressures[1] + p2 * pressures[2] + p3 * pressures[3]
    return ((u + dt * total) * h + dt * stress) / (h * (1.0 + dt * drag))


@kernel
def update_u(
    first: int, end: int, u: Array, force: Array, advection_now: Array, advection_before: Array, advection_earlier: Array,
    pressure_now: Array, pressure_before: Array, pressure_earlier: Array, P: Array, b: Array, d: Array,
    h: Array, stress: Array, wind: float, drag: Array, constants: Constants, history: int, dt: float,
) -> None:  # fmt: skip
    """New u of rows; the oldest pressure slot takes the newest force.  ``force``, ``P``, ``b``, ``d``, ``h`` are belts."""
    advection_weight, pressure_weight = advection_weights(history), pressure_weights(history)
    per_dx = 1.0 / constants.dx
    for j in range(first, end):
        here = place(j, force.shape[0])
        for n in range(u.shape[1] - 4):
            i = n + 2
            newest = pressure_force(
                P[here, i], P[here, i - 1], b[here, i], b[here, i - 1], d[here, i], d[here, i - 1], per_dx
            )
            u[j, i] = stepped_velocity(
                u[j, i], force[here, i], (advection_now[j, i], advection_before[j, i], advection_earlier[j, i]),
                (newest, pressure_now[j, i], pressure_before[j, i], pressure_earlier[j, i]), advection_weight,
                pressure_weight, h[here, i], wind * stress[j, i], drag[j, i], dt,
            )  # fmt: skip
            pressure_earlier[j, i] = newest


@kernel
def update_v(
    first: int, end: int, v: Array, force: Array, advection_now: Array, advection_before: Array, advection_earlier: Array,
    pressure_now: Array, pressure_before: Array, pressure_earlier: Array, P: Array, b: Array, d: Array,
    h: Array, stress: Array, wind: float, drag: Array, constants: Constants, history: int, dt: float,
) -> None:  # fmt: skip
    """New v of rows, as `update_u`."""
    advection_weight, pressure_weight = advection_weights(history), pressure_weights(history)
    per_dy = 1.0 / constants.dy
    for j in range(first, end):
        here, south = place(j, force.shape[0]), place(j - 1, force.shape[0])
        for n in range(v.shape[1] - 4):
            i = n + 2
            newest = pressure_force(P[here, i], P[south, i], b[here, i], b[south, i], d[here, i], d[south, i], per_dy)
            v[j, i] = stepped_velocity(
                v[j, i], force[here, i], (advection_now[j, i], advection_before[j, i], advection_earlier[j, i]),
                (newest, pressure_now[j, i], pressure_before[j, i], pressure_earlier[j, i]), advection_weight,
                pressure_weight, h[here, i], wind * stress[j, i], drag[j, i], dt,
            )  # fmt: skip
            pressure_earlier[j, i] = newest


@kernel
def fill_velocity_edges(first: int, end: int, u: Array, v: Array, constants: Constants) -> None:
    """Ghost cells of both velocities."""
    fill_x_face_edges(first, end, u, constants.periodic_x, constants.tangential_sign)
    fill_y_face_edges(first, end, v, constants.periodic_x, constants.tangential_sign)


@part
def push_band(
    first: int, end: int, k: int, state: State, memory: Memory, forcing: Forcing, constants: Constants, work: Workspace,
    slots: tuple[int, int, int], history: int, wind: float, dt: float,
) -> None:  # fmt: skip
    """Steps 4 and 5 for layer ``k``; ``wind`` is the fraction of the stress that acts on it."""
    h, u, v = state.thickness[k], state.velocity_x[k], state.velocity_y[k]
    now, before, earlier = slots
    ax, ay = memory.advection_x, memory.advection_y
    px, py = memory.pressure_x, memory.pressure_y
    hx, hy, U = work.later_thickness_x[k], work.later_thickness_y[k], work.later_transport_x[k]
    b, P, d = work.buoyancy[k], work.pressure[k], work.depth[k]
    # Pressure slots: 'before' n, 'earlier' n-1, 'now' n-2.
    update_u(
        first, end, u, work.force_x[k], ax[now, k], ax[before, k], ax[earlier, k], px[before, k], px[earlier, k], px[now, k],
        P, b, d, hx, forcing.wind_x, wind, forcing.drag_x, constants, history, dt,
    )  # fmt: skip
    fill_x_face_edges(first, end, u, constants.periodic_x, constants.tangential_sign)
    transport_x(first, end, h, hx, u, constants, U)
    # On the southern wall there is no v.
    south = max(first, 3)
    planetary_y(south, end, hx, hy, U, forcing.coriolis, constants, work.later_turned[k], work.force_y[k])
    update_v(
        south, end, v, work.force_y[k], ay[now, k], ay[before, k], ay[earlier, k], py[before, k], py[earlier, k], py[now, k],
        P, b, d, hy, forcing.wind_y, wind, forcing.drag_y, constants, history, dt,
    )  # fmt: skip
    fill_y_face_edges(first, end, v, constants.periodic_x, constants.tangential_sign)


@part
def close_band(
    band: int, height: int, state: State, memory: Memory, forcing: Forcing, constants: Constants, work: Workspace,
    slots: tuple[int, int, int], history: int, wind: float, dt: float,
) -> None:  # fmt: skip
    """Steps 4 and 5 for all layers, from the new thickness, heat and salt of the rows."""
    h, heat, salt, _, _ = state
    first, end = window(band, height, 3, 2, h.shape[1] - 2)
    for k in range(h.shape[0]):
        fill_centre_edges(first, end, h[k], constants.periodic_x)
        fill_centre_edges(first, end, heat[k], constants.periodic_x)
        if constants.salty:
            fill_centre_edges(first, end, salt[k], constants.periodic_x)
        mean_thickness(first, end, h[k], constants, work.later_thickness_x[k], work.later_thickness_y[k])
    layer_pressure(first, end, h, heat, salt, constants, work.buoyancy, work.pressure, work.depth)
    for k in range(h.shape[0]):
        acting = wind if k == 0 else 0.0
        push_band(first, end, k, state, memory, forcing, constants, work, slots, history, acting, dt)


@part
def dilute_band(band: int, height: int, state: State, constants: Constants, work: Workspace) -> None:
    """What was entrained came in at rest."""
    u, v = state.velocity_x[0], state.velocity_y[0]
    first, end = window(band, height, 3, 2, u.shape[0] - 2)
    dilute_momentum(
        first, end, u, v, work.later_thickness_x[0], work.later_thickness_y[0], work.gain[0], constants
    )  # fmt: skip
    fill_velocity_edges(first, end, u, v, constants)


@kernel
def fill_edges(state: State, constants: Constants) -> None:
    """Ghost cells of all five fields."""
    h, heat, salt, u, v = state
    end = h.shape[1] - 2
    for k in range(h.shape[0]):
        fill_centre_edges(2, end, h[k], constants.periodic_x)
        fill_centre_edges(2, end, heat[k], constants.periodic_x)
        fill_centre_edges(2, end, salt[k], constants.periodic_x)
        fill_velocity_edges(2, end, u[k], v[k], constants)


# Rows of a belt that are still needed when a band begins.
ROWS_BEHIND = 3


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
    layers, rows, _ = state.thickness.shape
    height = work.share.shape[1] - ROWS_BEHIND
    fill_edges(state, constants)
    owed = 0
    for n in range(steps):
        slots = ((steps_done + n) % 3, (steps_done + n + 2) % 3, (steps_done + n + 1) % 3)
        wind = wind_fraction(start_time + (n + 0.5) * dt, constants)
        owed += 1
        exchanging = owed == exchange_every or n == steps - 1
        crowded = 0
        for band in range(0, rows + 1, height):
            crowded_now = 0
            for k in range(layers):
                open_band(band, height, k, state, memory, forcing, constants, work, slots, history + n)
                crowded_now += move_band(band, height, k, crowded, state, constants, ledger, work, dt)
            crowded = crowded_now
            if exchanging:
                exchange_band(band, height, state, forcing, constants, ledger, work, wind, owed * dt)
            close_band(band, height, state, memory, forcing, constants, work, slots, history + n, wind, dt)
            if exchanging:
                dilute_band(band, height, state, constants, work)
        if exchanging:
            owed = 0
