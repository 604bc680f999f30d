"""Every column of the top layer exchanges with air and abyss; the ledger books what happened."""

import numpy as np
from numpy.typing import NDArray

from oceanbox.compiling import kernel
from oceanbox.physics.buoyancy import buoyancy
from oceanbox.physics.column import outcrop_share, surface_heating, transformed_thickness
from oceanbox.physics.entrainment import diffusive_gain, shoaling_gain, upwelling_gain
from oceanbox.physics.rows import place
from oceanbox.physics.state import Constants, Forcing, Ledger

__all__ = ["dilute_momentum", "exchange"]

Array = NDArray[np.float64]


@kernel
def entrain(
    first: int, end: int, h: Array, Mx: Array, My: Array, forcing: Forcing, constants: Constants, dt: float, ledger: Ledger,
    gain: Array,
) -> None:  # fmt: skip
    """``gain`` = water entrained in this step, m: the sum of the closures, each booked under its name."""
    columns = h.shape[1]
    belt = gain.shape[0]
    per_dx = 1.0 / constants.dx
    per_dy = 1.0 / constants.dy
    for j in range(first, end):
        here, north = place(j, belt), place(j + 1, belt)
        for n in range(columns - 4):
            i = n + 2
            prescribed = forcing.prescribed_entrainment[j, i] * dt
            ledger.entrainment_prescribed[j, i] += prescribed
            gain[here, i] = prescribed
        if constants.mixed_depth > 0.0:
            for n in range(columns - 4):
                i = n + 2
                upwelling = (Mx[here, i + 1] - Mx[here, i]) * per_dx + (My[north, i] - My[here, i]) * per_dy
                up = upwelling_gain(h[j, i], upwelling, dt, constants)
                ledger.entrainment_upwelling[j, i] += up
                gain[here, i] += up
        if constants.diapycnal_diffusivity > 0.0:
            for n in range(columns - 4):
                i = n + 2
                diffused = diffusive_gain(h[j, i], dt, constants)
                ledger.entrainment_diffusive[j, i] += diffused
                gain[here, i] += diffused
        if constants.shoaling_depth > 0.0:
            for n in range(columns - 4):
                i = n + 2
                kept = shoaling_gain(h[j, i], dt, constants)
                ledger.entrainment_shoaling[j, i] += kept
                gain[here, i] += kept


@kernel
def warm(first: int, end: int, h: Array, heat: Array, gain: Array, forcing: Forcing, dt: float, heating: Array) -> None:
    """``heating`` = heat the surface would give each column if all of it were warm layer, K m; ``gain`` is taken in meanwhile."""
    for j in range(first, end):
        here = place(j, gain.shape[0])
        for n in range(h.shape[1] - 4):
            i = n + 2
            per_h = 1.0 / h[j, i]
            heating[here, i] = surface_heating(
                h[j, i], per_h, heat[j, i] * per_h, gain[here, i], forcing.prescribed_heating[j, i],
                forcing.restoring_velocity[j, i], forcing.target_anomaly[j, i], dt,
            )  # fmt: skip


@kernel
def transform(
    first: int, end: int, h: Array, heat: Array, salt: Array, gain: Array, forcing: Forcing, constants: Constants,
    dt: float, ledger: Ledger, heating: Array,
) -> None:  # fmt: skip
    """h += w_e dt - w_d dt, heat += heating, salt -= S_ref (P - E) dt + w_d Sigma dt, where loss fades at the outcrop."""
    for j in range(first, end):
        here = place(j, gain.shape[0])
        for n in range(h.shape[1] - 4):
            i = n + 2
            q0, wanted = heat[j, i], heating[here, i]
            per_h = 1.0 / h[j, i]
            h1 = h[j, i] + gain[here, i]
            theta = q0 * per_h
            b = buoyancy(theta, salt[j, i] * per_h, constants)
            freshening = forcing.freshening[j, i] * dt
            s1 = salt[j, i] - freshening
            # Loss fades at the outcrop, and cannot take heat that is not there: what was applied is what is booked.
            cooling = wanted < 0.0
            possible = max(wanted * outcrop_share(theta, b, constants), -max(q0, 0.0))
            given = possible if cooling else wanted
            prescribed = forcing.prescribed_heating[j, i] * dt * (possible / wanted if cooling else 1.0)
            lost = transformed_thickness(h1, theta, b, q0, given, freshening, constants)
            destroyed = lost if cooling else 0.0
            carried = destroyed * s1 / h1 if constants.salt_carried else 0.0
            ledger.heat_prescribed[j, i] += prescribed
            ledger.heat_restoring[j, i] += given - prescribed
            ledger.virtual_salt[j, i] -= freshening
            ledger.transformation[j, i] -= destroyed
            ledger.transformation_salt[j, i] -= carried
            h[j, i] = h1 - destroyed
            heat[j, i] = q0 + given
            salt[j, i] = s1 - carried


