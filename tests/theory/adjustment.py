r"""Geostrophic adjustment and Rossby waves of a mid-latitude layer.

f [s-1] Coriolis parameter, g [m s-2] (reduced) gravity, H [m] rest depth, c = sqrt(g H). Energies are per unit
density and per metre along the step [m4 s-2].
"""

from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[np.floating]


class StepEnergies(NamedTuple):
    """Potential energy released and kinetic energy kept by an adjustment [m4 s-2]."""

    potential_released: float
    kinetic_kept: float


class GridStep(NamedTuple):
    """The step as a C-grid keeps it: centres x [m], eta [m] and v [m s-1] there, each (2 cells,)."""

    x: Array
    eta: Array
    v: Array


class FiniteStep(NamedTuple):
    """The adjusted finite step: where the two waters meet, the depth [m] and the velocity [m s-1] there.

    `drop` and `rise` [m] are the amplitudes A and B of the two exponentials.
    """

    interface: float
    depth: float
    velocity: float
    drop: float
    rise: float


def deformation_radius(wave_speed: float, coriolis: float) -> float:
    """Ld = c / |f| [m]. Source: Gill (1982), Atmosphere-Ocean Dynamics, section 7.2 (from memory)."""
    return wave_speed / abs(coriolis)


def rossby_wave_frequency(k: float, l: float, beta: float, radius: float) -> float:  # noqa: E741
    """omega = -beta k / (k^2 + l^2 + Ld^-2) [s-1]; k, l [m-1], beta [m-1 s-1], Ld [m].

    Source: Gill (1982), chapters 11-12 (from memory).
    """
    return -beta * k / (k**2 + l**2 + radius**-2)


def long_rossby_wave_speed(beta: float, radius: float) -> float:
    """-beta Ld^2 [m s-1], the (westward) velocity of long waves. Source: Gill (1982), chapter 12 (from memory)."""
    return -beta * radius**2


def highest_rossby_frequency(beta: float, radius: float) -> float:
    """beta Ld / 2 [s-1], at k = -1/Ld and l = 0. Source: derived from rossby_wave_frequency."""
    return 0.5 * beta * radius


def inertial_period(coriolis: float) -> float:
    """2 pi / |f| [s]. Source: Gill (1982) (from memory)."""
    return float(2.0 * np.pi / abs(coriolis))


def coriolis_on_sphere(latitude_deg: float, rotation: float = 7.292115e-5) -> float:
    """f = 2 Omega sin(latitude) [s-1]; latitude [degrees], Omega [s-1]."""
    return float(2.0 * rotation * np.sin(np.radians(latitude_deg)))


def beta_on_sphere(latitude_deg: float, rotation: float = 7.292115e-5, radius: float = 6.371e6) -> float:
    """beta = 2 Omega cos(latitude) / a [m-1 s-1]; latitude [degrees], Omega [s-1], a [m]."""
    return float(2.0 * rotation * np.cos(np.radians(latitude_deg)) / radius)


def adjusted_step_height(x: ArrayLike, height: float, radius: float) -> Array:
    """eta = -eta0 sign(x) (1 - exp(-|x|/Ld)) [m] after a step of +eta0 (x < 0), -eta0 (x > 0); x, Ld [m].

    Source: Rossby (1938), J. Mar. Res. 1, 239-263; Gill (1982), section 7.2 (from memory).
    """
    x = np.asarray(x, dtype=float)
    return np.asarray(height * np.sign(x) * np.expm1(-np.abs(x) / radius))


def adjusted_step_velocity(x: ArrayLike, height: float, radius: float, gravity: float, coriolis: float) -> Array:
    """v = -(g eta0 / (f Ld)) exp(-|x|/Ld) [m s-1] of the adjusted step. Source: as adjusted_step_height."""
    return np.asarray(-gravity * height / (coriolis * radius) * np.exp(-np.abs(x) / radius))


def step_energies(height: float, radius: float, gravity: float) -> StepEnergies:
    """3/2 g eta0^2 Ld released and 1/2 g eta0^2 Ld kept as motion: a third; waves take the rest.

    Source: Rossby (1938), Gill (1982), section 7.2 (from memory); the integrals derived.
    """
    unit = gravity * height**2 * radius
    return StepEnergies(potential_released=1.5 * unit, kinetic_kept=0.5 * unit)


