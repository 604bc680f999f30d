"""Water that the wind lifts through the base of the surface mixed layer, wherever in the layer it comes from.

Only part of it comes from below the thermocline and becomes new warm water: that part is the entrainment in a file's
volume budget, this is the whole.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any, NamedTuple

import numpy as np
import yaml
from numpy.typing import NDArray

from oceanbox.constants import SECONDS_PER_DAY
from oceanbox.diagnostics.geometry import Geometry
from oceanbox.diagnostics.gyres import beta_of
from oceanbox.diagnostics.labelled import array_of
from oceanbox.diagnostics.reference import CONFIG_ATTRIBUTE, Reference
from oceanbox.errors import UnreadableResult

if TYPE_CHECKING:
    import xarray as xr

__all__ = ["MixedLayer", "ekman_shear", "entrainment_closure", "lifted_water", "mixed_layer_transport"]

Array = NDArray[np.float64]


class MixedLayer(NamedTuple):
    """The surface mixed layer of the run that wrote a file.

    depth           H_m, m
    half_thickness  l, over which a deeper thermocline cuts off cold water, m
    damping         of the Ekman shear, s-1
    """

    depth: float
    half_thickness: float
    damping: float

    @classmethod
    def from_attributes(cls, attributes: Mapping[Any, Any]) -> MixedLayer:
        """Read from the resolved configuration among a file's global attributes.

        Raises UnreadableResult where there is no configuration, or it has no wind-driven entrainment.
        """
        closure = entrainment_closure(attributes, "upwelling")
        if closure is None:
            raise UnreadableResult(
                f"attribute {CONFIG_ATTRIBUTE}: got a run without wind-driven entrainment; "
                "water is lifted only in runs that have it; leave out what rests on it"
            )
        return cls(
            depth=float(closure["mixed_layer_depth_m"]),
            half_thickness=float(closure["thermocline_half_thickness_m"]),
            damping=float(closure["shear_damping_per_day"]) / SECONDS_PER_DAY,
        )


def entrainment_closure(attributes: Mapping[Any, Any], name: str) -> Mapping[str, Any] | None:
    """The keys of an entrainment closure in the configuration among a file's attributes; None where it is off.

    Raises UnreadableResult where the configuration is missing or says nothing of it.
    """
    text = attributes.get(CONFIG_ATTRIBUTE)
    config = yaml.safe_load(text) if isinstance(text, str) else None
    try:
        closure: Mapping[str, Any] | None = dict(config or {})["entrainment"][name]
    except (KeyError, TypeError):
        raise UnreadableResult(
            f"attribute {CONFIG_ATTRIBUTE}: got no configuration with entrainment.{name}; it is needed here, null where "
            "the closure is off; use the file as the run wrote it"
        ) from None
    return closure


def ekman_shear(along: Array, across: Array, coriolis: Array, layer: MixedLayer, density: float) -> Array:
    """Shear velocity of the mixed layer in the direction of `along`, m s-1.

    along, across  wind stress in that direction and 90 degrees to its left, N m-2
    coriolis       f, s-1;  density  kg m-3

    From r_s u_s - f v_s = tau_x/(rho0 H_m) and r_s v_s + f u_s = tau_y/(rho0 H_m) (Zebiak and Cane 1987, Mon. Wea.
    Rev. 115, 2262). For the northward component give tau_y, and -tau_x as what lies to its left.
    """
    load = density * layer.depth * (layer.damping**2 + coriolis**2)
    shear: Array = (layer.damping * along + coriolis * across) / load
    return shear


def mixed_layer_transport(thickness: Array, velocity: Array, shear: Array, depth: float) -> Array:
    """H_m u + (H_m - H_m^2/h) u_s, m2 s-1; the mixed layer is never deeper than the layer.

    thickness, velocity, shear  on the same faces; m, m s-1, m s-1
    depth                       H_m, m
    """
    mixed = np.minimum(depth, thickness)
    return mixed * velocity + (mixed - mixed**2 / thickness) * shear


def lifted_water(dataset: xr.Dataset) -> Array:
    """Upwelling through the base of the mixed layer, max(div M, 0), (ny, nx), m s-1, of the window-mean state.

    Stress is averaged to where the other component is, so this agrees with what the run did to second order in the
    spacing. Where the flow varies within the window, the mean of what was lifted is more than this.
    Raises UnreadableResult if a variable is missing or the run had no wind-driven entrainment.
    """
    layer = MixedLayer.from_attributes(dataset.attrs)
    reference = Reference.from_attributes(dataset.attrs)
    periodic = reference.zonal_boundary == "periodic"
    geometry = Geometry.of(dataset)
    thickness = array_of(dataset, "thickness")[0]
    beta = beta_of(array_of(dataset, "coriolis"), geometry.y)
    at_origin = float(array_of(dataset, "coriolis")[0]) - beta * geometry.y[0]
    stress_x, stress_y = array_of(dataset, "wind_stress_x"), array_of(dataset, "wind_stress_y")
    density = reference.reference_density_kg_per_m3

    f = (at_origin + beta * geometry.y)[:, None]
    shear_x = ekman_shear(stress_x, _x_faces(_centres_y(stress_y), periodic), f, layer, density)
    f = (at_origin + beta * geometry.y_face)[:, None]
    shear_y = ekman_shear(stress_y, -_y_faces(_centres_x(stress_x)), f, layer, density)
    eastward = mixed_layer_transport(
        _x_faces(thickness, periodic), array_of(dataset, "velocity_x")[0], shear_x, layer.depth
    )
    northward = mixed_layer_transport(_y_faces(thickness), array_of(dataset, "velocity_y")[0], shear_y, layer.depth)
    northward[[0, -1]] = 0.0
    if not periodic:
        eastward[:, [0, -1]] = 0.0
    divergence = np.diff(eastward, axis=1) / geometry.dx + np.diff(northward, axis=0) / geometry.dy[:, None]
    return np.maximum(divergence, 0.0)


def _centres_x(on_faces: Array) -> Array:
    return 0.5 * (on_faces[:, 1:] + on_faces[:, :-1])


def _centres_y(on_faces: Array) -> Array:
    return 0.5 * (on_faces[1:] + on_faces[:-1])


def _x_faces(centred: Array, periodic: bool) -> Array:
    wide = np.pad(centred, ((0, 0), (1, 1)), mode="wrap" if periodic else "edge")
    return _centres_x(wide)


def _y_faces(centred: Array) -> Array:
    return _centres_y(np.pad(centred, ((1, 1), (0, 0)), mode="edge"))
