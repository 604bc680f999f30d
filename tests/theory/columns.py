r"""Single-column solutions: entrainment, advection against diffusion, and heating of a layer."""

from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[np.floating]

SEAWATER_HEAT_CAPACITY = 3991.868  # J kg-1 K-1, TEOS-10 (IOC, SCOR and IAPSO 2010), rounded


class UpwellingColumn(NamedTuple):
    """Temperature [degC] and surface heat gain [W m-2] of an upwelling column in balance."""

    temperature: float
    heat_gain: float


def diffusive_entrainment_thickness(time: ArrayLike, initial: float, diffusivity: float) -> Array:
    """h = sqrt(h0^2 + 2 kappa t) [m], which solves h_t = kappa / h; t [s] any shape, kappa [m2 s-1]. Derived."""
    return np.sqrt(initial**2 + 2.0 * diffusivity * np.asarray(time, dtype=float))


def upwelling_entrainment_thickness(
    time: ArrayLike, initial: float, upwelling: float, mixed_depth: float, half_thickness: float
) -> Array:
    """h(t) [m] of h_t = phi(h) w, phi = exp(-(h - Hm)/l) where h > Hm, else 1; derived.

    h = h0 + w t up to Hm, then h = Hm + l ln[exp((h1 - Hm)/l) + w (t - t1)/l], with (t1, h1) the later of the start
    and the arrival at Hm. t [s] any shape, w >= 0 [m s-1], Hm and l [m].
    """
    time = np.asarray(time, dtype=float)
    arrival = max(mixed_depth - initial, 0.0) / upwelling if upwelling > 0 else np.inf
    start = max(initial, mixed_depth)
    late = np.maximum(time - arrival, 0.0) if np.isfinite(arrival) else np.zeros_like(time)
    scaled = np.exp((start - mixed_depth) / half_thickness) + upwelling * late / half_thickness
    deep = mixed_depth + half_thickness * np.log(scaled)
    return np.where(time < arrival, initial + upwelling * time, deep)


def balanced_upwelling_thickness(
    upwelling: float, destruction: float, mixed_depth: float, half_thickness: float
) -> float:
    """h = Hm + l ln(w / w_d) [m], where phi(h) w equals the destruction 0 < w_d <= w [m s-1]; derived."""
    return float(mixed_depth + half_thickness * np.log(upwelling / destruction))


def advective_diffusive_scale(diffusivity: float, upwelling: float) -> float:
    """kappa / w [m], the e-fold scale of w T_z = kappa T_zz.

    Source: Munk (1966), Deep-Sea Res. 13, 707-730; textbook form from Stewart, Introduction to Physical
    Oceanography, chapter 8.
    """
    return diffusivity / upwelling


def advective_diffusive_slab(
    height: ArrayLike, thickness: float, bottom: float, top: float, diffusivity: float, upwelling: float
) -> Array:
    """T = Tb + (Tt - Tb) [exp(w z/kappa) - 1] / [exp(w D/kappa) - 1] [degC].

    z = `height` [m] above the bottom, any shape; D [m] slab; Tb, Tt [degC] at its ends; upward w [m s-1].
    Source: as advective_diffusive_scale, derived.
    """
    scale = advective_diffusive_scale(diffusivity, upwelling)
    share = np.expm1(np.asarray(height, dtype=float) / scale) / np.expm1(thickness / scale)
    return np.asarray(bottom + (top - bottom) * share)


def advective_thermocline_scale(coriolis: float, pumping: float, length: float, beta: float, gravity: float) -> float:
    """sqrt(f^2 W L / (beta g')) [m]. Source: textbook scaling (from memory)."""
    return float(np.sqrt(coriolis**2 * pumping * length / (beta * gravity)))


def diffusive_thermocline_scale(
    coriolis: float, diffusivity: float, length: float, beta: float, gravity: float
) -> float:
    """(kappa f^2 L / (beta g'))^(1/3) [m]. Source: textbook scaling (from memory)."""
    return float(np.cbrt(diffusivity * coriolis**2 * length / (beta * gravity)))


def restoring_time(
    thickness: float,
    coefficient: float,
    density: float = 1025.0,
    heat_capacity: float = SEAWATER_HEAT_CAPACITY,
) -> float:
    """rho0 c_p h / lambda [s], the e-fold time of a slab h [m] under lambda [W m-2 K-1].

    Source: Haney (1971), J. Phys. Oceanogr. 1, 241-248, for the flux lambda (T* - T).
    """
    return density * heat_capacity * thickness / coefficient


def restored_slab_temperature(time: ArrayLike, initial: float, target: float, restoring_time_s: float) -> Array:
    """T = T* + (T0 - T*) exp(-t / t_r) [degC]; t [s], any shape. Derived."""
    return np.asarray(target + (initial - target) * np.exp(-np.asarray(time, dtype=float) / restoring_time_s))


def upwelling_column(
    coefficient: float,
    target: float,
    deep: float,
    upwelling: float,
    density: float = 1025.0,
    heat_capacity: float = SEAWATER_HEAT_CAPACITY,
) -> UpwellingColumn:
    """T = (lambda T* + rho0 c_p w T_d) / (lambda + rho0 c_p w) and Q = lambda (T* - T) = rho0 c_p w (T - T_d).

    lambda [W m-2 K-1], T*, T_d [degC], w [m s-1]. Derived.
    """
    exchange = density * heat_capacity * upwelling
    temperature = (coefficient * target + exchange * deep) / (coefficient + exchange)
    return UpwellingColumn(temperature=temperature, heat_gain=coefficient * (target - temperature))
