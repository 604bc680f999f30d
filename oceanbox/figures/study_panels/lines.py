"""A line for each case: along the equator, by latitude, against time."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from oceanbox import names
from oceanbox.diagnostics.geometry import Geometry
from oceanbox.diagnostics.labelled import array_of
from oceanbox.figures import fields
from oceanbox.figures.axes import label_latitude, label_longitude, mark_zero
from oceanbox.figures.study_options import CaseSeries, EquatorialSections, LatitudeLines
from oceanbox.figures.study_panels.along_axis import label_scalars
from oceanbox.figures.study_panels.cases import CaseView, StudyData
from oceanbox.figures.study_panels.marks import CaseColours, show_colours
from oceanbox.figures.study_panels.words import drawn, label_of, unit_of

if TYPE_CHECKING:
    from matplotlib.axes import Axes

__all__ = ["case_series", "equatorial_sections", "latitude_lines"]

Array = NDArray[np.float64]

_UNSETTLED_DASHES = (0, (3, 1.5))
_LATITUDE_WORDS = {
    "northward_heat_transport": "Northward heat transport",
    "entrainment_south_of": "Warm water made to the south",
    "transformation_south_of": "Warm water destroyed to the south",
    "overturning": "Warm water carried northward",
}


def equatorial_sections(ax: Axes, study: StudyData, options: EquatorialSections) -> Axes:
    """Thermocline depth (m, downward) or surface temperature (degC) within 2 degrees of the equator."""
    cases = study.cases(options.at, options.cases)
    west, east = np.inf, -np.inf
    for case, colour in zip(cases, CaseColours.of_cases(cases), strict=True):
        result = case.read()
        section = fields.equatorial_section(result)
        _line(
            ax,
            section.longitude,
            section.depth if options.field == "thermocline_depth" else section.temperature,
            case,
            colour,
        )
        faces = fields.degrees_of(Geometry.of(result)).x_face
        west, east = min(west, float(faces[0])), max(east, float(faces[-1]))
    label_longitude(ax, west, east)
    if options.field == "thermocline_depth":
        ax.set_ylabel("Thermocline depth (m)")
        ax.yaxis.set_inverted(True)
    else:
        ax.set_ylabel("Surface temperature (°C)")
    show_colours(ax, CaseColours.legend_of_cases(study, cases), frame=ax)
    return ax


def latitude_lines(ax: Axes, study: StudyData, options: LatitudeLines) -> Axes:
    """A function of latitude, in PW or Sv."""
    cases = study.cases(options.at, options.cases)
    unit = drawn(options.field, names.lookup(options.field).units)
    mark_zero(ax)
    south, north = np.inf, -np.inf
    for case, colour in zip(cases, CaseColours.of_cases(cases), strict=True):
        result = case.read()
        latitude = fields.degrees_of(Geometry.of(result)).y_face
        _line(ax, latitude, array_of(result, options.field) / unit.divisor, case, colour)
        south, north = min(south, float(latitude[0])), max(north, float(latitude[-1]))
    label_latitude(ax, "x", south, north)
    ax.set_ylabel(label_of(_LATITUDE_WORDS[options.field], unit))
    show_colours(ax, CaseColours.legend_of_cases(study, cases), frame=ax)
    return ax


def case_series(ax: Axes, study: StudyData, options: CaseSeries) -> Axes:
    """A scalar against model time, years; each point is a mean over the interval that ends there."""
    cases = study.cases(options.at, options.cases)
    divisor = unit_of(options.scalar).divisor
    latest = options.from_year
    for case, colour in zip(cases, CaseColours.of_cases(cases), strict=True):
        result = case.read()
        time = fields.years(result)
        shown = (time >= options.from_year) & (time <= (np.inf if options.to_year is None else options.to_year))
        _line(ax, time[shown], fields.series(result, options.scalar)[shown] / divisor, case, colour)
        latest = max(latest, float(time[shown].max(initial=options.from_year)))
    if latest > options.from_year:
        ax.set_xlim(options.from_year, options.to_year or latest)
    ax.set_xlabel("Model time (years)")
    label_scalars(ax, (options.scalar,))
    show_colours(ax, CaseColours.legend_of_cases(study, cases), frame=ax)
    return ax


def _line(ax: Axes, x: Array, y: Array, case: CaseView, colour: str) -> None:
    """A line, dashed where the case is not in equilibrium."""
    ax.plot(x, y, color=colour, linestyle="solid" if case.settled else _UNSETTLED_DASHES)
