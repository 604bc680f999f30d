"""Both ways of a branch study, with the intervals that bracket its jumps."""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from numpy.typing import NDArray

from oceanbox.errors import UnreadableResult
from oceanbox.figures.study_options import Branches
from oceanbox.figures.study_panels.along_axis import label_scalars
from oceanbox.figures.study_panels.axes import legend_over, set_scale
from oceanbox.figures.study_panels.cases import StudyData
from oceanbox.figures.study_panels.marks import axis_label
from oceanbox.figures.study_panels.points import (
    MARK_POINTS,
    Points,
    draw_points,
    groups,
    mark_failed,
    positions,
    scalar_of,
    spread_of,
)
from oceanbox.figures.study_panels.words import unit_of
from oceanbox.figures.style import LINES

if TYPE_CHECKING:
    from matplotlib.axes import Axes

__all__ = ["Jump", "branches", "jumps_of", "measure_of"]

Array = NDArray[np.float64]

_WAYS = {"up": (LINES[0], ">"), "down": (LINES[1], "<")}
# What refining may have shown of a change that is large for one step and is no jump.
_NO_JUMPS = ("steep but continuous", "a jump provoked by the size of the step")
_MEASURE_ATTRIBUTE = "oceanbox_branch_measure"
_NARROWEST = 0.004  # of the axis: a bracket narrower than a line would not be seen


class Jump(NamedTuple):
    """A jump on the way 'up' or 'down': the values of the key that bracket it, the measure before and after."""

    way: str
    lower: float
    upper: float
    before: float
    after: float


def branches(ax: Axes, study: StudyData, options: Branches) -> Axes:
    """The scalar against the key on the way up and down; jumps are arrows, shaded between the values that bracket them."""
    scalar = options.scalar or measure_of(study)
    x, y = positions(study, "parameter"), (scalar_of(study, scalar), spread_of(study, scalar, options.spread))
    names = [str(name) for name in study.along("direction").values]
    for place, points in groups(study, (x, None), y, ["parameter"], ()):
        name = names[place["direction"]]
        line, marker = _WAYS[name]
        _draw_way(ax, study, scalar, name, points)
        draw_points(ax, points, line.color, linestyle="none", marker=marker)
        ax.plot([], [], label=name, marker=marker, markersize=MARK_POINTS, **line._asdict())
    _draw_jumps(ax, study, scalar, x.values)
    mark_failed(ax, np.broadcast_to(x.values, study.failed.shape)[study.failed.values])
    set_scale(ax, "x", "linear")
    set_scale(ax, "y", "linear")
    ax.set_xlabel(axis_label(study.along("parameter")))
    label_scalars(ax, (scalar,))
    legend_over(ax, frame=ax)
    return ax


def jumps_of(study: StudyData) -> list[Jump]:
    """The jumps of both ways, in the unit of the file, without those that smaller steps did not confirm."""
    if "jump_lower" not in study.dataset:
        return []
    columns = (study.dataset[f"jump_{name}"].values for name in ("direction", "lower", "upper", "from", "to", "nature"))
    return [
        Jump(str(way), float(lower), float(upper), float(before), float(after))
        for way, lower, upper, before, after, nature in zip(*columns, strict=True)
        if str(nature) not in _NO_JUMPS
    ]


def measure_of(study: StudyData) -> str:
    """The scalar in which a branch study looked for jumps. Raises UnreadableResult for another kind of study."""
    if _MEASURE_ATTRIBUTE not in study.dataset.attrs:
        raise UnreadableResult(
            f"attribute {_MEASURE_ATTRIBUTE}: got a study without it; branches are drawn of a branch study; "
            "leave this panel out"
        )
    return str(study.dataset.attrs[_MEASURE_ATTRIBUTE])


def _draw_way(ax: Axes, study: StudyData, scalar: str, way: str, points: Points) -> None:
    """The line of one way through its steps and what was found between them, broken where it jumps."""
    x, y = points.x, points.y
    if f"probe_{scalar}" in study.dataset:
        mine = study.dataset["probe_direction"].values.astype(str) == way
        between = study.dataset["probe_parameter"].values[mine]
        found = study.dataset[f"probe_{scalar}"].values[mine] / unit_of(scalar).divisor
        ax.plot(between, found, linestyle="none", marker=".", markersize=3.0, color=_WAYS[way][0].color)
        x, y = np.append(x, between), np.append(y, found)
    for jump in jumps_of(study):
        if jump.way == way:
            x, y = np.append(x, 0.5 * (jump.lower + jump.upper)), np.append(y, np.inf)
    order = np.argsort(x, kind="stable")
    order = order[~np.isnan(y[order])]  # a failed case is bridged, a jump (infinite) breaks the line
    ax.plot(x[order], np.where(np.isinf(y), np.nan, y)[order], **_WAYS[way][0]._asdict())


def _draw_jumps(ax: Axes, study: StudyData, scalar: str, x: Array) -> None:
    """A band between the values that bracket a jump, and an arrow along it, in the colour of the way it was met on."""
    least, divisor = _NARROWEST * float(np.ptp(x)), unit_of(scalar).divisor
    for jump in jumps_of(study):
        colour = _WAYS[jump.way][0].color
        middle, half = 0.5 * (jump.lower + jump.upper), 0.5 * max(jump.upper - jump.lower, least)
        ax.axvspan(middle - half, middle + half, color=colour, alpha=0.25, linewidth=0, zorder=0.4)
        if scalar == measure_of(study):
            ax.annotate(
                "",
                xy=(middle, jump.after / divisor),
                xytext=(middle, jump.before / divisor),
                arrowprops={"arrowstyle": "-|>", "color": colour, "linewidth": 0.8, "mutation_scale": 7},
            )
