"""Scales of waves, boundary layers and the thermocline: formulas that turn parameters into lengths and
speeds.

Functions of numbers (or arrays that broadcast) trust their input, save where a square root or a logarithm
would make nonsense of it.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from oceanbox.diagnostics.geometry import Geometry
from oceanbox.diagnostics.gyres import beta_of
from oceanbox.diagnostics.labelled import array_of, scalars
from oceanbox.diagnostics.thermocline import (
    EQUATOR_WITHIN_DEG,
    band_mean,
    equatorial_profile,
    equatorial_weights,
)

if TYPE_CHECKING:
    import xarray as xr

__all__ = [
    "advective_thermocline_depth",
    "deformation_radius",
    "eastern_depth_log_law",
    "equatorial_radius",
    "equatorial_scales",
    "fastest_wave_speed",
    "munk_width",
    "stommel_width",
    "wave_speed",
    "width_in_cells",
]

Array = NDArray[np.float64]


def wave_speed(reduced_gravity: float, thickness: float) -> float:
    """Speed of long gravity waves on one layer over a resting abyss, sqrt(b h), m s-1 (b in m s-2, h in m).

    Raises ValueError where b h is negative: the layer is heavier than the abyss, or has no thickness.
    """
    return fastest_wave_speed(np.array([thickness]), np.array([reduced_gravity]))


def fastest_wave_speed(thickness: Array, reduced_gravity: Array) -> float:
    """Speed of the fastest long gravity wave on a stack of layers over a resting abyss, m s-1.

    thickness        of each layer, top first, (layer,), m
    reduced_gravity  buoyancy of each relative to the abyss, (layer,), m s-2

    c^2 is the largest eigenvalue of b_max(i,j) h_j; for one layer sqrt(b h). Raises ValueError where it is
    negative.
    """
    layers = np.arange(thickness.size)
    coupling = reduced_gravity[np.maximum(layers[:, None], layers[None, :])] * thickness[None, :]
    square = float(np.linalg.eigvals(coupling).real.max())
    if square < 0.0:
        raise ValueError(
            f"wave speed: got thickness {thickness} m and buoyancy {reduced_gravity} m s-2; "
            "the layers must be lighter than the abyss; check temperature and salinity"
        )
    return float(np.sqrt(square))


def equatorial_radius(speed: float, beta: float) -> float:
    """Equatorial radius of deformation, sqrt(c/beta), m (Gill 1982, Atmosphere-Ocean Dynamics, has
    sqrt(c/2beta)).

    speed  wave speed c, m s-1
    beta   northward gradient of the Coriolis parameter, m-1 s-1, positive
    """
    return float(np.sqrt(speed / beta))


def deformation_radius(thickness: Array, reduced_gravity: Array, coriolis: Array) -> Array:
    """Rossby radius of deformation, sqrt(b h)/|f|, m; infinite where f = 0 (Gill 1982).

    thickness, reduced_gravity, coriolis  that broadcast; m, m s-2, s-1
    """
    with np.errstate(divide="ignore"):
        radius: Array = np.sqrt(reduced_gravity * thickness) / np.abs(coriolis)
    return radius


def munk_width(viscosity: float, beta: float) -> float:
    """Width of a viscous western boundary layer, (A/beta)^(1/3), m (Munk 1950, J. Meteor. 7, 79-93).

    viscosity  A, m2 s-1;  beta  m-1 s-1
    """
    return float(np.cbrt(viscosity / beta))


def stommel_width(drag: float, beta: float) -> float:
    """Width of a western boundary layer under linear drag, r/beta, m (Stommel 1948, Trans. AGU 29, 202-206).

    drag  r, s-1;  beta  m-1 s-1
    """
    return drag / beta


def width_in_cells(width: float, cell_width: float) -> float:
    """How many cells span a width (both m): a viscous boundary layer needs about two."""
    return width / cell_width


def advective_thermocline_depth(
    coriolis: float, pumping: float, length: float, beta: float, reduced_gravity: float
) -> float:
    """Advective scale of the thermocline's depth, sqrt(f^2 W L/(beta b)), m.

    coriolis  f, s-1;  pumping  Ekman pumping W, m s-1;  length  zonal extent L, m;  beta, m-1 s-1;  b, m s-2
    """
    return float(np.sqrt(coriolis**2 * pumping * length / (beta * reduced_gravity)))


def eastern_depth_log_law(mixed_layer_depth: float, half_thickness: float, upwelled: float, destroyed: float) -> float:
    """Thermocline depth in the eastern equatorial basin at which entrainment meets destruction, m.

    H_m + l ln(W_up/W_d): of the upwelled water W_up the share exp(-(h - H_m)/l) comes from below the
    thermocline, and that must be W_d.

    mixed_layer_depth  H_m, m;  half_thickness  l, m;  upwelled, destroyed  W_up and W_d, m3 s-1, positive

    Raises ValueError unless 0 < W_d <= W_up: more cannot be destroyed than wells up.
    """
    if not 0.0 < destroyed <= upwelled:
        raise ValueError(
            f"log law: got W_up = {upwelled:g} and W_d = {destroyed:g} m3 s-1; 0 < W_d <= W_up is allowed; "
            "the law does not hold where another closure makes the water"
        )
    return mixed_layer_depth + half_thickness * float(np.log(upwelled / destroyed))


def equatorial_scales(dataset: xr.Dataset) -> xr.Dataset:
    """Long-wave speed (m s-1) and equatorial radius sqrt(c/beta) (m), as 0-d variables.

    From thickness and buoyancy averaged within 2 degrees of the equator, over the whole basin where it
    holds none; the radius is NaN there, and where beta is not positive. Raises UnreadableResult if a
    variable is missing or not finite.
    """
    geometry = Geometry.of(dataset)
    thickness = _layer_means(array_of(dataset, "thickness"), geometry)
    gravity = _layer_means(array_of(dataset, "reduced_gravity"), geometry)
    speed = fastest_wave_speed(thickness, gravity)
    beta = beta_of(array_of(dataset, "coriolis"), geometry.y)
    has_equator = bool(geometry.rows_near_equator(EQUATOR_WITHIN_DEG).any()) and beta > 0.0
    radius = equatorial_radius(speed, beta) if has_equator else float("nan")
    return scalars({"wave_speed": speed, "equatorial_radius": radius})


def _layer_means(field: Array, geometry: Geometry) -> Array:
    weights = equatorial_weights(geometry)
    if weights.row.size == 0:
        return np.array([band_mean(weights.basin @ layer, weights.column) for layer in field])
    return np.array([band_mean(equatorial_profile(layer, weights), weights.column) for layer in field])
