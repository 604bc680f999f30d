"""Scalars along an axis of a study."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

import numpy as np

from oceanbox.errors import UnreadableResult
from oceanbox.figures.study_options import DEPTH, ScalarAlongAxis
from oceanbox.figures.study_panels.axes import legend_over, set_names, set_scale
from oceanbox.figures.study_panels.cases import StudyData
from oceanbox.figures.study_panels.laws import Law, configured_log_law, fitted_log_law, scale_law
from oceanbox.figures.study_panels.marks import MARKERS, CaseColours, Look, axis_label, look_of_place, show_colours
from oceanbox.figures.study_panels.points import (
    draw_points,
    groups,
    is_ordered,
    mark_failed,
    positions,
    scalar_of,
    spread_of,
)
from oceanbox.figures.study_panels.words import LABELS, label_of, short_label, shown_name, unit_of
from oceanbox.figures.style import INK, LINES

if TYPE_CHECKING:
    from matplotlib.axes import Axes

__all__ = ["label_scalars", "law_along", "scalar_along_axis", "second_axis"]

_LAW_DASHES = (0, (4, 1.5))
UNSAID = "_nolegend_"


def scalar_along_axis(ax: Axes, study: StudyData, options: ScalarAlongAxis) -> Axes:
    """Scalars against an axis, a line for each scalar or for each place on a second axis, with a law where asked."""
    axis = options.axis or study.first_axis()
    along, other = study.along(axis), second_axis(study, axis, options.at)
    if other is not None and len(options.scalars) > 1:
        raise UnreadableResult(
            f"scalars: got {len(options.scalars)} over the axes {axis} and {other}; over two axes one scalar can be drawn; "
            f"give one scalar, or name a place with at: [{other}=...]"
        )
    places = study.places(other) if other is not None else []
    # Beside a law the cases are marks alone: their line would hide it.
    law = law_along(study, options)
    dashes = "none" if (law is not None and law.label) or not is_ordered(along) else None
    labels = _labels(options.scalars)
    for name, line, marker in zip(options.scalars, LINES, MARKERS, strict=False):
        y = scalar_of(study, name), spread_of(study, name, options.spread)
        for place, points in groups(study, (positions(study, axis), None), y, _names(along.dims), options.at):
            look = Look(*line, marker, labels[name]) if other is None else look_of_place(places, place[other])
            draw_points(
                ax,
                points,
                look.color,
                label=look.label or UNSAID,
                linestyle=dashes or look.linestyle,
                marker=look.marker,
            )
    if law is not None and law.label:
        _draw_law(ax, study, law, options, axis)
    if other is not None and isinstance(places[0], float):
        show_colours(ax, CaseColours.legend_of_axis(study.along(other), places), frame=ax)
    legend_over(ax, frame=ax)
    _finish(ax, study, options, axis)
    label_scalars(ax, options.scalars)
    return ax


def law_along(study: StudyData, options: ScalarAlongAxis) -> Law | None:
    """The law that a panel draws beside its scalar, None where it asks for none."""
    depth = options.scalars[0]
    if options.theory == "none":
        return None
    if options.theory != "log_law":
        return scale_law(study, depth, options.theory, options.at)
    law = fitted_log_law if options.parameters == "fitted" else configured_log_law
    return law(study, depth, options.balance, options.at)


def second_axis(study: StudyData, axis: str, at: Sequence[str]) -> str | None:
    """The one other axis over which cases lie, None where there is none.

    Raises UnreadableResult where there are more: a panel has room for two.
    """
    left = _names(study.select(study.done, at).dims)
    others = [dim for dim in left if dim not in study.along(axis).dims]
    if len(others) > 1:
        raise UnreadableResult(
            f"axes: got cases over {', '.join(left)}; a panel shows {axis} and one more; "
            f"name places on the others with at: [{others[-1]}=...]"
        )
    return others[0] if others else None


def label_scalars(ax: Axes, scalars: Sequence[str]) -> None:
    """Label the y axis by a scalar, or by what several have in common; depths point downward."""
    depths = all(name.startswith(DEPTH) for name in scalars)
    ax.set_ylabel(short_label(scalars[0]) if len(scalars) == 1 else label_of(_common(scalars), unit_of(scalars[0])))
    if depths:
        ax.yaxis.set_inverted(True)


def _labels(scalars: Sequence[str]) -> dict[str, str]:
    """What a legend says of each of several scalars: what they do not share."""
    if len(scalars) == 1:
        return {scalars[0]: "_nolegend_"}
    heads = {LABELS[name].partition(", ")[0] for name in scalars}
    if len(heads) > 1:
        return {name: LABELS[name] for name in scalars}
    return {name: LABELS[name].partition(", ")[2] or "mean" for name in scalars}


def _common(scalars: Sequence[str]) -> str:
    """What several scalars are together."""
    heads = {LABELS[name].partition(", ")[0] for name in scalars}
    if len(heads) == 1:
        return heads.pop()
    if all(name.startswith(DEPTH) for name in scalars):
        return "Thermocline depth"
    return {"PW": "Heat flux", "Sv": "Volume transport"}.get(unit_of(scalars[0]).unit, "Value")


def _draw_law(ax: Axes, study: StudyData, law: Law, options: ScalarAlongAxis, axis: str) -> None:
    other = second_axis(study, axis, options.at)
    style: dict[str, Any] = {"linestyle": _LAW_DASHES, "linewidth": 0.9}
    if not is_ordered(study.along(axis)):
        style = {"linestyle": "none", "marker": "_", "markersize": 9.0}
    depth = law.depth / unit_of(options.scalars[0]).divisor
    places = study.places(other) if other is not None else []
    y = depth, depth * np.nan
    for place, points in groups(study, (positions(study, axis), None), y, _names(study.along(axis).dims), options.at):
        colour = CaseColours.of_places(places)[places[place[other]]] if other is not None else INK
        order = np.argsort(points.x)
        known = order[np.isfinite(points.y[order])]
        ax.plot(
            points.x[known],
            points.y[known],
            color=colour,
            zorder=2.5,
            **style,
        )
    ax.plot([], [], color=INK, label=law.label, **style)


def _finish(ax: Axes, study: StudyData, options: ScalarAlongAxis, axis: str) -> None:
    along, x = study.along(axis), positions(study, axis)
    failed = study.select(study.failed, options.at)
    across = [dim for dim in failed.dims if dim not in along.dims]
    mark_failed(ax, x.values[failed.any(across).values])
    if along.dtype.kind not in "fiu":
        set_names(ax, [shown_name(str(value)) for value in along.values.ravel()])
    else:
        set_scale(ax, "x", options.axis_scale)
    set_scale(ax, "y", "linear")
    ax.set_xlabel("" if axis == "case_name" else axis_label(along))


def _names(dims: Sequence[object]) -> list[str]:
    return [str(dim) for dim in dims]
