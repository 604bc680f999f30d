"""Along the equator: surface temperature above thermocline depth."""

from __future__ import annotations

from typing import TYPE_CHECKING

from oceanbox.diagnostics.geometry import Geometry
from oceanbox.figures import fields
from oceanbox.figures.axes import label_longitude, label_y, split
from oceanbox.figures.options import EquatorialSection
from oceanbox.figures.panels.maps import tongue_edge
from oceanbox.figures.style import GREY, LINES

if TYPE_CHECKING:
    import xarray as xr
    from matplotlib.axes import Axes
    from numpy import float64
    from numpy.typing import NDArray

__all__ = ["equatorial_section"]


def equatorial_section(ax: Axes, dataset: xr.Dataset, options: EquatorialSection) -> Axes:
    """Surface temperature (degC) and thermocline depth (m, downward) within 2 degrees of the equator."""
    section = fields.equatorial_section(dataset)
    upper, lower = split(ax, (1.0, 1.0))
    _line(upper, section.longitude, section.temperature, section.temperature_spread, 1, options)
    upper.axhline(tongue_edge(dataset), color=GREY, linewidth=0.8, linestyle=(0, (1, 1.5)))
    label_y(upper, "Temperature (°C)")
    _line(lower, section.longitude, section.depth, section.depth_spread, 0, options)
    label_y(lower, "Depth (m)")
    lower.invert_yaxis()
    faces = fields.degrees_of(Geometry.of(dataset)).x_face
    label_longitude(lower, faces[0], faces[-1])
    return ax


def _line(
    ax: Axes,
    longitude: NDArray[float64],
    values: NDArray[float64],
    spread: NDArray[float64],
    style: int,
    options: EquatorialSection,
) -> None:
    line = LINES[style]
    if options.spread == "shaded":
        ax.fill_between(longitude, values - spread, values + spread, color=line.color, alpha=0.2, linewidth=0)
    ax.plot(longitude, values, color=line.color, linestyle="solid")
    ax.margins(y=0.12)