@kernel
def outcrop(
    first: int, end: int, h: Array, heat: Array, salt: Array, constants: Constants, dt: float, ledger: Ledger
) -> None:
    """Columns that have nearly become abyss hand themselves over: h, heat and salt lose the same share of what they hold."""
    handing_over = dt / (constants.outcrop_time + dt)
    for j in range(first, end):
        for n in range(h.shape[1] - 4):
            i = n + 2
            per_h = 1.0 / h[j, i]
            theta = heat[j, i] * per_h
            sigma = salt[j, i] * per_h
            b = buoyancy(theta, sigma, constants)
            share = (1.0 - outcrop_share(theta, b, constants)) * handing_over
            handed = share * max(h[j, i] - constants.floor_depth, 0.0)
            # A column denser than the abyss overturns: it swaps water with it besides handing some over.
            swapped = share * (h[j, i] - handed) if b < 0.0 else 0.0
            h[j, i] -= handed
            heat[j, i] -= (handed + swapped) * theta
            salt[j, i] -= (handed + swapped) * sigma
            ledger.outcrop_volume[j, i] -= handed
            ledger.outcrop_heat[j, i] -= (handed + swapped) * theta
            ledger.outcrop_salt[j, i] -= (handed + swapped) * sigma


@kernel
def exchange(
    first: int, end: int, h: Array, heat: Array, salt: Array, forcing: Forcing, constants: Constants, dt: float,
    ledger: Ledger, Mx: Array, My: Array, gain: Array, heating: Array,
) -> None:  # fmt: skip
    """Entrainment, surface fluxes, transformation and outcrop of one step, applied to rows of the top layer.

        h     += w_e dt - w_d dt + outcrop
        heat  += Int Q/(rho0 c_p) dt - outcrop (Theta)
        salt  -= S_ref (P - E) dt + w_d Sigma dt + outcrop (Sigma)

    Interior cells are changed.  ``Mx`` and ``My`` hold the transport of the mixed layer on these rows and the one north of
    them (`entrainment.mixed_layer_transport`); ``gain`` is left holding w_e dt for `dilute_momentum`; ``heating`` is scratch:
    belts (`physics.rows`).
    """
    entrain(first, end, h, Mx, My, forcing, constants, dt, ledger, gain)
    warm(first, end, h, heat, gain, forcing, dt, heating)
    transform(first, end, h, heat, salt, gain, forcing, constants, dt, ledger, heating)
    if constants.outcrop_margin > 0.0:
        outcrop(first, end, h, heat, salt, constants, dt, ledger)


@kernel
def dilute_momentum(
    first: int, end: int, u: Array, v: Array, hx: Array, hy: Array, gain: Array, constants: Constants
) -> None:
    """u /= 1 + <w_e dt>/h on faces, h after the exchange: entrained water comes in at rest.

    h u is kept to (w_e dt/h)^2; the implicit form cannot turn a current round, however much is entrained.  ``gain`` is w_e dt
    at centres of these rows and the one south of them; ``hx``, ``hy`` and ``gain`` are belts (`physics.rows`).
    """
    if constants.linear_depth > 0.0:
        return
    nx = u.shape[1] - 4
    for j in range(first, end):
        here, south = place(j, gain.shape[0]), place(j - 1, gain.shape[0])
        gain[here, 1] = gain[here, nx + 1] if constants.periodic_x else gain[here, 2]
        for n in range(nx):
            i = n + 2
            u[j, i] /= 1.0 + 0.5 * (gain[here, i] + gain[here, i - 1]) / hx[here, i]
        if j > 2:  # on the southern wall there is no v, and no gain south of it
            for n in range(nx):
                i = n + 2
                v[j, i] /= 1.0 + 0.5 * (gain[here, i] + gain[south, i]) / hy[here, i]
