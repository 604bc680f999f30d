"""Axes that several panels share: degrees, years, round levels, stacks of axes, legends, letters."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from matplotlib import rcParams
from matplotlib.font_manager import FontProperties
from matplotlib.textpath import text_to_path
from matplotlib.ticker import FuncFormatter, MaxNLocator, MultipleLocator
from matplotlib.transforms import ScaledTranslation
from numpy.typing import NDArray

from oceanbox.figures.style import GREY

if TYPE_CHECKING:
    from matplotlib.axes import Axes

__all__ = [
    "label_latitude",
    "label_longitude",
    "label_y",
    "legend_above",
    "mark_zero",
    "north_south",
    "round_levels",
    "set_letter",
    "split",
    "width_points",
]

Array = NDArray[np.float64]

_LABEL_POINTS = 26.0  # from the axes to the inner edge of the label of the y axis
_MARGIN_POINTS = 48.0  # beside axes, for the numbers and the label of the y axis
_LETTER_POINTS = 14.0  # kept free for the letter of the panel
_LEGEND_PAD = 0.4  # between the legend and the corner it stands at, in units of the size of its font
_GAP = 0.12  # between the axes of a stack, in units of their relative heights
_DEGREE_STEPS = (1.0, 2.0, 5.0, 10.0, 15.0, 20.0, 30.0)


def north_south(latitude: float) -> str:
    """A latitude as '30°N', '15°S' or '0°'."""
    if abs(latitude) < 1e-9:
        return "0°"
    return f"{abs(latitude):g}°{'N' if latitude > 0 else 'S'}"


def round_levels(low: float, high: float, about: int) -> Array:
    """Levels at round numbers that enclose a range, at most `about` + 1 steps; steps are 1, 2 or 5 times 10^n."""
    if not high > low:
        half = max(abs(low) * 0.05, 1e-12)
        low, high = low - half, high + half
    levels = MaxNLocator(nbins=about, steps=[1, 2, 5, 10]).tick_values(low, high)
    return np.asarray(levels, dtype=float)


def label_latitude(ax: Axes, axis: str, south: float, north: float) -> None:
    """Make 'x' or 'y' of the axes a latitude axis from `south` to `north`, degrees."""
    getattr(ax, f"set_{axis}lim")(south, north)
    target = getattr(ax, f"{axis}axis")
    target.set_major_locator(MultipleLocator(_degree_step(north - south, 7)))
    target.set_major_formatter(FuncFormatter(lambda value, _: north_south(value)))
    if axis == "y":
        label_y(ax, "Latitude")
    else:
        ax.set_xlabel("Latitude")


def label_longitude(ax: Axes, west: float, east: float) -> None:
    """Make the x axis a longitude axis, degrees east of the western wall."""
    ax.set_xlim(west, east)
    ax.xaxis.set_major_locator(MultipleLocator(_degree_step(east - west, 7)))
    ax.xaxis.set_major_formatter(FuncFormatter(lambda value, _: f"{value:g}°"))
    ax.set_xlabel("Longitude east of the western wall")


def mark_zero(ax: Axes) -> None:
    """A thin line where the quantity on the y axis is zero."""
    ax.axhline(0.0, color=GREY, linewidth=0.5, zorder=0.5)


def split(ax: Axes, heights: tuple[float, ...]) -> list[Axes]:
    """A stack of axes in the place of the given ones, top first, with one x axis.

    The given axes stay as the invisible frame of the stack, so that its edges line up with those of other panels.
    """
    ax.set_axis_off()
    ax.set_xlim(0.0, 1.0)
    total = sum(heights) + _GAP * (len(heights) - 1)
    top = 1.0
    stack: list[Axes] = []
    for row, height in enumerate(heights):
        share = height / total
        inner = ax.inset_axes((0.0, top - share, 1.0, share))
        if stack:
            inner.sharex(stack[0])
        inner.tick_params(labelbottom=row == len(heights) - 1)
        stack.append(inner)
        top -= share + _GAP / total
    return stack


def label_y(ax: Axes, text: str) -> None:
    """Label the y axis at a fixed distance, so that the labels of all panels line up."""
    figure = ax.get_figure(root=True)
    if figure is not None:
        left = ScaledTranslation(-_LABEL_POINTS / 72.0, 0.0, figure.dpi_scale_trans)
        ax.yaxis.set_label_coords(0.0, 0.5, transform=ax.transAxes + left)
    ax.set_ylabel(text)


def width_points(ax: Axes) -> float:
    """Width that axes will have when the layout is solved, estimated from their place in the grid; in points."""
    figure, place = ax.get_figure(root=True), ax.get_subplotspec()
    if figure is None or place is None:
        return float(ax.bbox.width * 72.0 / (figure.dpi if figure is not None else 72.0))
    column = figure.get_figwidth() * 72.0 / place.get_gridspec().ncols
    return float(column * len(place.colspan) - _MARGIN_POINTS)


def legend_above(ax: Axes, frame: Axes) -> None:
    """The legend over the right end of the axes, where no line can run into it; the letter is at the left end.

    frame  the axes of the whole panel, whose width tells how many entries fit side by side
    """
    _, labels = ax.get_legend_handles_labels()
    room = width_points(frame) - _LETTER_POINTS
    columns = next((n for n in range(len(labels), 1, -1) if _legend_points(labels, n) <= room), 1)
    ax.legend(loc="lower right", bbox_to_anchor=(1.0, 1.0), borderaxespad=_LEGEND_PAD, ncol=columns)


def set_letter(ax: Axes, letter: str) -> None:
    """The letter of a panel over the upper left corner."""
    ax.set_title(letter, loc="left", fontweight="bold")


def _legend_points(labels: list[str], columns: int) -> float:
    """Width of a legend with its labels in so many columns, points."""
    size = rcParams["legend.fontsize"]
    font = FontProperties(size=size)
    widths = [text_to_path.get_text_width_height_descent(label, font, ismath=False)[0] for label in labels]
    longest = [float(column.max()) for column in np.array_split(widths, columns)]
    handle = rcParams["legend.handlelength"] + rcParams["legend.handletextpad"]
    between = (len(longest) - 1) * rcParams["legend.columnspacing"]
    return float(sum(longest) + size * (len(longest) * handle + between + _LEGEND_PAD))


def _degree_step(extent: float, at_most: int) -> float:
    return next((step for step in _DEGREE_STEPS if extent / step <= at_most), 45.0)
