"""Terms of a budget in regions, for several cases."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from matplotlib.ticker import MaxNLocator

from oceanbox import names
from oceanbox.errors import UnreadableResult
from oceanbox.figures.axes import label_y, mark_zero, split, width_points
from oceanbox.figures.study_options import BudgetBars
from oceanbox.figures.study_panels.axes import slant_where_they_touch
from oceanbox.figures.study_panels.cases import StudyData
from oceanbox.figures.study_panels.marks import CaseColours, show_colours
from oceanbox.figures.study_panels.words import drawn, label_of

if TYPE_CHECKING:
    import xarray as xr
    from matplotlib.axes import Axes

__all__ = ["MOST_BARS", "TERM_WORDS", "budget_bars"]

MOST_BARS = 12
_HEADROOM = 0.1  # of the range of the bars and for each region, kept free for the name of the region
_WIDTH = 0.8  # of all bars of a term together

TERM_WORDS = {
    "surface_heat_flux": "surface",
    "heat_flux_prescribed": "prescribed",
    "heat_flux_restoring": "restoring",
    "heat_advection": "advection",
    "heat_mixing": "mixing",
    "outcrop_heat": "outcrop",
    "heat_storage": "storage",
    "heat_residual": "residual",
    "volume_convergence": "inflow",
    "entrainment_upwelling": "upwelling",
    "entrainment_diffusive": "diffusion",
    "entrainment_shoaling": "shoaling",
    "entrainment_prescribed": "prescribed",
    "transformation": "destroyed",
    "outcrop_volume": "outcrop",
    "volume_storage": "storage",
    "volume_residual": "residual",
    "virtual_salt_flux": "fresh water",
    "salt_advection": "advection",
    "salt_mixing": "mixing",
    "transformation_salt": "destroyed",
    "outcrop_salt": "outcrop",
    "salt_storage": "storage",
    "salt_residual": "residual",
}
"""Short names of the terms of all budgets."""


def budget_bars(ax: Axes, study: StudyData, options: BudgetBars) -> Axes:
    """Terms integrated over each region, a bar for each case; hatched where the case is not in equilibrium."""
    cases = study.cases(options.at, options.cases)
    if len(cases) > MOST_BARS:
        raise UnreadableResult(
            f"budget bars: got {len(cases)} cases; {MOST_BARS} bars for each term can be told apart; choose with cases or at"
        )
    unit = drawn(options.terms[0], names.lookup(f"region_{options.terms[0]}").units)
    frames = split(ax, (1.0,) * len(options.regions))
    width = _WIDTH / len(cases)
    centres = np.arange(len(options.terms), dtype=float)
    for number, (case, colour) in enumerate(zip(cases, CaseColours.of_cases(cases), strict=True)):
        result = case.read()
        for inner, region in zip(frames, options.regions, strict=True):
            inner.bar(
                centres + (number - 0.5 * (len(cases) - 1)) * width,
                [_integral(result, term, region) / unit.divisor for term in options.terms],
                width=0.9 * width,
                color=colour,
                hatch="" if case.settled else "////",
                edgecolor="white",
                linewidth=0.0,
            )
    for inner, region in zip(frames, options.regions, strict=True):
        mark_zero(inner)
        inner.yaxis.set_major_locator(MaxNLocator(nbins=4 if len(frames) > 1 else 8, steps=[1, 2, 5, 10]))
        inner.set_xlim(-0.5, len(options.terms) - 0.5)
        inner.tick_params(axis="x", length=0.0)
        words = region.replace("_", " ")
        low, high = inner.get_ylim()
        inner.set_ylim(low, high + _HEADROOM * len(frames) * (high - low))
        inner.text(0.99, 0.94, words[:1].upper() + words[1:], transform=inner.transAxes, ha="right", va="top")
        label_y(inner, label_of("Gain", unit))
    terms = [TERM_WORDS[term] for term in options.terms]
    frames[-1].set_xticks(centres, terms)
    slant_where_they_touch(frames[-1], terms, width_points(ax))
    show_colours(frames[0], CaseColours.legend_of_cases(study, cases), frame=ax)
    return ax


def _integral(result: xr.Dataset, term: str, region: str) -> float:
    name = f"region_{term}"
    if name not in result:
        raise UnreadableResult(
            f"{name}: got a result without it; budget bars need it; use the file as the run wrote it"
        )
    return float(result[name].sel(region=region))
