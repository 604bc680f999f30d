"""Columns exchanging with air and abyss, and the momentum they dilute, in plain NumPy: a part of `numpy_step`."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from oceanbox.physics.state import Constants, Forcing, Ledger
from tests.benchmarks.numpy_places import cells, fill_centres, fill_x_faces, fill_y_faces, x_faces, y_faces

__all__ = ["dilute_momentum", "exchange"]

Array = NDArray[np.float64]


def mean_of_decay(z: Array) -> Array:
    """(1 - exp(-z))/z, by its series near 0."""
    series = 1.0 - z * (0.5 - z * (1.0 / 6.0 - z * (1.0 / 24.0 - z * (1.0 / 120.0 - z / 720.0))))
    return np.where(z < 0.01, series, -np.expm1(-z) / np.maximum(z, 0.01))


def mean_of_dilution(x: Array) -> Array:
    """ln(1 + x)/x, by its series near 0."""
    series = 1.0 - x * (0.5 - x * (1.0 / 3.0 - x * (0.25 - x * 0.2)))
    return np.where(x < 1e-3, series, np.log1p(x) / np.maximum(x, 1e-3))


def buoyancy(theta: Array, constants: Constants) -> Array:
    """b of unsalted water."""
    return constants.gravity * (constants.expansion_abyss + 0.5 * constants.expansion_slope * theta) * theta


def outcrop_share(theta: Array, b: Array, constants: Constants) -> Array:
    """1 away from the outcrop, 0 at it."""
    margin = constants.outcrop_margin
    x = np.minimum(theta / margin, b / (constants.gravity * constants.expansion_abyss * margin))
    x = np.clip(x, 0.0, 1.0)
    return x * x * (3.0 - 2.0 * x)


def entrain(
    h: Array, u: Array, v: Array, forcing: Forcing, constants: Constants, wind: float, dt: float, ledger: Ledger
) -> Array:
    """Water entrained in interior cells, m: prescribed, upwelling and shoaling, each booked."""
    depth = constants.mixed_depth
    hx = 0.5 * (x_faces(h, 0, -1) + x_faces(h))
    shared = np.minimum(depth, hx)
    Mx = shared * x_faces(u) + (shared - shared * shared / hx) * wind * x_faces(forcing.shear_x)
    hy = 0.5 * (y_faces(h, -1, 0) + y_faces(h))
    shared = np.minimum(depth, hy)
    My = shared * y_faces(v) + (shared - shared * shared / hy) * wind * y_faces(forcing.shear_y)

    prescribed = cells(forcing.prescribed_entrainment) * dt
    upwelling = (Mx[:, 1:] - Mx[:, :-1]) / constants.dx + (My[1:] - My[:-1]) / constants.dy
    lifted = np.maximum(upwelling, 0.0) * dt
    length = constants.half_thickness
    inside = np.maximum(depth - cells(h), 0.0)
    share = np.exp(-np.maximum(cells(h) - depth, 0.0) / length)
    up = np.minimum(lifted, inside) + length * np.log1p(share * np.maximum(lifted - inside, 0.0) / length)
    gap = np.maximum(constants.shoaling_depth - cells(h), 0.0)
    x = gap * dt / (constants.shoaling_time * constants.shoaling_depth)
    kept = gap * x / (1.0 + x)
    cells(ledger.entrainment_prescribed)[...] += prescribed
    cells(ledger.entrainment_upwelling)[...] += up
    cells(ledger.entrainment_shoaling)[...] += kept
    return prescribed + up + kept


def surface_heating(h: Array, theta: Array, gain: Array, forcing: Forcing, dt: float) -> Array:
    """Heat the surface gives each column in one exchange, K m."""
    k, F, target = (
        cells(field) for field in (forcing.restoring_velocity, forcing.prescribed_heating, forcing.target_anomaly)
    )
    w = gain / dt
    dilution = dt / h * mean_of_dilution(gain / h)
    change = (F + k * target - (w + k) * theta) * dilution * mean_of_decay((w + k) * dilution)
    return (h + gain) * change + gain * theta


def transformed(h: Array, theta: Array, b: Array, heat: Array, heating: Array, constants: Constants) -> Array:
    """Thickness turned into abyssal water where the surface cools."""
    loss = constants.gravity * (constants.expansion_abyss + constants.expansion_slope * theta) * heating
    possible = (loss < 0.0) & (b > 0.0) & (heat > 0.0)
    efficiency = constants.efficiency
    if constants.efficiency_scale < np.inf:
        efficiency = efficiency * np.exp(-theta / constants.efficiency_scale)
    wanted = np.minimum(-efficiency * loss / np.where(possible, b, 1.0), -heating * h / np.where(possible, heat, 1.0))
    return np.where(possible, np.maximum(np.minimum(wanted, h - constants.floor_depth), 0.0), 0.0)


def outcrop(h: Array, heat: Array, dt: float, constants: Constants, ledger: Ledger) -> tuple[Array, Array]:
    """Thickness and heat after columns near the outcrop handed over to the abyss."""
    theta = heat / h
    b = buoyancy(theta, constants)
    # Away from the outcrop the share is exactly 1 and nothing is given.
    given = (1.0 - outcrop_share(theta, b, constants)) * dt / (constants.outcrop_time + dt)
    handed = given * np.maximum(h - constants.floor_depth, 0.0)
    swapped = np.where(b < 0.0, given * (h - handed), 0.0)
    lost = (handed + swapped) * theta
    cells(ledger.outcrop_volume)[...] -= handed
    cells(ledger.outcrop_heat)[...] -= lost
    return h - handed, heat - lost


def exchange(
    h: Array, heat: Array, u: Array, v: Array, forcing: Forcing, constants: Constants, wind: float, dt: float,
    ledger: Ledger,
) -> Array:  # fmt: skip
    """Entrainment, surface fluxes, transformation and outcrop, applied in place; the water entrained, (ny, nx), m."""
    gain = entrain(h, u, v, forcing, constants, wind, dt, ledger)
    before = cells(heat)
    theta = before / cells(h)
    b = buoyancy(theta, constants)
    wanted = surface_heating(cells(h), theta, gain, forcing, dt)
    cooled = wanted < 0.0
    applied = np.maximum(wanted * outcrop_share(theta, b, constants), -np.maximum(before, 0.0))
    heating = np.where(cooled, applied, wanted)
    prescribed = cells(forcing.prescribed_heating) * dt
    prescribed = np.where(cooled, prescribed * heating / np.where(cooled, wanted, 1.0), prescribed)
    thickness = cells(h) + gain
    destroyed = np.where(cooled, transformed(thickness, theta, b, before, heating, constants), 0.0)
    cells(ledger.heat_prescribed)[...] += prescribed
    cells(ledger.heat_restoring)[...] += heating - prescribed
    cells(ledger.transformation)[...] -= destroyed
    cells(h)[...], before[...] = outcrop(thickness - destroyed, before + heating, dt, constants, ledger)
    return gain


def dilute_momentum(u: Array, v: Array, hx: Array, hy: Array, gain: Array, constants: Constants) -> None:
    """u /= 1 + <gain>/h on faces: entrained water comes in at rest."""
    wide = np.empty_like(u)
    cells(wide)[...] = gain
    fill_centres(wide)
    cells(u)[...] /= 1.0 + 0.5 * (cells(wide) + cells(wide, 0, -1)) / cells(hx)
    cells(v)[...] /= 1.0 + 0.5 * (cells(wide) + cells(wide, -1, 0)) / cells(hy)
    fill_x_faces(u, constants.tangential_sign)
    fill_y_faces(v, constants.tangential_sign)
