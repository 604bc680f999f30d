"""Maps of one field side by side, one for each case, with one colour scale."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from matplotlib.colors import BoundaryNorm
from matplotlib.ticker import MultipleLocator
from numpy.typing import NDArray

from oceanbox import names
from oceanbox.diagnostics.geometry import Geometry
from oceanbox.diagnostics.labelled import array_of
from oceanbox.errors import UnreadableResult
from oceanbox.figures import fields
from oceanbox.figures.axes import label_latitude, label_longitude, round_levels, width_points
from oceanbox.figures.study_options import CaseMaps
from oceanbox.figures.study_panels.axes import height_points
from oceanbox.figures.study_panels.cases import CaseView, StudyData
from oceanbox.figures.study_panels.marks import case_words, extend_of
from oceanbox.figures.study_panels.words import drawn, field_label, label_of
from oceanbox.figures.style import DEEP_IS_DARK, WARM_IS_LIGHT

if TYPE_CHECKING:
    import xarray as xr
    from matplotlib.axes import Axes

__all__ = ["case_maps", "cases_shown"]

Array = NDArray[np.float64]

MOST_MAPS = 16
_LEVELS = 20
_GAP_ACROSS = 0.07  # between maps, in widths of a map
_LINE_POINTS, _GAP_POINTS, _BAR_POINTS = 9.0, 5.0, 30.0  # heights of a line of a title, of a gap, of the colour bar
_SIGNED = "RdBu_r"
_DEGREE_STEPS = (5.0, 10.0, 15.0, 20.0, 30.0, 45.0)
_TITLE_POINTS, _LETTER_POINTS = 6.5, 14.0
_PER_LETTER = 0.6  # width of a letter, in sizes of the font
_NUMBERS = 3  # at most so many on an axis of a small map


class _Map(NamedTuple):
    case: CaseView
    values: Array
    place: fields.Degrees


def case_maps(ax: Axes, study: StudyData, options: CaseMaps) -> Axes:
    """Maps of the top layer side by side; of a difference, the other cases minus the named one."""
    unit = drawn(options.field, names.lookup(options.field).units)
    maps = [_map(case, options.field, unit.divisor) for case in cases_shown(study, options)]
    if options.minus_case is not None:
        maps = _differences(maps, _map(study.cases((), (options.minus_case,))[0], options.field, unit.divisor))
    values = np.concatenate([item.values.ravel() for item in maps])
    signed = options.minus_case is not None or _has_two_signs(options.field, values)
    levels = _levels(values, options, signed)
    norm = BoundaryNorm(levels, 256, extend=extend_of(values, levels))
    across = options.maps_across or len(maps)
    titles = [_folded(words, ax, across) for words in case_words(study, [item.case for item in maps])]
    frames = _frames(ax, titles, across)
    for inner, item, text in zip(frames, maps, titles, strict=True):
        mesh = inner.pcolormesh(
            item.place.x_face,
            item.place.y_face,
            item.values,
            cmap=_colours(options.field, signed),
            norm=norm,
            rasterized=True,
        )
        inner.set_title(text, loc="right", fontsize=_TITLE_POINTS)
    _label(frames, maps, across)
    figure = ax.get_figure(root=False)
    if figure is not None:
        bar = figure.colorbar(
            mesh, ax=ax, location="bottom", pad=0.02, aspect=60, ticks=round_levels(levels[0], levels[-1], 8)
        )
        bar.minorticks_off()
        bar.ax.tick_params(length=2.0)
        words = field_label(options.field)
        difference = f" minus that of {options.minus_case}" if options.minus_case is not None else ""
        bar.set_label(label_of(words + difference, unit))
    return ax


def cases_shown(study: StudyData, options: CaseMaps) -> list[CaseView]:
    """The cases that have a map. Raises UnreadableResult where there are none, or more than a page holds."""
    cases = [case for case in study.cases(options.at, options.cases) if case.name != options.minus_case]
    if not 0 < len(cases) <= MOST_MAPS:
        raise UnreadableResult(
            f"case maps: got {len(cases)} cases; 1 to {MOST_MAPS} maps fit side by side; choose with cases or at"
        )
    return cases


def _map(case: CaseView, field: str, divisor: float) -> _Map:
    result: xr.Dataset = case.read()
    values = array_of(result, field) / divisor
    return _Map(case, values[0] if values.ndim == 3 else values, fields.degrees_of(Geometry.of(result)))


def _differences(maps: Sequence[_Map], base: _Map) -> list[_Map]:
    for item in maps:
        if item.values.shape != base.values.shape:
            raise UnreadableResult(
                f"minus_case {base.case.name}: got grids of {item.values.shape} and {base.values.shape} cells; "
                "differences need one grid; leave minus_case out"
            )
    return [item._replace(values=item.values - base.values) for item in maps]


def _frames(ax: Axes, titles: Sequence[str], across: int) -> list[Axes]:
    """Axes for maps in rows, in the place of the given ones, with room for titles of so many lines."""
    ax.set_axis_off()
    rows = -(-len(titles) // across)
    width = 1.0 / (across + _GAP_ACROSS * (across - 1))
    lines = max(title.count("\n") + 1 for title in titles)
    room = max(height_points(ax) - _BAR_POINTS, 1.0)
    gap = min((_LINE_POINTS * lines + _GAP_POINTS) / room, 0.5 / rows)
    height = (1.0 - gap * (rows - 1)) / rows
    found = []
    for index in range(len(titles)):
        row, column = divmod(index, across)
        left, top = column * width * (1 + _GAP_ACROSS), 1.0 - row * (height + gap)
        found.append(ax.inset_axes((left, top - height, width, height)))
    return found


def _folded(text: str, ax: Axes, across: int) -> str:
    """On two lines where the words over a map would run into the letter of the panel."""
    room = width_points(ax) / across - _LETTER_POINTS
    return text if _PER_LETTER * _TITLE_POINTS * len(text) <= room else text.replace(", ", "\n")


def _label(frames: Sequence[Axes], maps: Sequence[_Map], across: int) -> None:
    """Numbers and labels at the left and at the foot only."""
    for index, (inner, item) in enumerate(zip(frames, maps, strict=True)):
        west, east = float(item.place.x_face[0]), float(item.place.x_face[-1])
        label_longitude(inner, west, east)
        label_latitude(inner, "y", float(item.place.y_face[0]), float(item.place.y_face[-1]))
        step = next((step for step in _DEGREE_STEPS if (east - west) / step <= _NUMBERS), 60.0)
        inner.xaxis.set_major_locator(MultipleLocator(step))
        at_foot = index + across >= len(frames)
        inner.tick_params(labelbottom=at_foot, labelleft=index % across == 0)
        inner.set_xlabel("Longitude" if at_foot else "")
        if index % across:
            inner.set_ylabel("")


def _has_two_signs(field: str, values: Array) -> bool:
    return "temperature" not in field and bool(values.min() < 0.0 < values.max())


def _levels(values: Array, options: CaseMaps, signed: bool) -> Array:
    if signed and options.lowest is None and options.highest is None:
        # The colour of zero is white: the scale reaches equally far to both sides.
        size = float(np.abs(values).max()) or 1.0
        return round_levels(-size, size, _LEVELS)
    low = float(values.min()) if options.lowest is None else options.lowest
    high = float(values.max()) if options.highest is None else options.highest
    return round_levels(low, high, _LEVELS)


def _colours(field: str, signed: bool) -> str:
    if signed:
        return _SIGNED
    return WARM_IS_LIGHT if "temperature" in field else DEEP_IS_DARK
