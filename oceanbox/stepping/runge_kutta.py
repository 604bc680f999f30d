"""Explicit Runge-Kutta stepping of the same terms: the referee of the production scheme, and the scheme of the invariants.

The conservative part (transports, rotation, pressure, friction, wind, drag, advection, mixing) goes through the stages of the
method; then the columns exchange with air and abyss once, as in ``stepping.forward_backward``.  Fluxes are booked with the
weights with which the method uses them, so the ledger is exact here too.

Methods: the three-stage strong-stability-preserving method (Shu and Osher 1988; Gottlieb, Shu and Tadmor 2001, SIAM Rev. 43,
89) and the classical four-stage method.
"""

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from oceanbox.compiling import kernel
from oceanbox.grid import Grid
from oceanbox.grid.edges import fill_centre_edges, fill_x_face_edges, fill_y_face_edges
from oceanbox.physics.buoyancy import layer_buoyancy
from oceanbox.physics.continuity import keep_thickness_positive, mean_thickness, volume_transport
from oceanbox.physics.exchange import dilute_momentum, exchange
from oceanbox.physics.momentum import advection, friction, planetary_x, planetary_y, pressure_force, wind_acceleration
from oceanbox.physics.state import Constants, Forcing, Ledger, State
from oceanbox.physics.tracers import concentration, mixing_flux, tracer_flux, transport_step
from oceanbox.stepping.booking import book
from oceanbox.stepping.forward_backward import wind_fraction
from oceanbox.stepping.memory import Workspace

__all__ = ["CLASSICAL_4", "STRONG_3", "Stages", "Tableau", "advance_runge_kutta", "empty_stages", "tendency"]

Array = NDArray[np.float64]


class Tableau(NamedTuple):
    """Butcher tableau of an explicit method: strictly lower ``a`` (s, s), weights ``b`` (s,), times ``c`` (s,)."""

    a: Array
    b: Array
    c: Array


STRONG_3 = Tableau(
    np.array([[0.0, 0.0, 0.0], [1.0, 0.0, 0.0], [0.25, 0.25, 0.0]]),
    np.array([1.0 / 6.0, 1.0 / 6.0, 2.0 / 3.0]),
    np.array([0.0, 1.0, 0.5]),
)
CLASSICAL_4 = Tableau(
    np.array([[0.0, 0.0, 0.0, 0.0], [0.5, 0.0, 0.0, 0.0], [0.0, 0.5, 0.0, 0.0], [0.0, 0.0, 1.0, 0.0]]),
    np.array([1.0 / 6.0, 1.0 / 3.0, 1.0 / 3.0, 1.0 / 6.0]),
    np.array([0.0, 0.5, 0.5, 1.0]),
)


class Stages(NamedTuple):
    """Tendencies of all stages, (s, L, ny+4, nx+4), and the state of the stage being worked on."""

    thickness: Array
    heat: Array
    salt: Array
    velocity_x: Array
    velocity_y: Array
    stage: State


def empty_stages(grid: Grid, layers: int, tableau: Tableau) -> Stages:
    """Room for the stages of ``tableau``."""
    many = (len(tableau.b), layers, *grid.shape)
    one = (layers, *grid.shape)
    return Stages(
        thickness=np.zeros(many),
        heat=np.zeros(many),
        salt=np.zeros(many),
        velocity_x=np.zeros(many),
        velocity_y=np.zeros(many),
        stage=State(*(np.zeros(one) for _ in State._fields)),
    )


@kernel
def content_tendency(
    h: Array, content: Array, work: Workspace, k: int, booked: float, constants: Constants,
    advection_x: Array, advection_y: Array, mixing_x: Array, mixing_y: Array, out: Array,
) -> None:  # fmt: skip
    """out = -div(U c) + div(kappa_h h grad c) for one content of one layer, booked over ``booked`` seconds."""
    tx, ty = work.tracer_x, work.tracer_y
    concentration(h, content, work.concentration)
    tracer_flux(h, work.concentration, work.flux_x[k], work.flux_y[k], 0.0, constants, tx, ty)
    book(advection_x, advection_y, tx, ty, booked)
    out[:, :] = 0.0
    transport_step(out, tx, ty, 1.0, constants)
    if constants.diffusivity > 0.0:
        mixing_flux(h, work.concentration, constants, tx, ty)
        book(mixing_x, mixing_y, tx, ty, booked)
        transport_step(out, tx, ty, 1.0, constants)


@kernel
def add_drag(u: Array, rate: Array, du: Array) -> None:
    """du -= r u in interior cells."""
    rows, columns = u.shape
    for j in range(2, rows - 2):
        for n in range(columns - 4):
            i = n + 2
            du[j, i] -= rate[j, i] * u[j, i]


