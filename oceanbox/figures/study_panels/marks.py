"""How cases are told apart: colours, with the legend or the colour bar that says what they mean."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal, NamedTuple

import matplotlib as mpl
import numpy as np
from matplotlib.cm import ScalarMappable
from matplotlib.colors import BoundaryNorm, ListedColormap, to_hex
from matplotlib.ticker import NullLocator
from numpy.typing import NDArray

from oceanbox.figures.study_panels.axes import legend_over
from oceanbox.figures.study_panels.cases import CaseView, Place, StudyData
from oceanbox.figures.study_panels.words import drawn, label_of, shown_name
from oceanbox.figures.style import GREY, LINES

if TYPE_CHECKING:
    import xarray as xr
    from matplotlib.axes import Axes

__all__ = [
    "MARKERS",
    "CaseColours",
    "Look",
    "axis_label",
    "case_words",
    "extend_of",
    "look_of_place",
    "sequence",
    "show_colours",
    "varying_number",
]

Dashes = str | tuple[int, tuple[float, ...]]

MARKERS = "osD^vP"
_TELLABLE = len(LINES)  # lines that a reader can tell apart without an order
_MOST_PLACES = 2  # on which cases differ; more are not said in a legend
_TICKS = 8  # numbers beside a colour bar
_LIGHTEST = 0.86  # of the colour map; lighter lines vanish on white


@dataclass(frozen=True)
class CaseColours:
    """What stands for what: colours of cases, or of places on an axis.

    colours  one each
    labels   what each is, '' where there are too many to say; in rising order where there is a title
    title    of a colour bar, '' where a legend names them
    """

    colours: tuple[str, ...]
    labels: tuple[str, ...]
    title: str = ""

    @classmethod
    def of_cases(cls, cases: Sequence[CaseView]) -> list[str]:
        """The colour of each case: in the order of the number that varies where there is one; grey for too many."""
        axis = varying_number(cases)
        if axis is not None:
            by_place = cls.of_places([case.places[axis] for case in cases])
            return [by_place[case.places[axis]] for case in cases]
        if len(cases) <= _TELLABLE:
            return [line.color for _, line in zip(cases, LINES, strict=False)]
        return [GREY] * len(cases)

    @classmethod
    def legend_of_cases(cls, study: StudyData, cases: Sequence[CaseView]) -> CaseColours:
        """What the colours of cases mean."""
        axis = varying_number(cases)
        if axis is not None:
            return cls.legend_of_axis(study.along(axis), [case.places[axis] for case in cases])
        words = case_words(study, cases) if len(cases) <= _TELLABLE else [""] * len(cases)
        return cls(tuple(cls.of_cases(cases)), tuple(words))

    @staticmethod
    def of_places(places: Sequence[Place]) -> dict[Place, str]:
        """Colour of each place on an axis: from dark to light in the order of numbers, colours that differ for names."""
        if all(isinstance(place, float) for place in places):
            values = sorted({float(place) for place in places})
            return dict(zip(values, sequence(len(values)), strict=True))
        words = list(dict.fromkeys(places))
        return {word: LINES[index % _TELLABLE].color for index, word in enumerate(words)}

    @classmethod
    def legend_of_axis(cls, along: xr.DataArray, places: Sequence[Place]) -> CaseColours:
        """What the colours of places on an axis mean."""
        colours = cls.of_places(places)
        numbers = [place for place in colours if isinstance(place, float)]
        if not numbers:
            return cls(tuple(colours.values()), tuple(str(place) for place in colours))
        divisor = drawn(str(along.name), along.attrs.get("units", "")).divisor
        labels = tuple(f"{place / divisor:.4g}".replace("-", "−") for place in numbers)
        return cls(tuple(colours.values()), labels, axis_label(along))


class Look(NamedTuple):
    """How the cases at one place on an axis are drawn; `label` is '' where a colour bar says what the place is."""

    color: str
    linestyle: Dashes
    marker: str
    label: str


def look_of_place(places: Sequence[Place], index: int) -> Look:
    """Numbers are told apart by colour alone, names also by dashes and marks, for grey print."""
    place = places[index]
    colour = CaseColours.of_places(places)[place]
    if isinstance(place, float):
        return Look(colour, "solid", MARKERS[0], "")
    number = list(dict.fromkeys(places)).index(place) % _TELLABLE
    return Look(colour, LINES[number].linestyle, MARKERS[number], place)


def varying_number(cases: Sequence[CaseView]) -> str | None:
    """The one axis on which cases differ, if it is one of numbers."""
    axes = dict.fromkeys(name for case in cases for name in case.places)
    varying = [name for name in axes if len({case.places.get(name) for case in cases}) > 1]
    if len(varying) != 1 or any(isinstance(case.places.get(varying[0], ""), str) for case in cases):
        return None
    return varying[0]


def sequence(count: int) -> tuple[str, ...]:
    """Colours from dark to light, evenly spaced."""
    return tuple(to_hex(mpl.colormaps["viridis"](_LIGHTEST * index / max(count - 1, 1))) for index in range(count))


def axis_label(along: xr.DataArray) -> str:
    """Name and unit of an axis of the study as they stand on axes."""
    words = str(along.attrs.get("long_name", along.name)).rstrip(".")
    words = words.removeprefix("The ").removeprefix("A ")
    return label_of(words[:1].upper() + words[1:], drawn(str(along.name), along.attrs.get("units", "")))


def show_colours(ax: Axes, colours: CaseColours, frame: Axes) -> None:
    """A colour bar at the right of the panel where a number orders the cases, else a legend over it.

    ax     the axes that the legend stands over, the top ones of the panel
    frame  the axes of the whole panel
    """
    count = len(colours.colours)
    figure = frame.get_figure(root=False)
    if count < 2 or figure is None or not any(colours.labels):
        return
    if colours.title:
        ticks = np.unique(np.linspace(0, count - 1, min(count, _TICKS)).round().astype(int))
        shown = ScalarMappable(BoundaryNorm(np.arange(count + 1), count), ListedColormap(list(colours.colours)))
        bar = figure.colorbar(shown, ax=frame, location="right", pad=0.02, aspect=30, ticks=ticks + 0.5)
        bar.ax.set_yticklabels([colours.labels[tick] for tick in ticks])
        bar.ax.yaxis.set_minor_locator(NullLocator())
        bar.ax.tick_params(length=0.0)
        bar.set_label(colours.title)
        return
    for colour, label in zip(colours.colours, colours.labels, strict=True):
        ax.plot([], [], color=colour, label=label)
    legend_over(ax, frame=frame)


def extend_of(values: NDArray[np.float64], levels: NDArray[np.float64]) -> Literal["neither", "both", "min", "max"]:
    """At which ends of a colour scale numbers lie beyond the levels; NaN is ignored."""
    below, above = np.nanmin(values) < levels[0], np.nanmax(values) > levels[-1]
    if below:
        return "both" if above else "min"
    return "max" if above else "neither"


def case_words(study: StudyData, cases: Sequence[CaseView]) -> list[str]:
    """What tells each case from the others: its places on the axes that vary, with their units, or its name."""
    axes = dict.fromkeys(name for case in cases for name in case.places)
    varying = [name for name in axes if len({case.places.get(name) for case in cases}) > 1]
    if not varying or len(varying) > _MOST_PLACES:
        return [shown_name(case.name) for case in cases]
    return [", ".join(_place_words(study, axis, case.places[axis]) for axis in varying) for case in cases]


def _place_words(study: StudyData, axis: str, place: Place) -> str:
    if isinstance(place, str):
        return shown_name(place)
    unit = drawn(axis, study.along(axis).attrs.get("units", ""))
    return f"{place / unit.divisor:.4g} {unit.unit}".strip().replace("-", "−")
