"""From a page and a result to a figure."""

from __future__ import annotations

from typing import TYPE_CHECKING

from matplotlib import rc_context
from matplotlib.figure import Figure

from oceanbox.figures.axes import set_letter
from oceanbox.figures.options import (
    Approach,
    EquatorialSection,
    Exchange,
    HeatBudget,
    Panel,
    TemperatureMap,
)
from oceanbox.figures.panels.approach import approach
from oceanbox.figures.panels.budgets import exchange, heat_budget
from oceanbox.figures.panels.maps import temperature_map, thermocline_map
from oceanbox.figures.panels.section import equatorial_section
from oceanbox.figures.style import RC, inches

if TYPE_CHECKING:
    import xarray as xr
    from matplotlib.axes import Axes

    from oceanbox.figures.page import Page

__all__ = ["compose", "draw_panel"]


def draw_panel(ax: Axes, dataset: xr.Dataset, panel: Panel) -> Axes:
    """Draw one panel on the given axes.

    Returns the axes; those of a panel that is a stack are their `child_axes`, top first. Raises UnreadableResult if the
    dataset lacks what the panel shows.
    """
    with rc_context(dict(RC)):
        match panel:
            case TemperatureMap():
                return temperature_map(ax, dataset, panel)
            case EquatorialSection():
                return equatorial_section(ax, dataset, panel)
            case HeatBudget():
                return heat_budget(ax, dataset, panel)
            case Exchange():
                return exchange(ax, dataset, panel)
            case Approach():
                return approach(ax, dataset, panel)
            case _:
                return thermocline_map(ax, dataset, panel)


def compose(dataset: xr.Dataset, page: Page) -> Figure:
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
                set_letter(draw_panel(ax, dataset, page.panels[index]), page.letter(index))
                column += span
    return figure
