"""Which keys matter: Sobol' indices or elasticities of a scalar."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from matplotlib.ticker import MaxNLocator
from numpy.typing import NDArray

from oceanbox.errors import UnreadableResult
from oceanbox.figures.study_options import SensitivityBars
from oceanbox.figures.study_panels.axes import legend_over
from oceanbox.figures.study_panels.cases import StudyData
from oceanbox.figures.study_panels.words import LABELS, key_words
from oceanbox.figures.style import GREY, INK, LINES

if TYPE_CHECKING:
    from matplotlib.axes import Axes

__all__ = ["has_indices", "sensitivity_bars"]

Array = NDArray[np.float64]

_HEIGHT = 0.38
_INDICES = (("sobol_first", "alone", LINES[0].color), ("sobol_total", "with interactions", LINES[5].color))


def sensitivity_bars(ax: Axes, study: StudyData, options: SensitivityBars) -> Axes:
    """Horizontal bars for each key: first and total Sobol' indices with their intervals, or elasticities with errors."""
    if has_indices(study, options.scalar):
        _draw_indices(ax, study, options)
    else:
        _draw_elasticities(ax, study, options)
    ax.invert_yaxis()
    ax.tick_params(axis="y", length=0.0)
    ax.xaxis.set_major_locator(MaxNLocator(nbins=6, steps=[1, 2, 5, 10]))
    ax.axvline(0.0, color=GREY, linewidth=0.5, zorder=0.5)
    return ax


def has_indices(study: StudyData, scalar: str) -> bool:
    """Whether a study found Sobol' indices of a scalar rather than elasticities. Raises UnreadableResult for neither."""
    for name, indices in ((f"sobol_total_{scalar}", True), (f"elasticity_{scalar}", False)):
        if name in study.dataset:
            return indices
    raise UnreadableResult(
        f"sensitivities of {scalar}: got a study without them; they are drawn of a sensitivity study with this measure; "
        "add it to the measures, or leave this panel out"
    )


def _draw_indices(ax: Axes, study: StudyData, options: SensitivityBars) -> None:
    total = study.dataset[f"sobol_total_{options.scalar}"].values
    order = _order(total, options)
    places = np.arange(order.size, dtype=float)
    for (name, label, colour), shift in zip(_INDICES, (-0.5, 0.5), strict=True):
        value, low, high = (
            study.dataset[f"{name}{end}_{options.scalar}"].values[order] for end in ("", "_lower", "_upper")
        )
        _bars(ax, places + shift * _HEIGHT, value, (value - low, high - value), colour, label)
    _label_keys(ax, study, options, order)
    ax.set_xlabel(f"{_words(options)}:\nshare of the variance (Sobol' index)")
    legend_over(ax, frame=ax)


def _draw_elasticities(ax: Axes, study: StudyData, options: SensitivityBars) -> None:
    value = study.dataset[f"elasticity_{options.scalar}"].values
    order = _order(np.abs(value), options)
    error = study.dataset[f"elasticity_step_error_{options.scalar}"].values[order]
    places = np.arange(order.size, dtype=float)
    _bars(ax, places, value[order], (error, error), LINES[0].color, "")
    _label_keys(ax, study, options, order)
    ax.set_xlabel(f"{_words(options)}:\nelasticity (% per %)")


def _words(options: SensitivityBars) -> str:
    return LABELS.get(options.scalar, options.scalar)


def _bars(ax: Axes, places: Array, value: Array, errors: tuple[Array, Array], colour: str, label: str) -> None:
    ax.barh(places, value, height=0.95 * _HEIGHT, color=colour, label=label or "_nolegend_")
    # An interval that does not hold the estimate itself can come of few resamples: its bar then ends at the estimate.
    lengths = np.nan_to_num(np.maximum(np.array(errors), 0.0))
    ax.errorbar(value, places, xerr=lengths, fmt="none", ecolor=INK, elinewidth=0.8, capsize=1.8, capthick=0.8)


def _order(size: Array, options: SensitivityBars) -> NDArray[np.intp]:
    if options.order == "as_given":
        return np.arange(size.size)
    return np.argsort(-np.nan_to_num(size, nan=-np.inf), kind="stable")


def _label_keys(ax: Axes, study: StudyData, options: SensitivityBars, order: NDArray[np.intp]) -> None:
    given = {item.key: item.label for item in options.labels}
    keys = [str(key) for key in study.dataset["key"].values[order]]
    ax.set_yticks(np.arange(order.size), [given.get(key, key_words(key)) for key in keys])
