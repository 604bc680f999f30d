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
from oceanbox.grid.edges import fill_centre_edges
from oceanbox.physics.continuity import limit_outflow, mean_thickness, outflow_share, transport_x, transport_y
from oceanbox.physics.entrainment import mixed_layer_transport
from oceanbox.physics.exchange import dilute_momentum, exchange
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
    h: Array, c: Array, work: Workspace, k: int, booked: float, constants: Constants,
    advection_x: Array, advection_y: Array, mixing_x: Array, mixing_y: Array, out: Array,
) -> None:  # fmt: skip
    """out = -div(U c) + div(kappa_h h grad c) for one content of one layer, booked over ``booked`` seconds."""
    rows = h.shape[0]
    per_h, tx, ty = work.per_thickness[k], work.tracer_x[k], work.tracer_y[k]
    tracer_flux(
        2, rows - 1, h, per_h, c, work.flux_x[k], work.flux_y[k], 0.0, booked, constants,
        advection_x, advection_y, mixing_x, mixing_y, tx, ty,
    )  # fmt: skip
    out[:, :] = 0.0
    transport_step(2, rows - 2, out, tx, ty, 1.0, constants)


@kernel
def add_drag(u: Array, rate: Array, du: Array) -> None:
    """du -= r u in interior cells."""
    rows, columns = u.shape
    for j in range(2, rows - 2):
        for n in range(columns - 4):
            i = n + 2
            du[j, i] -= rate[j, i] * u[j, i]


@kernel
def momentum_tendency(
    state: State, k: int, forcing: Forcing, constants: Constants, wind: float, work: Workspace, du: Array, dv: Array
) -> None:
    """du, dv += advection, rotation, friction, wind and drag on layer ``k``; its transports are in ``work``."""
    u, v = state.velocity_x[k], state.velocity_y[k]
    last = u.shape[0] - 1
    fx, fy, hx, hy = work.flux_x[k], work.flux_y[k], work.thickness_x[k], work.thickness_y[k]
    force_x, force_y, turned = work.force_x[k], work.force_y[k], work.turned[k]
    friction(2, last - 1, u, v, hx, hy, constants, force_x, force_y)
    corner_terms(2, last, hx, u, v, fy, forcing.coriolis, constants, work.vorticity[k], turned)
    planetary_x(2, last - 1, hx, turned, fy, forcing.coriolis, constants, force_x)
    planetary_y(3, last - 1, hx, hy, fx, forcing.coriolis, constants, turned, force_y)
    du += force_x
    dv += force_y
    if constants.momentum_advection:
        kinetic_energy(1, last, u, v, work.kinetic[k])
        advection(2, last - 1, work.vorticity[k], work.kinetic[k], fx, fy, constants, force_x, force_y)
        du += force_x
        dv += force_y
    if k == 0:
        wind_acceleration(forcing.wind_x, hx, wind, du)
        wind_acceleration(forcing.wind_y, hy, wind, dv)
    add_drag(u, forcing.drag_x, du)
    add_drag(v, forcing.drag_y, dv)


@kernel
def tendency(
    state: State, forcing: Forcing, constants: Constants, wind: float, longest: float, booked: float,
    ledger: Ledger, work: Workspace, dh: Array, dheat: Array, dsalt: Array, du: Array, dv: Array,
) -> None:  # fmt: skip
    """Time derivative of the state without column exchange, (L, ny+4, nx+4) each, zero in ghost cells.

    Edges of ``state`` must be filled.  ``longest`` [s] is the step for which thickness must stay positive, ``booked`` [s] the
    time over which the ledger counts these fluxes.  The belts of ``work`` hold all rows.
    """
    h, heat, salt, u, v = state
    layers, rows, _ = h.shape
    layer_pressure(0, rows, h, heat, salt, constants, work.buoyancy, work.pressure, work.depth)
    for k in range(layers):
        fx, fy = work.flux_x[k], work.flux_y[k]
        hx, hy = work.thickness_x[k], work.thickness_y[k]
        pressure_forces(2, rows - 2, work.buoyancy[k], work.pressure[k], work.depth[k], constants, du[k], dv[k])
        mean_thickness(1, rows, h[k], constants, hx, hy)
        transport_x(2, rows - 1, h[k], hx, u[k], constants, fx)
        transport_y(2, rows - 1, h[k], hy, v[k], constants, fy)
        momentum_tendency(state, k, forcing, constants, wind, work, du[k], dv[k])
        concentration(0, rows, h[k], heat[k], work.per_thickness[k], work.temperature[k])
        concentration(0, rows, h[k], salt[k], work.per_thickness[k], work.salinity[k])
        if outflow_share(2, rows - 2, work.per_thickness[k], fx, fy, longest, constants, work.share[k]) > 0:
            ledger.limited_faces[0] += limit_outflow(2, rows - 1, rows, fx, fy, work.share[k])
        content_tendency(
            h[k], work.temperature[k], work, k, booked, constants, ledger.heat_advection_x[k], ledger.heat_advection_y[k],
            ledger.heat_mixing_x[k], ledger.heat_mixing_y[k], dheat[k],
        )  # fmt: skip
        if constants.salty:
            content_tendency(
                h[k], work.salinity[k], work, k, booked, constants, ledger.salt_advection_x[k], ledger.salt_advection_y[k],
                ledger.salt_mixing_x[k], ledger.salt_mixing_y[k], dsalt[k],
            )  # fmt: skip
        book(2, rows - 1, ledger.volume_x[k], ledger.volume_y[k], fx, fy, booked)
        dh[k, :, :] = 0.0
        transport_step(2, rows - 2, dh[k], fx, fy, 1.0, constants)


@kernel
def exchange_columns(
    state: State, forcing: Forcing, constants: Constants, wind: float, dt: float, ledger: Ledger, work: Workspace
) -> None:
    """The top layer exchanges with air and abyss; what comes in is at rest.  Edges of ``state`` must be filled."""
    h, u, v = state.thickness[0], state.velocity_x[0], state.velocity_y[0]
    last = h.shape[0] - 1
    Mx, My, gain = work.mixed_x[0], work.mixed_y[0], work.gain[0]
    if constants.mixed_depth > 0.0:
        mixed_layer_transport(2, last, h, u, v, forcing.shear_x, forcing.shear_y, wind, constants, Mx, My)
    exchange(
        2, last - 1, h, state.heat[0], state.salt[0], forcing, constants, dt, ledger, Mx, My, gain, work.heating[0]
    )
    fill_centre_edges(2, last - 1, h, constants.periodic_x)
    mean_thickness(1, last + 1, h, constants, work.thickness_x[0], work.thickness_y[0])
    dilute_momentum(2, last - 1, u, v, work.thickness_x[0], work.thickness_y[0], gain, constants)


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
        exchange_columns(state, forcing, constants, wind, dt, ledger, work)
        fill_edges(state, constants)
