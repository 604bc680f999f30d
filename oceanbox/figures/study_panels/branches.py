"""Both ways of a branch study, with the intervals that bracket its jumps."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from oceanbox.errors import UnreadableResult
from oceanbox.figures.axes import legend_above
from oceanbox.figures.study_options import Branches
from oceanbox.figures.study_panels.along_axis import label_scalars
from oceanbox.figures.study_panels.cases import StudyData
from oceanbox.figures.study_panels.marks import axis_label
from oceanbox.figures.study_panels.points import draw_points, groups, mark_failed, positions, scalar_of, spread_of
from oceanbox.figures.study_panels.words import unit_of
from oceanbox.figures.style import LINES

if TYPE_CHECKING:
    from matplotlib.axes import Axes

__all__ = ["branches", "measure_of"]

_WAYS = {"up": (LINES[0], ">"), "down": (LINES[1], "<")}
_MEASURE_ATTRIBUTE = "oceanbox_branch_measure"
_NARROWEST = 0.004  # of the axis: a bracket narrower than a line would not be seen


def branches(ax: Axes, study: StudyData, options: Branches) -> Axes:
    """The scalar against the key on the way up and down; jumps are shaded between the values that bracket them."""
    scalar = options.scalar or measure_of(study)
    x, y = positions(study, "parameter"), (scalar_of(study, scalar), spread_of(study, scalar, options.spread))
    names = [str(name) for name in study.along("direction").values]
    for place, points in groups(study, (x, None), y, ["parameter"], ()):
        name = names[place["direction"]]
        line, marker = _WAYS[name]
        draw_points(ax, points, line.color, linestyle=line.linestyle, marker=marker, label=name)
    _draw_probes(ax, study, scalar)
    _shade_jumps(ax, study, x.values)
    mark_failed(ax, np.broadcast_to(x.values, study.failed.shape)[study.failed.values])
    ax.set_xlabel(axis_label(study.along("parameter")))
    label_scalars(ax, (scalar,))
    legend_above(ax, frame=ax)
    return ax


def measure_of(study: StudyData) -> str:
    """The scalar in which a branch study looked for jumps. Raises UnreadableResult for another kind of study."""
    if _MEASURE_ATTRIBUTE not in study.dataset.attrs:
        raise UnreadableResult(
            f"attribute {_MEASURE_ATTRIBUTE}: got a study without it; branches are drawn of a branch study; "
            "leave this panel out"
        )
    return str(study.dataset.attrs[_MEASURE_ATTRIBUTE])


def _draw_probes(ax: Axes, study: StudyData, scalar: str) -> None:
    """Small marks at what was found while a jump was bracketed."""
    found = study.dataset.get(f"probe_{scalar}")
    if found is None:
        return
    divisor = unit_of(scalar).divisor
    ways = study.dataset["probe_direction"].values.astype(str)
    for way, (line, _) in _WAYS.items():
        mine = ways == way
        ax.plot(
            study.dataset["probe_parameter"].values[mine],
            found.values[mine] / divisor,
            linestyle="none",
            marker=".",
            markersize=3.0,
            color=line.color,
        )


def _shade_jumps(ax: Axes, study: StudyData, x: np.ndarray) -> None:
    """A band between the values that bracket a jump, in the colour of the way on which it was met."""
    if "jump_lower" not in study.dataset:
        return
    least = _NARROWEST * float(np.ptp(x))
    for way, low, high in zip(
        study.dataset["jump_direction"].values.astype(str),
        study.dataset["jump_lower"].values,
        study.dataset["jump_upper"].values,
        strict=True,
    ):
        middle, half = 0.5 * (low + high), 0.5 * max(high - low, least)
        ax.axvspan(middle - half, middle + half, color=_WAYS[way][0].color, alpha=0.25, linewidth=0, zorder=0.4)
