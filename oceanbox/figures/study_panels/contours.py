"""A scalar over two axes of a study."""

from __future__ import annotations

from collections.abc import Iterable
from typing import TYPE_CHECKING

import numpy as np
from matplotlib.patheffects import withStroke
from numpy.typing import NDArray

from oceanbox.errors import UnreadableResult
from oceanbox.figures.axes import round_levels
from oceanbox.figures.study_options import DEPTH, ScalarMap
from oceanbox.figures.study_panels.axes import set_scale
from oceanbox.figures.study_panels.cases import StudyData
from oceanbox.figures.study_panels.marks import axis_label, extend_of
from oceanbox.figures.study_panels.points import is_ordered, positions, scalar_of
from oceanbox.figures.study_panels.words import short_label
from oceanbox.figures.style import DEEP_IS_DARK, INK, WARM_IS_LIGHT

if TYPE_CHECKING:
    import xarray as xr
    from matplotlib.axes import Axes
    from matplotlib.text import Text

__all__ = ["scalar_map"]

Array = NDArray[np.float64]

_LEVELS = 10
_DOT_POINTS = 2.6
_CLEAR = 0.06  # of the axes, within which a number would touch their edge


def scalar_map(ax: Axes, study: StudyData, options: ScalarMap) -> Axes:
    """Filled contours of a scalar between the cases, with a dot for each case: open where not in equilibrium.

    Between cases the scalar is taken as linear; next to a case without a result nothing is drawn.
    """
    x_axis = options.x_axis or study.first_axis(0)
    y_axis = options.y_axis or study.first_axis(1)
    values = _over(study, scalar_of(study, options.scalar), x_axis, y_axis, options)
    x, y = positions(study, x_axis).values, positions(study, y_axis).values
    levels = _levels(values, options)
    filled = ax.contourf(x, y, values, levels=levels, cmap=_colours(options.scalar), extend=extend_of(values, levels))
    lines = ax.contour(x, y, values, levels=levels, colors=INK, linewidths=0.4)
    # Not in line: a number that is taken away again would leave a gap.
    texts = ax.clabel(lines, levels=list(levels[1::2]), fontsize=6.0, fmt="%g", inline=False)
    _dots(ax, study, x_axis, y_axis, options)
    set_scale(ax, "x", options.x_scale)
    set_scale(ax, "y", options.y_scale)
    ax.set_xlabel(axis_label(study.along(x_axis)))
    ax.set_ylabel(axis_label(study.along(y_axis)))
    for text in texts:
        text.set_path_effects([withStroke(linewidth=2.0, foreground="white")])
    _drop_clipped(ax, texts)
    figure = ax.get_figure(root=False)
    if figure is not None:
        bar = figure.colorbar(filled, ax=ax, location="right", pad=0.02, aspect=30)
        bar.minorticks_off()
        bar.ax.tick_params(length=2.0)
        bar.set_label(short_label(options.scalar))
        if options.scalar.startswith(DEPTH):
            bar.ax.yaxis.set_inverted(True)
    return ax


def _drop_clipped(ax: Axes, texts: Iterable[Text]) -> None:
    """Take away numbers on contours that the edge of the axes would cut."""
    for text in list(texts):
        place = ax.transAxes.inverted().transform(ax.transData.transform(text.get_position()))
        if not np.all((place > _CLEAR) & (place < 1.0 - _CLEAR)):
            text.remove()


def _over(study: StudyData, array: xr.DataArray, x_axis: str, y_axis: str, options: ScalarMap) -> Array:
    """An array over (y axis, x axis) at the places of the panel."""
    for axis in (x_axis, y_axis):
        along = study.along(axis)
        if not is_ordered(along) or along.size < 2:
            raise UnreadableResult(
                f"axis {axis}: got {'one place' if along.size < 2 else 'names, or a sample'}; contours need an axis of two "
                "numbers or more; draw this scalar along another axis"
            )
    chosen = study.select(array, options.at)
    if set(chosen.dims) != {x_axis, y_axis}:
        others = [str(dim) for dim in chosen.dims if dim not in (x_axis, y_axis)]
        raise UnreadableResult(
            f"axes: got cases over {', '.join(map(str, chosen.dims))}; contours show {x_axis} and {y_axis}; "
            f"name places on the others with at: [{(others or [x_axis])[0]}=...]"
        )
    return chosen.transpose(y_axis, x_axis).values.astype(float)


def _levels(values: Array, options: ScalarMap) -> Array:
    known = values[np.isfinite(values)]
    if known.size == 0:
        raise UnreadableResult(f"{options.scalar}: got no case with a number; run the study, or draw another scalar")
    low = float(known.min()) if options.lowest is None else options.lowest
    high = float(known.max()) if options.highest is None else options.highest
    return round_levels(low, high, _LEVELS)


def _colours(scalar: str) -> str:
    if scalar.startswith(DEPTH):
        return DEEP_IS_DARK
    return WARM_IS_LIGHT if "temperature" in scalar else "viridis"


def _dots(ax: Axes, study: StudyData, x_axis: str, y_axis: str, options: ScalarMap) -> None:
    x, y = np.meshgrid(positions(study, x_axis).values, positions(study, y_axis).values)
    settled, done, failed = (
        _over(study, array, x_axis, y_axis, options).astype(bool) for array in (study.settled, study.done, study.failed)
    )
    for mask, marker, size, face in (
        (done & settled, "o", _DOT_POINTS, INK),
        (done & ~settled, "o", _DOT_POINTS + 0.8, "white"),
        (failed, "x", _DOT_POINTS + 1.4, INK),
    ):
        if mask.any():  # an empty line that is not clipped has no extent, and the layout would collapse
            ax.plot(
                x[mask],
                y[mask],
                linestyle="none",
                marker=marker,
                markersize=size,
                color=INK,
                markerfacecolor=face,
                markeredgewidth=0.7,
                clip_on=False,
                zorder=4,
            )
