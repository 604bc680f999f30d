"""One scalar against another."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from oceanbox.errors import UnreadableResult
from oceanbox.figures.study_options import ScalarAgainstScalar
from oceanbox.figures.study_panels.along_axis import label_scalars
from oceanbox.figures.study_panels.axes import legend_over, set_scale
from oceanbox.figures.study_panels.cases import StudyData
from oceanbox.figures.study_panels.laws import Law, configured_log_law, fitted_log_law
from oceanbox.figures.study_panels.marks import MARKERS, CaseColours, Look, look_of_place, show_colours
from oceanbox.figures.study_panels.points import draw_points, groups, scalar_of, spread_of
from oceanbox.figures.study_panels.words import short_label
from oceanbox.figures.style import INK, LINES

if TYPE_CHECKING:
    from matplotlib.axes import Axes

__all__ = ["law_against", "scalar_against_scalar"]

Array = NDArray[np.float64]

_LAW_POINTS = 200
_DASHES = ((0, (4, 1.5)), (0, (1, 1.2)))


def scalar_against_scalar(ax: Axes, study: StudyData, options: ScalarAgainstScalar) -> Axes:
    """One scalar against another, a mark for each case, joined along an axis or coloured by one where asked."""
    x, y = ((scalar_of(study, name), spread_of(study, name, options.spread)) for name in (options.x, options.y))
    coloured = options.coloured_by
    places = study.places(coloured) if coloured is not None else []
    for place, points in groups(study, x, y, _inner(study, options), options.at):
        look = Look(*LINES[0], MARKERS[0], "")
        if coloured is not None:
            look = look_of_place(places, place[str(study.along(coloured).dims[0])])
        dashes = look.linestyle if options.joined_along is not None else "none"
        draw_points(ax, points, look.color, label=look.label or "_nolegend_", linestyle=dashes, marker=look.marker)
    for law, dashes in zip(law_against(study, options), _DASHES, strict=False):
        if law.label:
            ratio, depth = _smooth(study.select(x[0], options.at).values.ravel(), law.depth.values.ravel())
            ax.plot(ratio, depth, color=INK, linestyle=dashes, linewidth=0.9, label=law.label, zorder=2.5)
    if coloured is not None and isinstance(places[0], float):
        show_colours(ax, CaseColours.legend_of_axis(study.along(coloured), places), frame=ax)
    legend_over(ax, frame=ax)
    ax.set_xlabel(short_label(options.x))
    set_scale(ax, "x", options.x_scale)
    set_scale(ax, "y", options.y_scale)
    label_scalars(ax, (options.y,))
    return ax


def _smooth(ratio: Array, depth: Array) -> tuple[Array, Array]:
    """A law between the cases at which it is known: linear in the logarithm of the ratio, as the log law is."""
    known = np.isfinite(ratio) & np.isfinite(depth) & (ratio > 0.0)
    logarithm, order = np.log(ratio[known]), np.argsort(ratio[known])
    fine = np.linspace(logarithm.min(), logarithm.max(), _LAW_POINTS)
    return np.exp(fine), np.interp(fine, logarithm[order], depth[known][order])


def law_against(study: StudyData, options: ScalarAgainstScalar) -> list[Law]:
    """The laws that a panel draws; none unless it asks for one."""
    if options.theory == "none":
        return []
    laws = {
        "fitted": (fitted_log_law,),
        "configured": (configured_log_law,),
        "both": (fitted_log_law, configured_log_law),
    }
    if options.x == "upwelling_ratio_tropics":
        return [law(study, options.y, "tropics", options.at) for law in laws[options.parameters]]
    return [law(study, options.y, "basin", options.at) for law in laws[options.parameters]]


def _inner(study: StudyData, options: ScalarAgainstScalar) -> list[str]:
    """The dimensions along which marks are drawn together, in one colour and, where asked, joined."""
    dims = [str(dim) for dim in study.select(study.done, options.at).dims]
    coloured = [] if options.coloured_by is None else [str(dim) for dim in study.along(options.coloured_by).dims]
    joined = options.joined_along
    if joined is None:
        return [dim for dim in dims if dim not in coloured]
    if joined not in dims or joined in coloured:
        free = [dim for dim in dims if dim not in coloured]
        raise UnreadableResult(
            f"joined_along {joined}: got no such axis, or the one that colours; marks can be joined along "
            f"{', '.join(free) or 'none'}; name one of these"
        )
    return [joined]
