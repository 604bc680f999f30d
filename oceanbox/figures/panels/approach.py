"""Against time: how a run came to its equilibrium."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from matplotlib.ticker import MaxNLocator

from oceanbox.constants import DAYS_PER_YEAR
from oceanbox.figures import fields
from oceanbox.figures.axes import label_y, legend_above, split
from oceanbox.figures.options import Approach
from oceanbox.figures.style import GREY, LINES

if TYPE_CHECKING:
    import xarray as xr
    from matplotlib.axes import Axes

__all__ = ["approach"]

_ON_EQUATOR = {
    "thermocline_depth_equator_west": "west",
    "thermocline_depth_equator_mean": "mean",
    "thermocline_depth_equator_east": "east",
}
_IN_BASIN = {"thermocline_depth_basin_mean": "basin mean"}


def approach(ax: Axes, dataset: xr.Dataset, options: Approach) -> Axes:
    """Thermocline depth (m, downward), warm-water volume (1e15 m3) and heat imbalance (per cent) against years.

    The depth is that on the equator, or the basin mean where the basin holds no equator.
    """
    depth, volume, imbalance = split(ax, (1.5, 1.0, 1.0))
    time = fields.years(dataset)
    shown = time >= options.from_year
    for (name, label), line in zip(_depths(dataset).items(), LINES, strict=False):
        depth.plot(time[shown], fields.series(dataset, name)[shown], label=label, **line._asdict())
    depth.invert_yaxis()
    label_y(depth, "Depth (m)")
    legend_above(depth, frame=ax)

    warm_water = fields.series(dataset, "warm_water_volume") / fields.PETA
    volume.plot(time[shown], warm_water[shown], color=LINES[0].color)
    label_y(volume, "Volume\n(10¹⁵ m³)")
    imbalance.plot(time[shown], 100.0 * fields.series(dataset, "heat_imbalance")[shown], color=LINES[0].color)
    label_y(imbalance, "Imbalance\n(%)")
    imbalance.set_ylim(bottom=0.0)
    for axes, ticks in ((depth, 4), (volume, 3), (imbalance, 3)):
        axes.yaxis.set_major_locator(MaxNLocator(nbins=ticks, steps=[1, 2, 5, 10]))
    _shade_window((depth, volume, imbalance), dataset)
    imbalance.set_xlabel("Model time (years)")
    if shown.any():
        imbalance.set_xlim(options.from_year, float(time[shown].max()))
    return ax


def _depths(dataset: xr.Dataset) -> dict[str, str]:
    known = np.isfinite(fields.series(dataset, "thermocline_depth_equator_mean")).any()
    return _ON_EQUATOR if known else _IN_BASIN


def _shade_window(stack: tuple[Axes, ...], dataset: xr.Dataset) -> None:
    """Shade the window that the maps are averaged over, where the file states it."""
    bounds = dataset.coords.get("window_bounds")
    if bounds is None:
        return
    start, end = np.asarray(bounds, dtype=float) / DAYS_PER_YEAR
    for ax in stack:
        ax.axvspan(start, end, color=GREY, alpha=0.25, linewidth=0, zorder=0.4)
