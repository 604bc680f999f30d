"""What the laws of `theory` need to know of one run: how much water is lifted and lost, and scales of the thermocline."""

from __future__ import annotations

from types import MappingProxyType
from typing import TYPE_CHECKING, Final, NamedTuple

import numpy as np

from oceanbox.constants import EARTH_RADIUS_M
from oceanbox.diagnostics.budgets_by_region import SUBTROPICS_TO_DEG, TROPICS_TO_DEG
from oceanbox.diagnostics.geometry import Geometry
from oceanbox.diagnostics.gyres import beta_of
from oceanbox.diagnostics.labelled import array_of
from oceanbox.diagnostics.reference import Reference
from oceanbox.diagnostics.scales import advective_thermocline_depth
from oceanbox.diagnostics.theory import diffusive_thermocline_depth
from oceanbox.diagnostics.upwelling import MixedLayer, entrainment_closure, lifted_water

if TYPE_CHECKING:
    import xarray as xr

__all__ = ["THEORY_INPUTS", "Input", "theory_inputs"]


class Input(NamedTuple):
    """Long name and unit of a number that a law needs."""

    long_name: str
    units: str


THEORY_INPUTS: Final = MappingProxyType(
    {
        "upwelling_tropics": Input("water lifted through the mixed-layer base within 10 degrees", "m3 s-1"),
        "upwelling_basin": Input("water lifted through the mixed-layer base in the whole basin", "m3 s-1"),
        "supply_tropics": Input(
            "what of the water lifted within 10 degrees comes from below the thermocline", "m3 s-1"
        ),
        "loss_to_abyss": Input("warm water destroyed and handed over where the layer outcrops", "m3 s-1"),
        "upwelling_ratio_tropics": Input(
            "ratio of all water lifted within 10 degrees to what of it comes from below the thermocline", "1"
        ),
        "upwelling_ratio_basin": Input(
            "ratio of all water lifted in the basin to all warm water lost to the abyss", "1"
        ),
        "advective_depth": Input("advective scale of the thermocline's depth in the subtropics", "m"),
        "diffusive_depth": Input("diffusive scale of the thermocline's depth in the subtropics", "m"),
        "mixed_layer_depth": Input("configured depth of the mixed layer", "m"),
        "half_thickness": Input("configured half-thickness of the thermocline", "m"),
    }
)
"""The variables of `theory_inputs`. Two balances can be put into the log law: what the tropics must supply themselves, or
what the whole basin loses; they differ by what is entrained at high latitudes."""


def theory_inputs(dataset: xr.Dataset) -> xr.Dataset:
    """The `THEORY_INPUTS` of a result, 0-d variables.

    What a run does not have is NaN: all upwelling without the wind-driven closure, the diffusive scale without the
    diffusive one, the scales of the subtropics without subtropics or where the wind does not pump water down there.
    Raises UnreadableResult if a variable is missing or not finite.
    """
    import xarray as xr

    values = _exchange(dataset) | _scales(dataset)
    return xr.Dataset({name: ((), values[name], words._asdict()) for name, words in THEORY_INPUTS.items()})


def _exchange(dataset: xr.Dataset) -> dict[str, float]:
    area = array_of(dataset, "cell_area")
    tropics = Geometry.of(dataset).rows_near_equator(TROPICS_TO_DEG)
    supply = float(tropics @ (array_of(dataset, "entrainment_upwelling") * area).sum(axis=1))
    loss = -float(((array_of(dataset, "transformation") + array_of(dataset, "outcrop_volume")) * area).sum())
    by_row, layer = np.full(len(area), np.nan), MixedLayer(*(float("nan"),) * 3)
    if entrainment_closure(dataset.attrs, "upwelling") is not None:
        by_row, layer = (lifted_water(dataset) * area).sum(axis=1), MixedLayer.from_attributes(dataset.attrs)
    upwelled = {"upwelling_tropics": float(tropics @ by_row), "upwelling_basin": float(by_row.sum())}
    return upwelled | {
        "supply_tropics": supply,
        "loss_to_abyss": loss,
        "upwelling_ratio_tropics": _ratio(upwelled["upwelling_tropics"], supply),
        "upwelling_ratio_basin": _ratio(upwelled["upwelling_basin"], loss),
        "mixed_layer_depth": layer.depth,
        "half_thickness": layer.half_thickness,
    }


def _scales(dataset: xr.Dataset) -> dict[str, float]:
    """Scales at the middle latitude of the subtropics, with pumping and buoyancy averaged over them."""
    geometry = Geometry.of(dataset)
    beta = beta_of(array_of(dataset, "coriolis"), geometry.y)
    f = beta * np.radians(0.5 * (TROPICS_TO_DEG + SUBTROPICS_TO_DEG)) * EARTH_RADIUS_M
    pumping, buoyancy = _subtropical_pumping(dataset, geometry, beta), _subtropical_buoyancy(dataset, geometry)
    found = {"advective_depth": float("nan"), "diffusive_depth": float("nan")}
    if beta <= 0.0 or not buoyancy > 0.0:
        return found
    if pumping > 0.0:
        found["advective_depth"] = advective_thermocline_depth(f, pumping, geometry.width, beta, buoyancy)
    mixing = entrainment_closure(dataset.attrs, "diffusive")
    if mixing is not None:
        found["diffusive_depth"] = diffusive_thermocline_depth(
            f, float(mixing["diffusivity_m2_per_s"]), geometry.width, beta, buoyancy
        )
    return found


def _subtropical_pumping(dataset: xr.Dataset, geometry: Geometry, beta: float) -> float:
    """Ekman pumping, positive downward, mean over the subtropics of both hemispheres that the basin holds, m s-1.

    The mean over a band is the difference of the northward Ekman transports -tau_x/(rho0 f) at its edges over its width.
    """
    if beta == 0.0 or np.isnan(geometry.equator):
        return float("nan")
    density = Reference.from_attributes(dataset.attrs).reference_density_kg_per_m3
    stress = array_of(dataset, "wind_stress_x").mean(axis=1)
    edges = np.radians([TROPICS_TO_DEG, SUBTROPICS_TO_DEG]) * EARTH_RADIUS_M
    found = []
    for side in (-1.0, 1.0):
        y = geometry.equator + side * edges
        if geometry.y[0] <= y.min() and y.max() <= geometry.y[-1]:
            equatorward, poleward = side * -np.interp(y, geometry.y, stress) / (density * beta * (y - geometry.equator))
            found.append(float(equatorward - poleward) / float(edges[1] - edges[0]))
    return float(np.mean(found)) if found else float("nan")


def _subtropical_buoyancy(dataset: xr.Dataset, geometry: Geometry) -> float:
    """Buoyancy of the warm water relative to the abyss, mean over the volume in the subtropics, m s-2."""
    rows = geometry.rows_near_equator(SUBTROPICS_TO_DEG) - geometry.rows_near_equator(TROPICS_TO_DEG)
    volume = array_of(dataset, "thickness") * array_of(dataset, "cell_area") * rows[:, None]
    total = float(volume.sum())
    return float((volume * array_of(dataset, "reduced_gravity")).sum()) / total if total > 0.0 else float("nan")


def _ratio(above: float, below: float) -> float:
    return above / below if below > 0.0 else float("nan")
