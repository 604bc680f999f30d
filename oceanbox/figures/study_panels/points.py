"""From scalars over the axes of a study to the marks and lines of a panel."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Literal

import numpy as np
from numpy.typing import NDArray

from oceanbox.figures.study_panels.cases import StudyData
from oceanbox.figures.study_panels.words import drawn, unit_of
from oceanbox.figures.style import INK

if TYPE_CHECKING:
    import xarray as xr
    from matplotlib.axes import Axes

__all__ = [
    "MARK_POINTS",
    "Points",
    "draw_points",
    "groups",
    "is_ordered",
    "mark_failed",
    "positions",
    "scalar_of",
    "spread_of",
]

Array = NDArray[np.float64]

MARK_POINTS = 3.6


@dataclass(frozen=True)
class Points:
    """One number of each of several cases, with what is known of it; all of one shape.

    x, y               in the units of the axes; NaN where there is none
    x_spread, y_spread standard deviations within the window, NaN where not known
    settled            False where the case is not in equilibrium
    """

    x: Array
    y: Array
    x_spread: Array
    y_spread: Array
    settled: NDArray[np.bool_]


def scalar_of(study: StudyData, name: str) -> xr.DataArray:
    """A scalar of all cases in the unit it is drawn in."""
    return study.scalar(name) / unit_of(name).divisor


def spread_of(study: StudyData, name: str, spread: Literal["bars", "none"]) -> xr.DataArray:
    """Its standard deviation within the window, NaN where it is not known or no bars are wanted."""
    return (study.spread(name) / unit_of(name).divisor).where(spread == "bars")


def positions(study: StudyData, axis: str) -> xr.DataArray:
    """Where the cases lie along an axis: numbers in the unit they are drawn in, whole numbers in order for names."""
    along = study.along(axis)
    if along.dtype.kind in "fiu":
        return along.astype(float) / drawn(axis, along.attrs.get("units", "")).divisor
    return along.copy(data=np.arange(along.size, dtype=float).reshape(along.shape))


def is_ordered(along: xr.DataArray) -> bool:
    """Whether cases lie in an order along an axis: not so for names, and for the numbers of a sample."""
    return bool(along.dtype.kind in "fiu" and along.dims == (along.name,))


def groups(
    study: StudyData,
    x: tuple[xr.DataArray, xr.DataArray | None],
    y: tuple[xr.DataArray, xr.DataArray],
    inner: Sequence[str],
    at: Sequence[str],
) -> Iterator[tuple[dict[str, int], Points]]:
    """The cases at some places, those along the `inner` dimensions together, with the index of each group on the others.

    x, y  numbers and their spread; positions along an axis have none
    """
    import xarray as xr

    done = study.select(study.done, at)
    given = [x[0], xr.full_like(x[0], np.nan) if x[1] is None else x[1], *y, study.settled]
    chosen = [study.select(array, [place for place in at if place.partition("=")[0] in array.dims]) for array in given]
    outer = [str(dim) for dim in done.dims if dim not in inner]
    arrays = [array.broadcast_like(done).transpose(*outer, ...) for array in chosen]
    for index in np.ndindex(*(done.sizes[dim] for dim in outer)):
        xs, dx, ys, dy, settled = (np.asarray(array.values[index], dtype=float).ravel() for array in arrays)
        yield dict(zip(outer, index, strict=True)), Points(xs, ys, dx, dy, settled.astype(bool))


def draw_points(ax: Axes, points: Points, colour: str, **style: Any) -> None:
    """Marks with bars, joined by a line unless its style is 'none'; open where a case is not in equilibrium.

    style  of the line: `linestyle`, `label`, `marker`
    """
    known = np.isfinite(points.x) & np.isfinite(points.y)
    x, y, settled = points.x[known], points.y[known], points.settled[known]
    across, up = (np.nan_to_num(spread[known]) for spread in (points.x_spread, points.y_spread))
    if across.any() or up.any():
        ax.errorbar(
            x,
            y,
            xerr=across if across.any() else None,
            yerr=up if up.any() else None,
            fmt="none",
            ecolor=colour,
            elinewidth=0.7,
            capsize=1.5,
            capthick=0.7,
        )
    marks: dict[str, Any] = {"marker": "o", "markersize": MARK_POINTS, "color": colour, "label": "_nolegend_"} | style
    ax.plot(x, y, **marks)
    opened = marks | {"linestyle": "none", "label": "_nolegend_", "markerfacecolor": "white"}
    ax.plot(x[~settled], y[~settled], **opened)


def mark_failed(ax: Axes, x: Array) -> None:
    """A small cross at the foot of the axes where a case has failed."""
    foot = np.full(x.shape, 0.03)
    ax.plot(x, foot, transform=ax.get_xaxis_transform(), linestyle="none", marker="x", markersize=3.5, color=INK)
