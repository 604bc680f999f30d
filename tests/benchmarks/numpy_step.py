"""The step of the reference physics in plain vectorised NumPy: the yardstick of the compiled step, and a second opinion on it.

The same forward-backward scheme, written from its equations with whole-array expressions and slices: one layer between walls,
full momentum, limited tracers, no salt.  What it leaves out (salt that is nowhere, a channel, linear dynamics) it refuses.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from oceanbox.physics.state import Constants, Forcing, Ledger, State
from oceanbox.stepping.forward_backward import wind_fraction
from oceanbox.stepping.memory import Memory
from oceanbox.stepping.weights import advection_weights, pressure_weights, transport_weights
from tests.benchmarks.numpy_exchange import dilute_momentum, exchange
from tests.benchmarks.numpy_places import cells, corners, fill_centres, fill_x_faces, fill_y_faces, x_faces, y_faces

__all__ = ["advance_numpy", "require_reference_physics"]

Array = NDArray[np.float64]
LARGEST_OUTFLOW = 0.9


def require_reference_physics(state: State, constants: Constants) -> None:
    """Refuse what the yardsticks do not step."""
    c = constants
    beyond = {
        "more than one layer": state.thickness.shape[0] != 1,
        "a periodic channel": c.periodic_x,
        "salt": c.salty,
        "linear dynamics": c.linear_depth > 0.0 or not c.momentum_advection,
        "another thickness flux": c.upwind_thickness,
        "unlimited tracers": c.centred_tracers,
        "friction on transport": c.viscosity_on_transport,
        "no outcrop, upwelling or shoaling": 0.0 in (c.outcrop_margin, c.mixed_depth, c.shoaling_depth),
        "diffusive entrainment": c.diapycnal_diffusivity > 0.0,
    }
    found = [name for name, present in beyond.items() if present]
    if found:
        raise ValueError(f"got {', '.join(found)}; the yardsticks step the reference physics alone")


def keep_thickness_positive(h: Array, U: Array, V: Array, dt: float, constants: Constants) -> int:
    """Scale down the outflow of cells that would lose more than nine tenths of their water; the faces changed."""
    dt_dx, dt_dy = dt / constants.dx, dt / constants.dy
    leaving = dt_dx * (np.maximum(cells(U, 0, 1), 0.0) + np.maximum(-cells(U), 0.0))
    leaving += dt_dy * (np.maximum(cells(V, 1, 0), 0.0) + np.maximum(-cells(V), 0.0))
    share = leaving / cells(h)
    if share.max() <= LARGEST_OUTFLOW:
        return 0
    changed = 0
    for flow, donors in ((x_faces(U)[:, 1:-1], (share[:, :-1], share[:, 1:])), (cells(V)[1:], (share[:-1], share[1:]))):
        donor = np.where(flow > 0.0, *donors)
        limited = (donor > LARGEST_OUTFLOW) & (flow != 0.0)
        flow[limited] *= LARGEST_OUTFLOW / donor[limited]
        changed += int(limited.sum())
    return changed


def limited_face_value(far: Array, upstream: Array, downstream: Array, courant: Array) -> Array:
    """The value a face carries by Koren's limiter, Courant-corrected."""
    behind = upstream - far
    ahead = downstream - upstream
    sign = np.where(ahead > 0.0, 1.0, -1.0)
    third = sign * (ahead + 2.0 * behind) / 3.0
    slope = sign * np.maximum(0.0, np.minimum(np.minimum(2.0 * sign * behind, third), 2.0 * sign * ahead))
    return upstream + 0.5 * (1.0 - courant) * slope


def carried_flux(flow: Array, c: tuple[Array, ...], h: tuple[Array, Array], dt_per_width: float) -> Array:
    """Flux of a tracer through faces; ``c`` two cells behind to one beyond the face, ``h`` on its two sides."""
    forward = flow > 0.0
    share = np.abs(flow) * dt_per_width / np.where(forward, h[0], h[1])
    far, up = np.where(forward, c[0], c[3]), np.where(forward, c[1], c[2])
    down = np.where(forward, c[2], c[1])
    return flow * limited_face_value(far, up, down, share)


def divergence(Fx: Array, Fy: Array, dt: float, constants: Constants) -> Array:
    """dt (F_x + F_y) of cells from fluxes on their faces."""
    return dt / constants.dx * (Fx[:, 1:] - Fx[:, :-1]) + dt / constants.dy * (Fy[1:] - Fy[:-1])


