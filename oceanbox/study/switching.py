"""A switch study: from one equilibrium something changes at time zero, and the ocean adjusts."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
import xarray as xr
from numpy.typing import NDArray

from oceanbox import names
from oceanbox.config import Config
from oceanbox.errors import ConfigError, Fault
from oceanbox.study.fitting import Relaxation, Trust, crossing_time, fit_relaxation
from oceanbox.study.plan import Case, case_config
from oceanbox.study.schema import Study
from oceanbox.study.status import result_of
from oceanbox.study.threshold_specs import SwitchCase, SwitchSpec
from oceanbox.study.visits import Visit, at_own_pace, visit_variables

__all__ = ["CONTROL", "Adjustment", "adjustments", "switch_cases", "switch_dataset", "switch_findings"]

Array = NDArray[np.float64]

START, CONTROL = "start", "control"
"""Names of the cases that a study adds: the equilibrium, and the run in which nothing changes."""

HAS_END = (Trust.SOUND, Trust.TOO_FAST, Trust.NOT_EXPONENTIAL)
"""What a fit may be worth if its value in the end means something."""


def switch_cases(study: Study, base: Config) -> list[Case]:
    """The equilibrium, the control if there is one, and the switches, which all start from that equilibrium.

    base    the configuration that `study.base` names, with `study.changes`

    Raises ConfigError with what is wrong with any of them.
    """
    spec = _spec(study)
    start_changes = dict(spec.start.changes)
    config = case_config(study, base, START, start_changes)
    faults: list[Fault] = []
    cases = [Case(0, START, {}, start_changes, config, command="equilibrate")]
    control = [SwitchCase.model_construct(name=CONTROL, changes={})] if spec.control == "run" else []
    for number, switch in enumerate([*control, *spec.switches], start=1):
        try:
            config = at_own_pace(
                case_config(study, base, switch.name, start_changes | _all_changes(spec, switch, base))
            )
        except ConfigError as error:
            faults += error.faults
            continue
        coordinates = {"switch": switch.name}
        cases.append(Case(number, switch.name, coordinates, switch.changes, config, command="evolve", start=cases[0]))
    if faults:
        raise ConfigError(dict.fromkeys(faults))
    return cases


def _spec(study: Study) -> SwitchSpec:
    if study.switch is None:
        raise ValueError(f"study {study.name}: got a {study.plan} study; this is for switch studies")
    return study.switch


def _all_changes(spec: SwitchSpec, switch: SwitchCase, base: Config) -> dict[str, Any]:
    interval = switch.series_interval_days or spec.series_interval_days
    return {
        "evolve.duration_days": switch.duration_days or spec.duration_days,
        "output.series_interval_days": interval,
        "output.sample_interval_days": min(base.output.sample_interval_days, interval),
        **switch.changes,
    }


@dataclass(frozen=True)
class Adjustment:
    """How one scalar adjusts to one switch.

    days        (n,) ends of the intervals that the values are averaged over
    values      (n,)
    before      the value at the equilibrium
    fit         of an exponential; times in days
    crossing    when the share 1 - 1/e of the fitted change has happened, without assuming an exponential; days
    """

    switch: str
    measure: str
    days: Array
    values: Array
    before: float
    fit: Relaxation
    crossing: float


def adjustments(spec: SwitchSpec, visits: Sequence[Visit], into: Path) -> list[Adjustment]:
    """Read and fit the series of every switch that has a result.

    visits    what became of the `switch_cases`, in their order
    """
    found = []
    start = visits[0]
    for visit in visits[1:]:
        if visit.failed:
            continue
        with xr.open_dataset(result_of(visit.case, into), decode_times=False) as result:
            days = result["time"].to_numpy().astype(np.float64)
            recorded = {
                name: result[f"series_{name}"].to_numpy() for name in spec.measures if f"series_{name}" in result
            }
        interval = visit.case.config.output.series_interval_days
        for name, values in recorded.items():
            found.append(_adjustment(visit.case.name, name, days, values, start.scalar(name), interval))
    return found


def _adjustment(switch: str, measure: str, days: Array, values: Array, before: float, interval: float) -> Adjustment:
    fit = fit_relaxation(days, values, before, interval)
    crossing = float("nan")
    if fit.trust in HAS_END:
        crossing = crossing_time(days - 0.5 * interval, values, before, fit.final)
    return Adjustment(switch, measure, days, values, before, fit, crossing)


def switch_dataset(spec: SwitchSpec, visits: Sequence[Visit], found: Sequence[Adjustment]) -> xr.Dataset:
    """Series over (switch, time), fits and what became of each case over `switch`.

    visits    what became of the `switch_cases`, in their order; scalars of the start are `start_<scalar>`
    found     the `adjustments`

    Series of different lengths and intervals share one time axis, NaN where a series has no point: drop those to draw it.
    """
    start, runs = visits[0], visits[1:]
    switches = [visit.case.name for visit in runs]
    times = np.unique(np.concatenate([[0.0], *(item.days for item in found)]))
    variables = visit_variables(runs, {"switch": len(runs)})
    for measure in spec.measures:
        variables |= _series_variables(measure, switches, times, found)
        variables |= _fit_variables(measure, switches, found)
        entry = names.lookup(measure)
        variables[f"start_{measure}"] = xr.Variable((), start.scalar(measure), entry.cf_attributes())
    coords = {
        "switch": xr.Variable("switch", np.array(switches, dtype=object), {"long_name": "what changed at time zero"}),
        "time": xr.Variable("time", times, {"long_name": "time since the switch", "units": "days"}),
    }
    attributes = {
        "oceanbox_switch_start": start.result_path,
        "oceanbox_switch_start_outcome": start.status.outcome or start.status.reason,
        "oceanbox_switch_findings": "\n".join(switch_findings(visits, found)),
    }
    return xr.Dataset(variables, coords, attributes)


def _series_variables(
    measure: str, switches: Sequence[str], times: Array, found: Sequence[Adjustment]
) -> dict[str, xr.Variable]:
    entry = names.lookup(f"series_{measure}")
    values = np.full((len(switches), len(times)), np.nan)
    for item in found:
        if item.measure == measure:
            row = switches.index(item.switch)
            values[row, 0] = item.before
            values[row, np.searchsorted(times, item.days)] = item.values
    return {entry.name: xr.Variable(("switch", "time"), values, entry.cf_attributes())}


def _fit_variables(measure: str, switches: Sequence[str], found: Sequence[Adjustment]) -> dict[str, xr.Variable]:
    entry = names.lookup(measure)
    fits = {item.switch: item for item in found if item.measure == measure}
    nan = float("nan")
    numbers = {
        "e_folding": ("e-folding time", "days", lambda item: item.fit.e_folding),
        "e_folding_error": ("standard error of the e-folding time", "days", lambda item: item.fit.e_folding_error),
        "crossing": ("time of 1 - 1/e of the change", "days", lambda item: item.crossing),
        "final": ("fitted value in the end", entry.units, lambda item: item.fit.final),
        "final_error": ("standard error of the value in the end", entry.units, lambda item: item.fit.final_error),
        "noise": ("standard deviation about the fit", entry.units, lambda item: item.fit.noise),
    }
    variables = {}
    for name, (words, units, number) in numbers.items():
        values = np.array([number(fits[switch]) if switch in fits else nan for switch in switches])
        attributes = {"long_name": f"{entry.long_name}: {words}", "units": units}
        variables[f"{name}_{measure}"] = xr.Variable("switch", values, attributes)
    trust = [fits[switch].fit.trust.value if switch in fits else "" for switch in switches]
    variables[f"trust_{measure}"] = xr.Variable(
        "switch", np.array(trust, dtype=object), {"long_name": f"{entry.long_name}: what the e-folding time is worth"}
    )
    return variables


def switch_findings(visits: Sequence[Visit], found: Sequence[Adjustment]) -> list[str]:
    """Each adjustment as a sentence, and what weakens it."""
    lines = [_sentence(item) for item in found]
    if visits[0].unsettled:
        lines.append("the start was not in equilibrium: part of each adjustment is its own drift, see the control")
    lines += [f"{visit.case.name}: failed: {visit.status.reason}" for visit in visits if visit.failed]
    return lines


def _sentence(item: Adjustment) -> str:
    fit, entry = item.fit, names.lookup(item.measure)
    unit = "" if entry.units == "1" else f" {entry.units}"
    if item.switch == CONTROL:
        return (
            f"{CONTROL}: {entry.long_name} stays between {item.values.min():.5g} and {item.values.max():.5g}{unit}, "
            f"{item.before:.5g} at the start"
        )
    if fit.trust not in HAS_END:
        ends = f"from {item.before:.5g} to {item.values[-1]:.5g}{unit} at the end of the record"
        return f"{item.switch}: {entry.long_name} {ends}: {fit.trust.value}"
    time = fit.trust.value
    if fit.trust is Trust.SOUND:
        time = f"e-folding time {fit.e_folding:.4g} +/- {fit.e_folding_error:.2g} days"
    return (
        f"{item.switch}: {entry.long_name} from {item.before:.5g} to {fit.final:.5g}{unit}, {time} "
        f"(1 - 1/e of the change is done after {item.crossing:.4g} days)"
    )