def adjusted_step_on_c_grid(
    cells: int, cell_width: float, height: float, depth: float, gravity: float, coriolis: float
) -> GridStep:
    """The adjusted step with walls `cells` cells of `cell_width` [m] on either side of x = 0.

    v and eta lie at centres, u at faces; each face keeps (v_i - v_(i-1))/dx - (f/H)(eta_i + eta_(i-1))/2 and at
    rest f (v_i + v_(i-1))/2 = g (eta_i - eta_(i-1))/dx, so M^T (M eta - M eta_0) + Ld^2 D^T D eta = 0, with M the
    average and D the difference from centres to faces. H = `depth` [m]; f > 0. Source: derived.
    """
    count = 2 * cells
    x = (np.arange(count) - cells + 0.5) * cell_width
    initial = -height * np.sign(x)
    mean = 0.5 * (np.eye(count - 1, count) + np.eye(count - 1, count, 1))
    difference = (np.eye(count - 1, count, 1) - np.eye(count - 1, count)) / cell_width
    square_radius = gravity * depth / coriolis**2
    eta = np.linalg.solve(mean.T @ mean + square_radius * difference.T @ difference, mean.T @ (mean @ initial))
    steps = coriolis / depth * cell_width * (mean @ (eta - initial))
    v = np.concatenate([[0.0], np.cumsum(steps)])
    # Potential vorticity fixes v up to a constant, and geostrophy at any one face fixes that.
    return GridStep(x, eta, v + (gravity / coriolis * difference @ eta - mean @ v)[0])


def adjusted_finite_step(left: float, right: float, gravity: float, coriolis: float) -> FiniteStep:
    """Adjustment of depths left > right > 0 [m], at rest on either side of x = 0, at any amplitude (f > 0).

    h = hL + A exp((x - x0)/LL) for x < x0 and hR + B exp(-(x - x0)/LR) beyond, LL = sqrt(g hL)/f, LR likewise,
    A = -(hL - hR) LL/(LL + LR), B = (hL - hR) LR/(LL + LR), x0 = -A LL/hL, h(x0) = sqrt(hL hR).

    Source: conservation of potential vorticity on each side as in Rossby (1938); formula derived.
    """
    radius_left, radius_right = np.sqrt(gravity * left) / coriolis, np.sqrt(gravity * right) / coriolis
    drop = -(left - right) * radius_left / (radius_left + radius_right)
    rise = (left - right) * radius_right / (radius_left + radius_right)
    return FiniteStep(
        interface=float(-drop * radius_left / left),
        depth=float(left + drop),
        velocity=float(gravity * drop / (coriolis * radius_left)),
        drop=float(drop),
        rise=float(rise),
    )


def adjusted_finite_step_depth(x: ArrayLike, left: float, right: float, gravity: float, coriolis: float) -> Array:
    """Depth h(x) [m] of adjusted_finite_step; x [m], any shape."""
    step = adjusted_finite_step(left, right, gravity, coriolis)
    x = np.asarray(x, dtype=float)
    distance = -np.abs(x - step.interface) * coriolis
    west = left + step.drop * np.exp(distance / np.sqrt(gravity * left))
    east = right + step.rise * np.exp(distance / np.sqrt(gravity * right))
    return np.where(x < step.interface, west, east)


def dry_collapse_front(depth: float, gravity: float, coriolis: float) -> float:
    """a = sqrt(g H) / f [m]: how far water of depth H [m] that filled x < 0 spreads over the dry side.

    Source: limit of adjusted_finite_step for hR = 0, derived; Kuo and Polvani (1997), J. Phys. Oceanogr. 27,
    1614-1634, find it as the end of computed collapses.
    """
    return float(np.sqrt(gravity * depth) / coriolis)


def dry_collapse_depth(x: ArrayLike, depth: float, gravity: float, coriolis: float) -> Array:
    """h = H [1 - exp((x - a)/a)] [m] behind the front x = a, zero beyond. Source: as dry_collapse_front."""
    front = dry_collapse_front(depth, gravity, coriolis)
    return np.maximum(-depth * np.expm1((np.asarray(x, dtype=float) - front) / front), 0.0)


def dry_collapse_velocity(x: ArrayLike, depth: float, gravity: float, coriolis: float) -> Array:
    """v = -f a exp((x - a)/a) [m s-1] behind the front, zero beyond. Source: g h_x = f v, as dry_collapse_front."""
    x = np.asarray(x, dtype=float)
    front = dry_collapse_front(depth, gravity, coriolis)
    return np.where(x <= front, -coriolis * front * np.exp(np.minimum(x - front, 0.0) / front), 0.0)


def dry_collapse_energies(depth: float, gravity: float, coriolis: float) -> StepEnergies:
    """g H^2 a / 4 released and g H^2 a / 12 kept as motion [m4 s-2]. Source: derived."""
    unit = gravity * depth**2 * dry_collapse_front(depth, gravity, coriolis)
    return StepEnergies(potential_released=unit / 4.0, kinetic_kept=unit / 12.0)