def move_heat(h: Array, heat: Array, U: Array, V: Array, dt: float, constants: Constants, ledger: Ledger) -> None:
    """Advection and lateral mixing of heat, both from the field before the step, both booked."""
    c = heat / h
    along = tuple(x_faces(c, 0, east) for east in (-2, -1, 0, 1))
    across = tuple(y_faces(c, north, 0) for north in (-2, -1, 0, 1))
    h_x, h_y = (x_faces(h, 0, -1), x_faces(h)), (y_faces(h, -1, 0), y_faces(h))
    Fx = carried_flux(x_faces(U), along, h_x, dt / constants.dx)
    Fy = carried_flux(y_faces(V), across, h_y, dt / constants.dy)
    x_faces(ledger.heat_advection_x[0])[...] += dt * Fx
    y_faces(ledger.heat_advection_y[0])[...] += dt * Fy
    cells(heat)[...] -= divergence(Fx, Fy, dt, constants)
    if constants.diffusivity > 0.0:
        Fx = -0.5 * constants.diffusivity / constants.dx * (h_x[0] + h_x[1]) * (along[2] - along[1])
        Fy = -0.5 * constants.diffusivity / constants.dy * (h_y[0] + h_y[1]) * (across[2] - across[1])
        x_faces(ledger.heat_mixing_x[0])[...] += dt * Fx
        y_faces(ledger.heat_mixing_y[0])[...] += dt * Fy
        cells(heat)[...] -= divergence(Fx, Fy, dt, constants)


def advection(hx: Array, u: Array, v: Array, U: Array, V: Array, constants: Constants) -> tuple[Array, Array]:
    """Vorticity flux and Bernoulli gradient on the faces of interior cells."""
    zeta = (corners(v) - corners(v, 0, -1)) / constants.dx - (corners(u) - corners(u, -1, 0)) / constants.dy
    q = 0.5 * zeta / (corners(hx) + corners(hx, -1, 0))
    squares_x, squares_y = u * u, v * v
    K = 0.25 * (squares_x[1:-2, 1:-2] + squares_x[1:-2, 2:-1] + squares_y[1:-2, 1:-2] + squares_y[2:-1, 1:-2])
    turned = q[:, :-1] * (corners(V, 0, -1) + corners(V))[:, :-1]
    du = turned[:-1] + turned[1:] - (K[1:, 1:] - K[1:, :-1]) / constants.dx
    turned = q[:-1] * (corners(U, -1, 0) + corners(U))[:-1]
    dv = -(turned[:, :-1] + turned[:, 1:]) - (K[1:, 1:] - K[:-1, 1:]) / constants.dy
    return du, dv


def planetary_x(hx: Array, V: Array, f: Array) -> Array:
    """<(f/<h>) <V>^x>^y on x faces."""
    turned = 0.5 * f[2:-1, None] * (y_faces(V, 0, -1) + y_faces(V)) / (y_faces(hx) + y_faces(hx, -1, 0))
    return turned[:-1] + turned[1:]


def planetary_y(hx: Array, U: Array, f: Array) -> Array:
    """-<(f/<h>) <U>^y>^x on y faces."""
    turned = (x_faces(U, -1, 0) + x_faces(U)) / (x_faces(hx) + x_faces(hx, -1, 0))
    return -0.5 * f[2:-2, None] * (turned[:, :-1] + turned[:, 1:])


def pressure_force(h: Array, heat: Array, constants: Constants) -> tuple[Array, Array]:
    """-[b grad h + (h/2) grad b] on x and y faces, from the buoyancy of every cell."""
    theta = heat / h
    b = constants.gravity * (constants.expansion_abyss + 0.5 * constants.expansion_slope * theta) * theta
    P, d = 0.5 * h * b, 0.5 * h
    bx, by = 0.5 * (cells(b) + cells(b, 0, -1)), 0.5 * (cells(b) + cells(b, -1, 0))
    force_x = -(cells(P) - cells(P, 0, -1) + bx * (cells(d) - cells(d, 0, -1))) / constants.dx
    force_y = -(cells(P) - cells(P, -1, 0) + by * (cells(d) - cells(d, -1, 0))) / constants.dy
    return force_x, force_y


def friction(u: Array, constants: Constants) -> Array:
    """A lap(u) on faces of interior cells."""
    along = cells(u, 0, -1) + cells(u, 0, 1) - 2.0 * cells(u)
    across = cells(u, -1, 0) + cells(u, 1, 0) - 2.0 * cells(u)
    return constants.viscosity * (along / constants.dx**2 + across / constants.dy**2)


