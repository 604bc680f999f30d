"""Adjustments to several switches side by side, each with its own time axis, and the fitted exponentials."""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from matplotlib.ticker import MaxNLocator
from numpy.typing import NDArray

from oceanbox.constants import DAYS_PER_YEAR
from oceanbox.diagnostics.theory import adjustment
from oceanbox.errors import UnreadableResult
from oceanbox.figures.study_options import DEPTH, Switches
from oceanbox.figures.study_panels.along_axis import label_scalars
from oceanbox.figures.study_panels.cases import StudyData
from oceanbox.figures.study_panels.words import shown_name, unit_of
from oceanbox.figures.style import GREY, INK, LINES

if TYPE_CHECKING:
    from matplotlib.axes import Axes

__all__ = ["CONTROL", "Record", "record_of", "shown_switches", "switches", "time_words"]

Array = NDArray[np.float64]

CONTROL = "control"
SOUND = "fitted"
_GAP = 0.08  # between axes, in widths of one
_YEARS_FROM = 3.0 * DAYS_PER_YEAR  # longer records have their time in years


class Record(NamedTuple):
    """The adjustment of one scalar to one switch.

    days, values  at the middle of the intervals that the values are means over; the first is the start, at time zero
    first         value at the start
    final, e_folding, e_folding_error  of the fitted exponential, days; NaN where there is none
    crossing      days after which 1 - 1/e of the change is done, NaN where not found
    trust         what the fitted time is worth, in words
    """

    days: Array
    values: Array
    first: float
    final: float
    e_folding: float
    e_folding_error: float
    crossing: float
    trust: str


def switches(ax: Axes, study: StudyData, options: Switches) -> Axes:
    """A scalar against time since each switch: dots, the fitted exponential, a mark at its e-folding time, the control."""
    names, divisor = shown_switches(study, options), unit_of(options.scalar).divisor
    control = record_of(study, CONTROL, options.scalar) if CONTROL in study.places("switch") else None
    frames = _frames(ax, len(names))
    for number, (inner, name, line) in enumerate(zip(frames, names, LINES, strict=False)):
        record = record_of(study, name, options.scalar)
        longest = float(record.days.max())
        per_unit = DAYS_PER_YEAR if longest > _YEARS_FROM else 1.0
        if control is not None:
            shown = control.days <= longest
            inner.plot(control.days[shown] / per_unit, control.values[shown] / divisor, color=GREY, linewidth=0.8)
        inner.plot(
            record.days / per_unit,
            record.values / divisor,
            linestyle="none",
            marker=".",
            markersize=2.5,
            color=line.color,
        )
        _draw_fit(inner, record, longest, per_unit, divisor)
        inner.set_title(_title(name, record), loc="right", fontsize=6.5)
        inner.set_xlim(0.0, longest / per_unit)
        inner.xaxis.set_major_locator(MaxNLocator(nbins=4, steps=[1, 2, 5, 10]))
        inner.set_xlabel(f"Time ({'years' if per_unit > 1.0 else 'days'})")
        inner.tick_params(labelleft=number == 0)
    label_scalars(frames[0], (options.scalar,))
    _share_heights(frames, options.scalar)
    return ax


def shown_switches(study: StudyData, options: Switches) -> list[str]:
    """The switches from left to right, without the control. Raises UnreadableResult for unknown or too many ones."""
    known = [str(place) for place in study.places("switch")]
    wanted = list(options.switches) or [name for name in known if name != CONTROL]
    for name in wanted:
        if name not in known:
            raise UnreadableResult(f"switch {name}: got no such one; the study has {', '.join(known)}; name these")
    if not 0 < len(wanted) <= len(LINES):
        raise UnreadableResult(
            f"switches: got {len(wanted)}; 1 to {len(LINES)} fit side by side; name them in the panel"
        )
    return wanted


def record_of(study: StudyData, switch: str, scalar: str) -> Record:
    """The recorded adjustment of a scalar to a switch, and its fit."""
    name = f"series_{scalar}"
    if name not in study.dataset:
        raise UnreadableResult(
            f"{name}: got a study that did not record it; add {scalar} to the measures of the switch, or leave this out"
        )
    series = study.dataset[name].sel(switch=switch)
    known = np.isfinite(series.values)
    ends, values = study.dataset["time"].values[known].astype(float), series.values[known]
    # Each value is a mean over the interval that ends at its time; the first is the start itself.
    days = ends.copy()
    days[1:] -= 0.5 * np.diff(ends)

    def number(what: str) -> float:
        found = study.dataset.get(f"{what}_{scalar}")
        return float(found.sel(switch=switch)) if found is not None else float("nan")

    trust = study.dataset.get(f"trust_{scalar}")
    return Record(
        days=days,
        values=values,
        first=float(study.dataset[f"start_{scalar}"]),
        final=number("final"),
        e_folding=number("e_folding"),
        e_folding_error=number("e_folding_error"),
        crossing=number("crossing"),
        trust=str(trust.sel(switch=switch).values) if trust is not None else "",
    )


def time_words(days: float, error: float) -> str:
    """A time with its standard error, in days, or in years where it is longer than one, to the decimals of the error."""
    per_unit, unit = (DAYS_PER_YEAR, "years") if days > DAYS_PER_YEAR else (1.0, "days")
    size = error / per_unit
    decimals = max(0, -int(np.floor(np.log10(size)))) if size > 0.0 else 1
    return f"{days / per_unit:.{decimals}f} ± {size:.{decimals}f} {unit}"


def _title(name: str, record: Record) -> str:
    """The switch, and its e-folding time where one was found."""
    words = shown_name(name)
    if record.trust != SOUND:
        return words
    return f"{words}: {time_words(record.e_folding, record.e_folding_error)}"


def _draw_fit(ax: Axes, record: Record, longest: float, per_unit: float, divisor: float) -> None:
    """The fitted exponential, with a mark where 1 - 1/e of the change is done; only a fit that is worth it."""
    if record.trust != SOUND:
        return
    times = np.linspace(0.0, longest, 300)
    curve = adjustment(times, record.first, record.final, record.e_folding)
    ax.plot(times / per_unit, curve / divisor, color=INK, linewidth=0.8)
    at = float(adjustment(record.e_folding, record.first, record.final, record.e_folding))
    bar = record.e_folding_error / per_unit if np.isfinite(record.e_folding_error) else 0.0
    ax.errorbar(
        [record.e_folding / per_unit],
        [at / divisor],
        xerr=[bar],
        marker="D",
        markersize=3.5,
        color=INK,
        markerfacecolor="white",
        elinewidth=0.8,
        capsize=1.8,
        zorder=4,
    )


def _frames(ax: Axes, count: int) -> list[Axes]:
    ax.set_axis_off()
    width = 1.0 / (count + _GAP * (count - 1))
    return [ax.inset_axes((index * width * (1 + _GAP), 0.0, width, 1.0)) for index in range(count)]


def _share_heights(frames: list[Axes], scalar: str) -> None:
    """One range of the scalar for all, so that the sizes of the adjustments can be compared."""
    limits = np.array([sorted(inner.get_ylim()) for inner in frames])
    low, high = float(limits[:, 0].min()), float(limits[:, 1].max())
    for inner in frames:
        inner.set_ylim((high, low) if scalar.startswith(DEPTH) else (low, high))
