"""Scalars sampled from the state while a run is going on, cheaply enough to sample often."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from oceanbox.diagnostics.cold_tongue import (
    DEFAULT_CONTRAST_K,
    TongueCells,
    cold_tongue,
    tongue_cells,
)
from oceanbox.diagnostics.geometry import Geometry
from oceanbox.diagnostics.thermocline import band_mean, equatorial_depths, equatorial_profile

__all__ = ["Probe", "SampledScalars"]

Array = NDArray[np.float64]


class SampledScalars(NamedTuple):
    """What a probe finds; each field is the scalar of that name in the table of variables, in its unit.

    Equatorial fields are NaN where the basin holds no equator.
    """

    thermocline_depth_equator_west: float
    thermocline_depth_equator_east: float
    thermocline_depth_equator_mean: float
    equatorial_tilt: float
    thermocline_depth_basin_mean: float
    surface_temperature_equator_west: float
    surface_temperature_equator_east: float
    cold_tongue_area: float
    cold_tongue_reach: float
    cold_tongue_mean_deficit: float
    cold_tongue_peak_deficit: float
    warm_water_volume: float


@dataclass(frozen=True)
class Probe:
    """Samples the state of one grid: `probe(thickness, temperature) -> SampledScalars`.

    geometry    of the grid; masks and weights are worked out from it once
    contrast_K  of the cold tongue, K
    """

    geometry: Geometry
    contrast_K: float = DEFAULT_CONTRAST_K  # noqa: N815  (the ending is the unit)
    _cells: TongueCells = field(init=False, repr=False, compare=False)
    _area: float = field(init=False, repr=False, compare=False)

    def __post_init__(self) -> None:
        if not self.contrast_K > 0:
            raise ValueError(f"contrast_K: got {self.contrast_K}; it must be positive; the usual choice is 2 K")
        object.__setattr__(self, "_cells", tongue_cells(self.geometry))
        object.__setattr__(self, "_area", float(self.geometry.cell_area.sum()))

    def __call__(self, thickness: Array, temperature: Array) -> SampledScalars:
        """Sample one state. Trusts its input.

        thickness    of the layers, top first, (layer, ny, nx), m
        temperature  of the layers, (layer, ny, nx), degC; the top one is the surface
        """
        weights = self._cells.equator
        depths = equatorial_depths(thickness.sum(axis=0), weights)
        surface = temperature[0]
        profile = equatorial_profile(surface, weights)
        tongue = cold_tongue(surface, self._cells, self.contrast_K)
        return SampledScalars(
            thermocline_depth_equator_west=depths.west,
            thermocline_depth_equator_east=depths.east,
            thermocline_depth_equator_mean=depths.mean,
            equatorial_tilt=depths.tilt,
            thermocline_depth_basin_mean=depths.basin_mean,
            surface_temperature_equator_west=band_mean(profile, weights.west),
            surface_temperature_equator_east=band_mean(profile, weights.east),
            cold_tongue_area=tongue.area,
            cold_tongue_reach=tongue.reach,
            cold_tongue_mean_deficit=tongue.mean_deficit,
            cold_tongue_peak_deficit=tongue.peak_deficit,
            warm_water_volume=depths.basin_mean * self._area,
        )
