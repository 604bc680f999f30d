"""Maps of the basin: thermocline depth with currents, surface temperature with the cold tongue."""

from __future__ import annotations

from typing import TYPE_CHECKING, Literal

import numpy as np
from matplotlib.colors import BoundaryNorm
from numpy.typing import NDArray

from oceanbox.diagnostics.cold_tongue import TONGUE_WITHIN_DEG, tongue_cells, warm_pool_temperature
from oceanbox.diagnostics.geometry import Geometry
from oceanbox.diagnostics.labelled import array_of
from oceanbox.diagnostics.reference import Reference
from oceanbox.diagnostics.thermocline import equatorial_profile
from oceanbox.figures import fields
from oceanbox.figures.axes import label_latitude, label_longitude, round_levels, width_points
from oceanbox.figures.options import TemperatureMap, ThermoclineMap
from oceanbox.figures.style import DEEP_IS_DARK, INK, WARM_IS_LIGHT

if TYPE_CHECKING:
    import xarray as xr
    from matplotlib.axes import Axes

__all__ = ["temperature_map", "thermocline_map", "tongue_edge"]

Array = NDArray[np.float64]

_ARROW_MM = 5.0  # length of the arrow of the key
_KEY_POINTS = 44.0  # from the middle of the key's arrow to the end of its text
_TICK_POINTS = 20.0  # that the number at a tick of the colour bar takes
_FASTER_THAN = 0.04  # of the key's speed; slower arrows would be dots


def thermocline_map(ax: Axes, dataset: xr.Dataset, options: ThermoclineMap) -> Axes:
    """Thermocline depth (m) in colour, currents of the top layer as arrows."""
    depth = array_of(dataset, "thermocline_depth")
    levels = _levels(depth, options.shallowest_m, options.deepest_m, about=14)
    _colour_map(ax, dataset, depth, levels, DEEP_IS_DARK, "Thermocline depth (m)")
    if options.arrows == "current":
        _draw_arrows(ax, fields.arrows(dataset, options.arrows_across))
    return ax


def temperature_map(ax: Axes, dataset: xr.Dataset, options: TemperatureMap) -> Axes:
    """Surface temperature (degC) in colour, the edge of the cold tongue as a line."""
    temperature = array_of(dataset, "temperature")[0]
    # Finer than depth: a cold tongue of a few kelvin must show beside the contrast from tropics to pole.
    levels = _levels(temperature, options.coldest_degC, options.warmest_degC, about=26)
    _colour_map(ax, dataset, temperature, levels, WARM_IS_LIGHT, "Surface temperature (°C)")
    edge = tongue_edge(dataset) if options.outline == "cold_tongue" else float("nan")
    geometry = Geometry.of(dataset)
    near = geometry.rows_centred_near_equator(TONGUE_WITHIN_DEG)
    ring = temperature[near]
    if ring.size and ring.min() < edge < ring.max():
        place = fields.degrees_of(geometry)
        # Drawn to the walls, not only to the outermost centres.
        x = np.concatenate((place.x_face[:1], place.x, place.x_face[-1:]))
        ring = np.pad(ring, ((0, 0), (1, 1)), mode="edge")
        for colour, width in (("white", 1.6), (INK, 0.8)):
            ax.contour(x, place.y[near], ring, levels=[edge], colors=colour, linewidths=width)
    return ax


def tongue_edge(dataset: xr.Dataset) -> float:
    """Temperature at the edge of the cold tongue, degC; NaN where the basin holds no equator."""
    contrast = Reference.from_attributes(dataset.attrs).cold_tongue_contrast_K
    cells = tongue_cells(Geometry.of(dataset))
    profile = equatorial_profile(array_of(dataset, "temperature")[0], cells.equator)
    return warm_pool_temperature(profile, cells.window) - contrast


def _levels(field: Array, low: float | None, high: float | None, about: int) -> Array:
    smallest = float(field.min()) if low is None else low
    largest = float(field.max()) if high is None else high
    return round_levels(smallest, largest, about)


def _colour_map(ax: Axes, dataset: xr.Dataset, field: Array, levels: Array, colours: str, label: str) -> None:
    place = fields.degrees_of(Geometry.of(dataset))
    beyond_low, beyond_high = field.min() < levels[0], field.max() > levels[-1]
    extend: Literal["neither", "both", "min", "max"] = "neither"
    if beyond_low or beyond_high:
        extend = "both" if beyond_low and beyond_high else "min" if beyond_low else "max"
    mesh = ax.pcolormesh(
        place.x_face,
        place.y_face,
        field,
        cmap=colours,
        norm=BoundaryNorm(levels, 256, extend=extend),
        rasterized=True,
    )
    label_longitude(ax, place.x_face[0], place.x_face[-1])
    label_latitude(ax, "y", place.y_face[0], place.y_face[-1])
    figure = ax.get_figure(root=False)
    if figure is not None:
        ticks = _ticks(levels, round(width_points(ax) / _TICK_POINTS))
        bar = figure.colorbar(mesh, ax=ax, location="bottom", pad=0.02, aspect=36, ticks=ticks)
        bar.minorticks_off()
        bar.set_label(label)
        bar.ax.tick_params(length=2.0)


def _ticks(levels: Array, at_most: int) -> Array:
    """The levels that get a number: multiples of 1, 2, 5 or 10 steps, at most so many."""
    step = levels[1] - levels[0]
    multiples = np.round(levels / step).astype(int)
    stride = next((n for n in (1, 2, 5, 10, 20) if levels.size / n <= at_most), 50)
    return levels[multiples % stride == 0]


def _draw_arrows(ax: Axes, currents: fields.Arrows) -> None:
    speed = np.hypot(currents.eastward, currents.northward)
    key = _round_down(float(np.quantile(speed, 0.98)))
    if key == 0.0:
        return
    # Boundary currents are ten times faster than the interior: the square root lets one scale show both.
    with np.errstate(divide="ignore", invalid="ignore"):
        shrink = np.where(speed > _FASTER_THAN * key, 1.0 / np.sqrt(speed), np.nan)
    drawn = ax.quiver(
        currents.longitude,
        currents.latitude,
        currents.eastward * shrink,
        currents.northward * shrink,
        scale=np.sqrt(key) / (_ARROW_MM / 25.4),
        scale_units="inches",
        units="inches",
        width=0.008,
        headwidth=3.8,
        headlength=4.2,
        headaxislength=3.8,
        color=INK,
    )
    small = _round_down(0.3 * key)
    from_east = _KEY_POINTS / width_points(ax)
    for place, speed_shown, text in ((1 - 2 * from_east, small, f"{small:g}"), (1 - from_east, key, f"{key:g} m s⁻¹")):
        ax.quiverkey(drawn, place, 1.03, np.sqrt(speed_shown), text, labelpos="E", labelsep=0.04)


def _round_down(value: float) -> float:
    """The largest of 1, 2 or 5 times a power of ten that is not above a value; 0 for 0."""
    if value <= 0.0:
        return 0.0
    power = 10.0 ** np.floor(np.log10(value))
    return float(max(step for step in (1.0, 2.0, 5.0) if step * power <= value * (1 + 1e-12)) * power)
