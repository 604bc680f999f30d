"""Axes of panels of a study: scales with few round numbers, and legends that keep clear of the letter."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise
from typing import TYPE_CHECKING, Literal

import numpy as np
from matplotlib import rcParams
from matplotlib.font_manager import FontProperties
from matplotlib.textpath import text_to_path
from matplotlib.ticker import FuncFormatter, LogLocator, MaxNLocator, NullFormatter

from oceanbox.figures.axes import width_points

if TYPE_CHECKING:
    from matplotlib.axes import Axes

__all__ = ["height_points", "legend_over", "set_names", "set_scale", "slant_where_they_touch"]

_SMALL, _LARGE = 1e-3, 1e5  # numbers that are written out
_SUPERSCRIPTS = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")
_STEPS = (1, 2, 5, 10)
_NUMBERS = 9  # at most so many steps between numbers on an axis
_MARGIN_POINTS = 48.0  # above and below axes, for the letter, the numbers and the label
_LETTER_POINTS = 14.0
_PER_LETTER = 0.6  # width of a letter, in sizes of the font
_BETWEEN = 0.4  # free between names along an axis, in sizes of the font
_SURE = 0.8  # of the estimated width of a panel, which colour bars in other rows make narrower


def set_scale(ax: Axes, axis: Literal["x", "y"], scale: Literal["linear", "logarithmic"]) -> None:
    """Make an axis linear or logarithmic, with numbers written out and few enough not to touch."""
    target = getattr(ax, f"{axis}axis")
    if scale == "linear":
        steps = _NUMBERS if axis == "y" else _steps_that_fit(ax)
        target.set_major_locator(MaxNLocator(nbins=steps, steps=_STEPS))
        return
    getattr(ax, f"set_{axis}scale")("log")
    target.set_major_locator(LogLocator(subs=(1.0, 2.0, 5.0)))
    target.set_major_formatter(FuncFormatter(lambda value, _: _number(value)))
    target.set_minor_formatter(NullFormatter())


def _number(value: float) -> str:
    """A number on a logarithmic axis, with a power of ten where it would be long."""
    if _SMALL <= abs(value) < _LARGE or value == 0.0:
        return f"{value:g}"
    mantissa, exponent = f"{value:.0e}".split("e")
    power = str(int(exponent)).translate(_SUPERSCRIPTS)
    return f"10{power}" if mantissa == "1" else f"{mantissa} × 10{power}"


def set_names(ax: Axes, names: Sequence[str]) -> None:
    """Names along the panel at 0, 1, 2 and so on, slanted where they would touch."""
    ax.set_xticks(range(len(names)), names)
    ax.set_xlim(-0.5, len(names) - 0.5)
    slant_where_they_touch(ax, names, width_points(ax))


def slant_where_they_touch(ax: Axes, names: Sequence[str], width: float) -> None:
    """Slant the names that stand evenly along axes of a width in points, where neighbours would touch."""
    size = float(rcParams["font.size"])
    lengths = [_text_points(name, size) for name in names]
    needed = max((0.5 * (one + next_one) for one, next_one in pairwise(lengths)), default=lengths[0]) + _BETWEEN * size
    if len(names) * needed > _SURE * width:
        ax.tick_params(axis="x", labelrotation=40.0)
        for text in ax.get_xticklabels():
            text.set_horizontalalignment("right")
            text.set_rotation_mode("anchor")


def _text_points(text: str, size: float) -> float:
    """Width of a text, in points, in the font of the figures."""
    font = FontProperties(family=rcParams["font.family"], size=size)
    return float(text_to_path.get_text_width_height_descent(text, font, ismath=False)[0])


def height_points(ax: Axes) -> float:
    """Height that axes will have when the layout is solved, estimated from their place in the grid; in points."""
    figure, place = ax.get_figure(root=True), ax.get_subplotspec()
    if figure is None or place is None:
        return float(ax.bbox.height * 72.0 / (figure.dpi if figure is not None else 72.0))
    ratios = np.asarray(place.get_gridspec().get_height_ratios(), dtype=float)
    share = float(ratios[list(place.rowspan)].sum() / ratios.sum())
    return max(float(figure.get_figheight() * 72.0 * share) - _MARGIN_POINTS, 1.0)


def _steps_that_fit(ax: Axes) -> int:
    """The most steps along the panel for which numbers keep apart."""
    low, high = sorted(ax.get_xlim())
    for steps in range(_NUMBERS, 2, -1):
        numbers = [
            value for value in MaxNLocator(nbins=steps, steps=_STEPS).tick_values(low, high) if low <= value <= high
        ]
        widest = max((len(f"{value:.6g}") for value in numbers), default=1)
        if len(numbers) * (widest + 1) * _PER_LETTER * float(rcParams["font.size"]) <= _SURE * width_points(ax):
            return steps
    return 2


def legend_over(ax: Axes, frame: Axes) -> None:
    """The legend over the right end of the axes, in as many columns as are sure to leave room for the letter.

    frame  the axes of the whole panel
    """
    handles, labels = ax.get_legend_handles_labels()
    if not labels:
        return
    size = float(rcParams["legend.fontsize"])
    handle = rcParams["legend.handlelength"] + rcParams["legend.handletextpad"] + rcParams["legend.columnspacing"]
    entry = size * handle + max(_text_points(label, size) for label in labels)
    columns = int((_SURE * width_points(frame) - _LETTER_POINTS) / entry)
    if columns == 0:  # even one is too wide: what stands in brackets goes below
        labels = [label.replace(" (", "\n(") for label in labels]
    columns = max(1, min(len(labels), columns))
    ax.legend(handles, labels, loc="lower right", bbox_to_anchor=(1.0, 1.0), borderaxespad=0.4, ncol=columns)
