"""One column exchanging heat, fresh water and volume with the air and the abyss over one step.

Order: water is entrained while the surface heats or cools the column (integrated exactly, together), then buoyancy loss
destroys volume, then an outcropped column hands itself to the abyss.  What each part did is returned as an amount, so the
books are exact whatever the step.
"""

from oceanbox.compiling import kernel
from oceanbox.physics.buoyancy import thermal_expansion
from oceanbox.physics.elementary import decay, mean_of_decay, mean_of_dilution
from oceanbox.physics.state import Constants

__all__ = ["outcrop_share", "surface_heating", "transformed_thickness"]


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
    w = entrained * (1.0 / dt)
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
    x = min(theta * (1.0 / margin), b * (1.0 / (constants.gravity * constants.expansion_abyss * margin)))
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
    losing = loss < 0.0 and b > 0.0 and heat > 0.0
    # The exponent of a constant efficiency is 0.  Where nothing is lost the quotients mean nothing.
    efficiency = constants.efficiency * decay(max(theta, 0.0) * (1.0 / constants.efficiency_scale))
    thickness = min(-efficiency * loss / (b if losing else 1.0), -heating * h / (heat if losing else 1.0))
    return max(min(thickness, h - constants.floor_depth), 0.0) if losing else 0.0
