"""What a kernel is given: the state, the forcing, the constants and the books, as named tuples that compile.

Every array is a float64 compute array with two ghost cells on each side; ``L`` is the number of moving layers, top first.
"""

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from oceanbox.grid import Grid

__all__ = ["Constants", "Forcing", "Ledger", "State", "empty_ledger"]

Array = NDArray[np.float64]


class State(NamedTuple):
    """The prognostic fields, each (L, ny+4, nx+4).

    Heat and salt are carried as contents relative to the abyss, so that their budgets close to round-off.
    """

    thickness: Array  # h, centres, m
    heat: Array  # h (T - T_a), centres, K m
    salt: Array  # h (S - S_a), centres, g kg-1 m
    velocity_x: Array  # u, x faces, m s-1
    velocity_y: Array  # v, y faces, m s-1


class Forcing(NamedTuple):
    """Surface and body forcing of the top layer, each (ny+4, nx+4) unless said otherwise."""

    wind_x: Array  # tau_x / rho0, x faces, m2 s-2
    wind_y: Array  # tau_y / rho0, y faces, m2 s-2
    shear_x: Array  # u_s, Ekman shear velocity of the mixed layer, x faces, m s-1
    shear_y: Array  # v_s, y faces, m s-1
    prescribed_heating: Array  # Q / (rho0 c_p), centres, K m s-1
    restoring_velocity: Array  # lambda / (rho0 c_p), centres, m s-1
    target_anomaly: Array  # T* - T_a, centres, K
    freshening: Array  # S_ref (P - E), centres, g kg-1 m s-1
    prescribed_entrainment: Array  # w_e given as a map, centres, m s-1
    drag_x: Array  # linear drag rate, x faces, s-1
    drag_y: Array  # linear drag rate, y faces, s-1
    coriolis: Array  # f on corner rows, (ny+4,), s-1


class Constants(NamedTuple):
    """Numbers that stay the same through a run.  A closure that is off has its rate at zero or its scale at infinity."""

    dx: float  # m
    dy: float  # m
    periodic_x: bool
    tangential_sign: float  # +1 free slip, -1 no slip
    momentum_advection: bool
    salty: bool  # salt is carried along; False where every salinity is and stays that of the abyss
    linear_depth: float  # rest depth of linear dynamics, m; 0 for the full equations
    upwind_thickness: bool  # thickness on faces upwind biased rather than centred
    centred_tracers: bool  # tracers on faces centred, unlimited (for the energy identity)
    viscosity: float  # m2 s-1
    viscosity_on_transport: bool
    diffusivity: float  # lateral, m2 s-1
    wind_ramp: float  # the wind rises linearly over this time, s; 0 at once
    gravity: float  # m s-2
    expansion_abyss: float  # alpha at T_a, K-1
    expansion_slope: float  # d alpha / dT, K-2
    contraction: float  # beta_S, kg g-1
    mixed_depth: float  # H_m, m; 0 without the upwelling closure
    half_thickness: float  # l, m
    diapycnal_diffusivity: float  # kappa_v, m2 s-1
    shoaling_depth: float  # h_min of the shoaling closure, m; 0 off
    shoaling_time: float  # t_e, s
    efficiency: float  # epsilon at Theta = 0; 0 no transformation
    efficiency_scale: float  # Theta_s, K; infinite for a constant efficiency
    floor_depth: float  # transformation and outcrop leave this much, m
    salt_carried: bool  # destroyed water takes its salt anomaly to the abyss
    outcrop_margin: float  # Theta_o, K; 0 off
    outcrop_time: float  # t_o, s


class Ledger(NamedTuple):
    """What the steps since ``opened`` did, summed: amounts, not rates.

    Face terms are (L, ny+4, nx+4), positive eastward or northward.  Centre terms are (ny+4, nx+4), gains positive:
    volume in m, heat in K m, salt in g kg-1 m.
    """

    volume_x: Array  # sum of U dt, m2
    volume_y: Array
    heat_advection_x: Array  # sum of U Theta dt, K m2
    heat_advection_y: Array
    heat_mixing_x: Array  # sum of -kappa_h h Theta_x dt, K m2
    heat_mixing_y: Array
    salt_advection_x: Array  # g kg-1 m2
    salt_advection_y: Array
    salt_mixing_x: Array
    salt_mixing_y: Array
    entrainment_upwelling: Array
    entrainment_diffusive: Array
    entrainment_shoaling: Array
    entrainment_prescribed: Array
    transformation: Array
    outcrop_volume: Array
    heat_prescribed: Array
    heat_restoring: Array
    outcrop_heat: Array
    virtual_salt: Array
    transformation_salt: Array
    outcrop_salt: Array
    limited_faces: Array  # (1,): faces on which the positivity limiter acted


def empty_ledger(grid: Grid, layers: int) -> Ledger:
    """A ledger with every entry at zero."""
    face, centre = (layers, *grid.shape), grid.shape
    shapes = [face] * 10 + [centre] * 12 + [(1,)]
    return Ledger(*(np.zeros(shape) for shape in shapes))
