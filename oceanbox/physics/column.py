"""One column exchanging heat, fresh water and volume with the air and the abyss over one step.

Order: water is entrained while the surface heats or cools the column (integrated exactly, together), then buoyancy loss
destroys volume, then an outcropped column hands itself to the abyss.  What each part did is returned as an amount, so the
books are exact whatever the step.
"""

import math

from oceanbox.compiling import kernel
from oceanbox.physics.buoyancy import thermal_expansion
from oceanbox.physics.state import Constants

__all__ = ["outcrop_share", "surface_heating", "transformed_thickness"]


@kernel
def mean_of_decay(z: float) -> float:
    """(1 - exp(-z))/z for z >= 0, to round-off also at 0 (the series ends below 1e-15 for z < 0.01)."""
    if z < 0.01:
        return 1.0 - z * (0.5 - z * (1.0 / 6.0 - z * (1.0 / 24.0 - z * (1.0 / 120.0 - z / 720.0))))
    return -math.expm1(-z) / z


@kernel
def mean_of_dilution(x: float) -> float:
    """ln(1 + x)/x for x >= 0, to round-off also at 0 (the series ends below 1e-16 for x < 0.001)."""
    if x < 1e-3:
        return 1.0 - x * (0.5 - x * (1.0 / 3.0 - x * (0.25 - x * 0.2)))
    return math.log1p(x) / x


@kernel
def surface_heating(
    h: float,
    per_h: float,
    theta: float,
    entrained: float,
    prescribed: float,
    restoring: float,
    target: float,
    dt: float,
) -> float:
    """Heat the surface gives the column in one step, K m: Int Q/(rho0 c_p) dt.

    The column obeys h_t = w, (h Theta)_t = F + k (Theta* - Theta), with w = ``entrained``/dt, F = ``prescribed`` and
    k = ``restoring`` frozen (``per_h`` is 1/h), hence h Theta_t = F + k Theta* - (w + k) Theta, whose solution is

        Theta(dt) - Theta = [F + k Theta* - (w + k) Theta] G (1 - e^-z)/z,  G = ln(1 + w dt/h)/w,  z = (w + k) G.

    A slab and an upwelling column are exact at any step, and Theta never passes its equilibrium.
    """
    w = entrained / dt
    dilution = dt * per_h * mean_of_dilution(entrained * per_h)
    z = (w + restoring) * dilution
    change = (prescribed + restoring * target - (w + restoring) * theta) * dilution * mean_of_decay(z)
    return (h + entrained) * change + entrained * theta


@kernel
def outcrop_share(theta: float, b: float, constants: Constants) -> float:
    """How far a column still is a warm layer: 1 away from the outcrop, falling smoothly to 0 as Theta or b reaches 0.

    x^2 (3 - 2 x) of x = min(Theta/Theta_o, b/b_o), b_o = g alpha_a Theta_o.
    """
    margin = constants.outcrop_margin
    if margin == 0.0:
        return 1.0
    x = min(theta / margin, b / (constants.gravity * constants.expansion_abyss * margin))
    x = min(max(x, 0.0), 1.0)
    return x * x * (3.0 - 2.0 * x)


@kernel
def transformed_thickness(
    h: float, theta: float, b: float, heat: float, heating: float, freshening: float, constants: Constants
) -> float:
    """Volume turned into abyssal water in one step, m: w_d dt = -epsilon B dt/b where the surface loses buoyancy B.

    B dt = g (alpha ``heating`` + beta_S ``freshening``) (Walin 1982, Tellus 34, 187, extended to density).  ``h`` is the
    thickness after entrainment and ``heat`` what it holds, K m; ``theta`` and ``b`` are those before the step; ``heating``
    is negative.  Limited so that

      (i)  h stays above the floor,
      (ii) the heat needed to make abyssal water of it, Theta w_d dt, is at most what the air took.
    """
    loss = constants.gravity * (thermal_expansion(theta, constants) * heating + constants.contraction * freshening)
    if loss >= 0.0 or b <= 0.0 or heat <= 0.0 or constants.efficiency == 0.0:
        return 0.0
    efficiency = constants.efficiency
    if constants.efficiency_scale < math.inf:
        efficiency *= math.exp(-theta / constants.efficiency_scale)
    thickness = min(-efficiency * loss / b, -heating * h / heat)
    return max(min(thickness, h - constants.floor_depth), 0.0)
