"""From a page and a study to a figure."""

from __future__ import annotations

from typing import TYPE_CHECKING

from matplotlib import rc_context
from matplotlib.figure import Figure

from oceanbox.figures.axes import set_letter
from oceanbox.figures.study_options import (
    Branches,
    BudgetBars,
    CaseMaps,
    CaseSeries,
    EquatorialSections,
    LatitudeLines,
    ScalarAgainstScalar,
    ScalarAlongAxis,
    ScalarMap,
    StudyPanel,
    Switches,
)
from oceanbox.figures.study_panels.against import scalar_against_scalar
from oceanbox.figures.study_panels.along_axis import scalar_along_axis
from oceanbox.figures.study_panels.bars import budget_bars
from oceanbox.figures.study_panels.branches import branches
from oceanbox.figures.study_panels.case_maps import case_maps
from oceanbox.figures.study_panels.cases import StudyData
from oceanbox.figures.study_panels.contours import scalar_map
from oceanbox.figures.study_panels.lines import case_series, equatorial_sections, latitude_lines
from oceanbox.figures.study_panels.sensitivity import sensitivity_bars
from oceanbox.figures.study_panels.switches import switches
from oceanbox.figures.style import RC, inches

if TYPE_CHECKING:
    from matplotlib.axes import Axes

    from oceanbox.figures.study_page import StudyPage

__all__ = ["compose_study", "draw_study_panel"]


def draw_study_panel(ax: Axes, study: StudyData, panel: StudyPanel) -> Axes:
    """Draw one panel of a study on the given axes.

    Returns the axes; those of a panel that holds several are their `child_axes`. Raises UnreadableResult if the study
    lacks what the panel shows.
    """
    with rc_context(dict(RC)):
        match panel:
            case ScalarAlongAxis():
                return scalar_along_axis(ax, study, panel)
            case ScalarAgainstScalar():
                return scalar_against_scalar(ax, study, panel)
            case ScalarMap():
                return scalar_map(ax, study, panel)
            case EquatorialSections():
                return equatorial_sections(ax, study, panel)
            case LatitudeLines():
                return latitude_lines(ax, study, panel)
            case CaseMaps():
                return case_maps(ax, study, panel)
            case BudgetBars():
                return budget_bars(ax, study, panel)
            case CaseSeries():
                return case_series(ax, study, panel)
            case Branches():
                return branches(ax, study, panel)
            case Switches():
                return switches(ax, study, panel)
            case _:
                return sensitivity_bars(ax, study, panel)


def compose_study(study: StudyData, page: StudyPage) -> Figure:
    """A fresh figure of the page, to be saved once: saving it again would solve its layout anew.

    Call it, and save the figure, inside `rc_context(RC)` of matplotlib.
    """
    width, height = page.size_mm()
    with rc_context(dict(RC)):
        figure = Figure(figsize=(inches(width), inches(height)), layout="constrained")
        rows = page.rows()
        grid = figure.add_gridspec(len(rows), page.columns, height_ratios=page.row_heights())
        for row, indices in enumerate(rows):
            column = 0
            for index in indices:
                span = page.span(index)
                ax = figure.add_subplot(grid[row, column : column + span])
                set_letter(draw_study_panel(ax, study, page.panels[index]), page.letter(index))
                column += span
        # Beside names of keys or cases, which need much room, others would be torn from their axes.
        figure.align_ylabels([ax for ax in figure.axes if ax.get_ylabel()])
    return figure
