"""Every column of the top layer exchanges with air and abyss; the ledger books what happened."""

import numpy as np
from numpy.typing import NDArray

from oceanbox.compiling import kernel
from oceanbox.grid.edges import fill_centre_edges, fill_x_face_edges, fill_y_face_edges
from oceanbox.physics.buoyancy import buoyancy
from oceanbox.physics.column import outcrop_share, surface_heating, transformed_thickness
from oceanbox.physics.entrainment import diffusive_gain, mixed_layer_transport, shoaling_gain, upwelling_gain
from oceanbox.physics.state import Constants, Forcing, Ledger

__all__ = ["dilute_momentum", "exchange"]

Array = NDArray[np.float64]


@kernel
def entrain(
    h: Array, Mx: Array, My: Array, forcing: Forcing, constants: Constants, dt: float, ledger: Ledger, gain: Array
) -> None:
    """``gain`` = water entrained in this step, m: the sum of the closures, each booked under its name."""
    rows, columns = h.shape
    per_dx = 1.0 / constants.dx
    per_dy = 1.0 / constants.dy
    for j in range(2, rows - 2):
        for n in range(columns - 4):
            i = n + 2
            prescribed = forcing.prescribed_entrainment[j, i] * dt
            ledger.entrainment_prescribed[j, i] += prescribed
            gain[j, i] = prescribed
    if constants.mixed_depth > 0.0:
        for j in range(2, rows - 2):
            for n in range(columns - 4):
                i = n + 2
                upwelling = (Mx[j, i + 1] - Mx[j, i]) * per_dx + (My[j + 1, i] - My[j, i]) * per_dy
                up = upwelling_gain(h[j, i], upwelling, dt, constants)
                ledger.entrainment_upwelling[j, i] += up
                gain[j, i] += up
    if constants.diapycnal_diffusivity > 0.0:
        for j in range(2, rows - 2):
            for n in range(columns - 4):
                i = n + 2
                diffused = diffusive_gain(h[j, i], dt, constants)
                ledger.entrainment_diffusive[j, i] += diffused
                gain[j, i] += diffused
    if constants.shoaling_depth > 0.0:
        for j in range(2, rows - 2):
            for n in range(columns - 4):
                i = n + 2
                kept = shoaling_gain(h[j, i], dt, constants)
                ledger.entrainment_shoaling[j, i] += kept
                gain[j, i] += kept


@kernel
def exchange(
    h: Array,
    heat: Array,
    salt: Array,
    u: Array,
    v: Array,
    forcing: Forcing,
    constants: Constants,
    wind: float,
    dt: float,
    ledger: Ledger,
    Mx: Array,
    My: Array,
    gain: Array,
) -> None:
    """Entrainment, surface fluxes, transformation and outcrop of one step, applied to the top layer.

        h     += w_e dt - w_d dt + outcrop
        heat  += Int Q/(rho0 c_p) dt - outcrop (Theta)
        salt  -= S_ref (P - E) dt + w_d Sigma dt + outcrop (Sigma)

    All arrays (ny+4, nx+4), interior cells changed; ``gain`` is left holding w_e dt for `dilute_momentum`.
    """
    rows, columns = h.shape
    if constants.mixed_depth > 0.0:
        # Water has moved since the edges were filled, and a channel's seam needs both its neighbours.
        fill_centre_edges(h, constants.periodic_x)
        mixed_layer_transport(h, u, v, forcing.shear_x, forcing.shear_y, wind, constants, Mx, My)
    entrain(h, Mx, My, forcing, constants, dt, ledger, gain)
    handing_over = dt / (constants.outcrop_time + dt)
    outcrop_buoyancy = constants.gravity * constants.expansion_abyss * constants.outcrop_margin
    for j in range(2, rows - 2):
        for n in range(columns - 4):
            i = n + 2
            h0 = h[j, i]
            per_h = 1.0 / h0
            h1 = h0 + gain[j, i]
            theta = heat[j, i] * per_h
            sigma = salt[j, i] * per_h
            b = buoyancy(theta, sigma, constants)
            F = forcing.prescribed_heating[j, i]
            heating = surface_heating(
                h0, per_h, theta, gain[j, i], F, forcing.restoring_velocity[j, i], forcing.target_anomaly[j, i], dt
            )
            prescribed = F * dt
            freshening = forcing.freshening[j, i] * dt
            s1 = salt[j, i] - freshening
            destroyed = 0.0
            carried = 0.0
            if heating < 0.0:
                # Loss fades at the outcrop, and cannot take heat that is not there: what was applied is what is booked.
                wanted = heating
                heating = max(heating * outcrop_share(theta, b, constants), -max(heat[j, i], 0.0))
                prescribed *= heating / wanted
                destroyed = transformed_thickness(h1, theta, b, heat[j, i], heating, freshening, constants)
                if constants.salt_carried:
                    carried = destroyed * s1 / h1
                    s1 -= carried
            q1 = heat[j, i] + heating
            h1 -= destroyed
            ledger.heat_prescribed[j, i] += prescribed
            ledger.heat_restoring[j, i] += heating - prescribed
            ledger.virtual_salt[j, i] -= freshening
            ledger.transformation[j, i] -= destroyed
            ledger.transformation_salt[j, i] -= carried
            per_h = 1.0 / h1
            theta = q1 * per_h
            sigma = s1 * per_h
            b = buoyancy(theta, sigma, constants)
            if theta < constants.outcrop_margin or b < outcrop_buoyancy:
                given = (1.0 - outcrop_share(theta, b, constants)) * handing_over
                handed = given * max(h1 - constants.floor_depth, 0.0)
                # A column denser than the abyss overturns: it swaps water with it besides handing some over.
                swapped = given * (h1 - handed) if b < 0.0 else 0.0
                h1 -= handed
                q1 -= (handed + swapped) * theta
                s1 -= (handed + swapped) * sigma
                ledger.outcrop_volume[j, i] -= handed
                ledger.outcrop_heat[j, i] -= (handed + swapped) * theta
                ledger.outcrop_salt[j, i] -= (handed + swapped) * sigma
            h[j, i] = h1
            heat[j, i] = q1
            salt[j, i] = s1


@kernel
def dilute_momentum(u: Array, v: Array, hx: Array, hy: Array, gain: Array, constants: Constants) -> None:
    """u /= 1 + <w_e dt>/h on faces, h after the exchange: entrained water comes in at rest.

    h u is kept to (w_e dt/h)^2; the implicit form cannot turn a current round, however much is entrained.  ``gain`` is w_e dt
    at centres; its edges are filled.
    """
    if constants.linear_depth > 0.0:
        return
    fill_centre_edges(gain, constants.periodic_x)
    rows, columns = u.shape
    for j in range(2, rows - 2):
        for n in range(columns - 4):
            i = n + 2
            u[j, i] /= 1.0 + 0.5 * (gain[j, i] + gain[j, i - 1]) / hx[j, i]
            v[j, i] /= 1.0 + 0.5 * (gain[j, i] + gain[j - 1, i]) / hy[j, i]
    fill_x_face_edges(u, constants.periodic_x, constants.tangential_sign)
    fill_y_face_edges(v, constants.periodic_x, constants.tangential_sign)