def weighted(weights: tuple[float, ...], fields: tuple[Array, ...]) -> Array:
    """w0 f0 + w1 f1 + ..."""
    total = weights[0] * fields[0]
    for weight, field in zip(weights[1:], fields[1:], strict=True):
        total += weight * field
    return total


def update_velocity(
    u: Array,
    force: Array,
    advections: tuple[Array, ...],
    pressures: tuple[Array, ...],
    drag: Array,
    history: int,
    dt: float,
) -> None:
    """u^{n+1} from the weighted terms; the oldest of ``pressures`` then takes the newest."""
    total = weighted(advection_weights(history), tuple(cells(field) for field in advections)) + force
    newest, *remembered = pressures
    total += weighted(pressure_weights(history), (newest, *(cells(field) for field in remembered)))
    cells(remembered[-1])[...] = newest
    cells(u)[...] = (cells(u) + dt * total) / (1.0 + dt * cells(drag))


def mean_thickness(h: Array) -> tuple[Array, Array]:
    """h on x and on y faces, of the shape of ``h``; what has no neighbour is never used."""
    hx, hy = np.empty_like(h), np.empty_like(h)
    hx[:, 1:] = 0.5 * (h[:, :-1] + h[:, 1:])
    hx[:, 0] = h[:, 0]
    hy[1:] = 0.5 * (h[:-1] + h[1:])
    hy[0] = h[0]
    return hx, hy


def advance_numpy(
    state: State, memory: Memory, forcing: Forcing, constants: Constants, ledger: Ledger,
    steps_done: int, history: int, start_time: float, dt: float, exchange_every: int, steps: int,
) -> None:  # fmt: skip
    """Take ``steps`` steps in place; arguments as those of `oceanbox.stepping.forward_backward.advance_forward_backward`."""
    require_reference_physics(state, constants)
    h, heat, u, v = state.thickness[0], state.heat[0], state.velocity_x[0], state.velocity_y[0]
    tx, ty = memory.transport_x[:, 0], memory.transport_y[:, 0]
    ax, ay, px, py = (field[:, 0] for field in memory[2:])
    sign = constants.tangential_sign
    fill_centres(h)
    fill_centres(heat)
    owed = 0
    for n in range(steps):
        now, before, earlier = (steps_done + n) % 3, (steps_done + n + 2) % 3, (steps_done + n + 1) % 3
        wind = wind_fraction(start_time + (n + 0.5) * dt, constants)
        hx, hy = mean_thickness(h)
        np.multiply(hx, u, out=tx[now])
        np.multiply(hy, v, out=ty[now])
        weights = transport_weights(history + n)
        U, V = (
            weighted(weights, (tx[now], tx[before], tx[earlier])),
            weighted(weights, (ty[now], ty[before], ty[earlier])),
        )
        ledger.limited_faces[0] += keep_thickness_positive(h, U, V, dt, constants)
        move_heat(h, heat, U, V, dt, constants, ledger)
        x_faces(ledger.volume_x[0])[...] += dt * x_faces(U)
        y_faces(ledger.volume_y[0])[...] += dt * y_faces(V)
        cells(h)[...] -= divergence(x_faces(U), y_faces(V), dt, constants)

        force_x = planetary_x(hx, ty[now], forcing.coriolis)
        cells(ax[now])[...], cells(ay[now])[...] = advection(hx, u, v, tx[now], ty[now], constants)
        owed += 1
        exchanging = owed == exchange_every or n == steps - 1
        if exchanging:
            gain = exchange(h, heat, u, v, forcing, constants, wind, owed * dt, ledger)
        fill_centres(h)
        fill_centres(heat)

        hx, hy = mean_thickness(h)
        pressure_x, pressure_y = pressure_force(h, heat, constants)
        # Pressure slots: 'before' holds n, 'earlier' n-1, 'now' n-2.
        force_x += friction(u, constants) + wind * cells(forcing.wind_x) / cells(hx)
        update_velocity(
            u, force_x, (ax[now], ax[before], ax[earlier]), (pressure_x, px[before], px[earlier], px[now]),
            forcing.drag_x, history + n, dt,
        )  # fmt: skip
        fill_x_faces(u, sign)
        force_y = planetary_y(hx, hx * u, forcing.coriolis)
        force_y += friction(v, constants) + wind * cells(forcing.wind_y) / cells(hy)
        update_velocity(
            v, force_y, (ay[now], ay[before], ay[earlier]), (pressure_y, py[before], py[earlier], py[now]),
            forcing.drag_y, history + n, dt,
        )  # fmt: skip
        fill_y_faces(v, sign)
        if exchanging:
            dilute_momentum(u, v, hx, hy, gain, constants)
            owed = 0
