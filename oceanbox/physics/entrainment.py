"""Making warm water: how much abyssal water each closure draws into a column in one step.

Each closure is integrated exactly over the step with its rate frozen, so none can overshoot at any step length.
"""

import math

import numpy as np
from numpy.typing import NDArray

from oceanbox.compiling import kernel
from oceanbox.physics.elementary import decay, log_of_one_plus
from oceanbox.physics.rows import place
from oceanbox.physics.state import Constants

__all__ = ["diffusive_gain", "mixed_layer_transport", "shoaling_gain", "upwelling_gain"]

Array = NDArray[np.float64]


@kernel
def mixed_layer_transport(
    first: int, end: int, h: Array, u: Array, v: Array, shear_x: Array, shear_y: Array, wind: float, constants: Constants,
    Mx: Array, My: Array,
) -> None:  # fmt: skip
    """Transport of the surface mixed layer, M = H_m u + (H_m - H_m^2/h) u_s, m2 s-1, on x faces (Mx) and y faces (My).

    The mixed layer is never deeper than the layer: where h < H_m it is the whole layer and has no shear of its own.
    u_s solves r_s u_s - f v_s = tau_x/(rho0 H_m), r_s v_s + f u_s = tau_y/(rho0 H_m) (Zebiak and Cane 1987, Mon. Wea.
    Rev. 115, 2262); ``wind`` is the fraction of the stress that acts now.  ``Mx`` and ``My`` are belts (`physics.rows`).
    """
    columns = h.shape[1]
    depth = constants.mixed_depth
    for j in range(first, end):
        here = place(j, Mx.shape[0])
        for n in range(columns - 3):
            i = n + 2
            hx = 0.5 * (h[j, i - 1] + h[j, i])
            hy = 0.5 * (h[j - 1, i] + h[j, i])
            shared_x = min(depth, hx)
            shared_y = min(depth, hy)
            Mx[here, i] = shared_x * u[j, i] + (shared_x - shared_x * shared_x / hx) * wind * shear_x[j, i]
            My[here, i] = shared_y * v[j, i] + (shared_y - shared_y * shared_y / hy) * wind * shear_y[j, i]


@kernel
def upwelling_gain(h: float, upwelling: float, dt: float, constants: Constants) -> float:
    """h_t = phi(h) max(w_up, 0), phi = exp(-(h - H_m)/l) for h > H_m, else 1; the gain over ``dt``, m.

    In the deep part the solution is h + l ln(1 + phi w_up dt/l).
    """
    length = constants.half_thickness
    up = max(upwelling, 0.0) * dt
    inside = max(constants.mixed_depth - h, 0.0)
    share = decay(max(h - constants.mixed_depth, 0.0) * (1.0 / length))
    deep = length * log_of_one_plus(share * max(up - inside, 0.0) * (1.0 / length))
    return min(up, inside) + deep


@kernel
def diffusive_gain(h: float, dt: float, constants: Constants) -> float:
    """h_t = kappa_v/h, so h^2 grows by 2 kappa_v dt; the gain over ``dt``, m (written without cancellation)."""
    growth = 2.0 * constants.diapycnal_diffusivity * dt
    return growth / (h + math.sqrt(h * h + growth))


@kernel
def shoaling_gain(h: float, dt: float, constants: Constants) -> float:
    """h_t = (h_min - h)^2/(t_e h_min) where h < h_min; the gap closes as gap/(1 + gap dt/(t_e h_min)); the gain, m."""
    gap = constants.shoaling_depth - h
    if gap <= 0.0:
        return 0.0
    x = gap * dt / (constants.shoaling_time * constants.shoaling_depth)
    return gap * x / (1.0 + x)