@kernel
def tendency(
    state: State, forcing: Forcing, constants: Constants, wind: float, longest: float, booked: float,
    ledger: Ledger, work: Workspace, dh: Array, dheat: Array, dsalt: Array, du: Array, dv: Array,
) -> None:  # fmt: skip
    """Time derivative of the state without column exchange, (L, ny+4, nx+4) each, zero in ghost cells.

    Edges of ``state`` must be filled.  ``longest`` [s] is the step for which thickness must stay positive, ``booked`` [s] the
    time over which the ledger counts these fluxes.
    """
    h, heat, salt, u, v = state
    layers = h.shape[0]
    for k in range(layers):
        layer_buoyancy(h[k], heat[k], salt[k], constants, work.buoyancy[k])
    pressure_force(h, work.buoyancy, constants, work.layer_pair, du, dv)
    for k in range(layers):
        fx, fy = work.flux_x[k], work.flux_y[k]
        hx, hy = work.thickness_x[k], work.thickness_y[k]
        mean_thickness(h[k], constants, hx, hy)
        volume_transport(h[k], hx, hy, u[k], v[k], constants, fx, fy)
        planetary_x(hx, fy, forcing.coriolis, constants, work.force_x[k])
        planetary_y(hx, hy, fx, forcing.coriolis, constants, work.force_y[k])
        du[k] += work.force_x[k]
        dv[k] += work.force_y[k]
        if constants.momentum_advection:
            advection(hx, u[k], v[k], fx, fy, constants, work.vorticity, work.kinetic, work.force_x[k], work.force_y[k])
            du[k] += work.force_x[k]
            dv[k] += work.force_y[k]
        ledger.limited_faces[0] += keep_thickness_positive(h[k], fx, fy, longest, constants, work.share)
        if k == 0:
            wind_acceleration(forcing.wind_x, hx, wind, du[k])
            wind_acceleration(forcing.wind_y, hy, wind, dv[k])
        friction(u[k], hx, constants, du[k])
        friction(v[k], hy, constants, dv[k])
        add_drag(u[k], forcing.drag_x, du[k])
        add_drag(v[k], forcing.drag_y, dv[k])
        content_tendency(
            h[k], heat[k], work, k, booked, constants, ledger.heat_advection_x[k], ledger.heat_advection_y[k],
            ledger.heat_mixing_x[k], ledger.heat_mixing_y[k], dheat[k],
        )  # fmt: skip
        if constants.salty:
            content_tendency(
                h[k], salt[k], work, k, booked, constants, ledger.salt_advection_x[k], ledger.salt_advection_y[k],
                ledger.salt_mixing_x[k], ledger.salt_mixing_y[k], dsalt[k],
            )  # fmt: skip
        book(ledger.volume_x[k], ledger.volume_y[k], fx, fy, booked)
        dh[k, :, :] = 0.0
        transport_step(dh[k], fx, fy, 1.0, constants)


@kernel
def fill_edges(state: State, constants: Constants) -> None:
    """Ghost cells of all five fields."""
    periodic = constants.periodic_x
    for k in range(state.thickness.shape[0]):
        fill_centre_edges(state.thickness[k], periodic)
        fill_centre_edges(state.heat[k], periodic)
        fill_centre_edges(state.salt[k], periodic)
        fill_x_face_edges(state.velocity_x[k], periodic, constants.tangential_sign)
        fill_y_face_edges(state.velocity_y[k], periodic, constants.tangential_sign)


@kernel
def combine(base: Array, stages: Array, weights: Array, dt: float, out: Array) -> None:
    """out = base + dt sum_s weights_s stages_s; base, out (L, ny+4, nx+4), stages (s, L, ny+4, nx+4)."""
    out[:] = base
    for s in range(len(weights)):
        if weights[s] != 0.0:
            out += dt * weights[s] * stages[s]


@kernel
def advance_runge_kutta(
    state: State,
    stages: Stages,
    tableau: Tableau,
    forcing: Forcing,
    constants: Constants,
    ledger: Ledger,
    work: Workspace,
    start_time: float,
    dt: float,
    steps: int,
) -> None:
    """Take ``steps`` steps of ``dt`` seconds in place; ``start_time`` [s] is the model time of the state."""
    stage = stages.stage
    count = len(tableau.b)
    for n in range(steps):
        time = start_time + n * dt
        for s in range(count):
            combine(state.thickness, stages.thickness, tableau.a[s], dt, stage.thickness)
            combine(state.heat, stages.heat, tableau.a[s], dt, stage.heat)
            combine(state.salt, stages.salt, tableau.a[s], dt, stage.salt)
            combine(state.velocity_x, stages.velocity_x, tableau.a[s], dt, stage.velocity_x)
            combine(state.velocity_y, stages.velocity_y, tableau.a[s], dt, stage.velocity_y)
            fill_edges(stage, constants)
            wind = wind_fraction(time + tableau.c[s] * dt, constants)
            tendency(
                stage, forcing, constants, wind, dt, tableau.b[s] * dt, ledger, work,
                stages.thickness[s], stages.heat[s], stages.salt[s], stages.velocity_x[s], stages.velocity_y[s],
            )  # fmt: skip
        combine(state.thickness, stages.thickness, tableau.b, dt, state.thickness)
        combine(state.heat, stages.heat, tableau.b, dt, state.heat)
        combine(state.salt, stages.salt, tableau.b, dt, state.salt)
        combine(state.velocity_x, stages.velocity_x, tableau.b, dt, state.velocity_x)
        combine(state.velocity_y, stages.velocity_y, tableau.b, dt, state.velocity_y)
        fill_edges(state, constants)
        wind = wind_fraction(time + 0.5 * dt, constants)
        exchange(
            state.thickness[0], state.heat[0], state.salt[0], state.velocity_x[0], state.velocity_y[0],
            forcing, constants, wind, dt, ledger, work.mixed_x, work.mixed_y, work.gain[0],
        )  # fmt: skip
        fill_centre_edges(state.thickness[0], constants.periodic_x)
        mean_thickness(state.thickness[0], constants, work.thickness_x[0], work.thickness_y[0])
        dilute_momentum(
            state.velocity_x[0], state.velocity_y[0], work.thickness_x[0], work.thickness_y[0], work.gain[0], constants
        )
        fill_edges(state, constants)
