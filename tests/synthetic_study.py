"""Studies that no model ran: result files from formulas, collected by the same code as true ones.

The thermocline depth on the equator obeys the log law with known parameters exactly, and branches, adjustments and
sensitivities come from systems whose answers are known.
"""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
import xarray as xr
from numpy.typing import NDArray

import oceanbox
from oceanbox import names
from oceanbox.config import Config, loads
from oceanbox.diagnostics import summarise
from oceanbox.diagnostics.reference import CONFIG_ATTRIBUTE
from oceanbox.diagnostics.theory_inputs import theory_inputs
from oceanbox.output.files import write_dataset
from oceanbox.study.branch import trace
from oceanbox.study.branch_dataset import branch_dataset
from oceanbox.study.collecting import collect
from oceanbox.study.fitting import crossing_time, fit_relaxation
from oceanbox.study.jumps import JumpRule
from oceanbox.study.keys import describe
from oceanbox.study.plan import Case, case_config, cases_of, folder_of
from oceanbox.study.schema import Study
from oceanbox.study.sensitivity_cases import sensitivity_cases, sensitivity_dataset
from oceanbox.study.status import CaseStatus, State, result_of, write_status
from oceanbox.study.switching import Adjustment, switch_cases, switch_dataset
from oceanbox.study.visits import Visit
from tests.study.oceans import TARGET, TINY, WIND
from tests.synthetic import CONFIG, synthetic_means

Array = NDArray[np.float64]

MEASURE = "thermocline_depth_equator_mean"
MIXED_LAYER, HALF_THICKNESS = 47.0, 28.0  # the law that the depths obey; the configured one has 50 m and 30 m
TARGETS, WINDS = (2.0, 6.0, 10.0, 14.0), (-0.03, -0.06)
ENDINGS = {True: "equilibrium", False: "not in equilibrium"}
CLOSURE = """
entrainment:
  upwelling: {mixed_layer_depth_m: 50.0, thermocline_half_thickness_m: 30.0, shear_damping_per_day: 0.5}
  diffusive: null
"""
JUMP_UP, JUMP_DOWN = 1.237, 0.413
E_FOLDING = {"wind_slack": 130.0, "loss_off": 4200.0}
VISCOSITY, DAMPING = "motion.viscosity_m2_per_s", "entrainment.upwelling.shear_damping_per_day"
THICKNESS = "entrainment.upwelling.thermocline_half_thickness_m"
POWERS = {DAMPING: -0.25, VISCOSITY: 0.1, THICKNESS: 0.6}  # in no order of size


def synthetic_case(target: float, wind: float, settled: bool = True) -> xr.Dataset:
    """A result whose destruction falls as the target rises, whose upwelling grows with the wind (N m-2)."""
    means = synthetic_means()
    share, push = math.exp(-target / 9.0), wind / -0.06
    lifted = {name: means[name] * share for name in ("entrainment_upwelling", "transformation", "outcrop_volume")}
    flux = {name: means[name] * (0.3 + share) for name in ("surface_heat_flux", "heat_advection", "heat_mixing")}
    moved = {name: means[name] * push for name in ("wind_stress_x", "velocity_x", "velocity_y")}
    state = {"temperature": means["temperature"] + 0.1 * target}
    state |= {name: means[name] * (1.0 + 0.03 * target) for name in ("thickness", "thermocline_depth")}
    depth = "series_thermocline_depth_equator_mean"
    series = {depth: means[depth] * (1.0 + 0.03 * target)}
    means = means.assign(lifted | flux | moved | state | series)
    means = means.assign_attrs({CONFIG_ATTRIBUTE: CONFIG + CLOSURE})
    result = summarise(means)
    ratio = float(theory_inputs(result)["upwelling_ratio_tropics"])
    depth = MIXED_LAYER + HALF_THICKNESS * math.log(ratio)
    scalars = {MEASURE: depth, f"{MEASURE}_std": 1.0 + 0.2 * target, "thermocline_depth_equator_east": depth - 20.0}
    result = result.assign({name: ((), value, names.lookup(name).cf_attributes()) for name, value in scalars.items()})
    ending = ENDINGS[settled]
    outcome = f"{'in' if settled else 'not in'} equilibrium after 60 years"
    return result.assign_attrs(oceanbox_ending=ending, oceanbox_outcome=outcome, oceanbox_version=oceanbox.__version__)


def axes_study(into: Path, axes: int = 1) -> xr.Dataset:
    """A study over the target, and the wind where `axes` is 2, collected from files below `into`.

    Over one axis the third of four cases is not in equilibrium and the last has failed; over two axes the last of six has.
    """
    values = list(TARGETS[: 5 - axes])
    target = {"name": "target", "long_name": "polar target temperature", "key": TARGET, "values": values}
    wind = {"name": "wind", "long_name": "wind stress", "key": WIND, "values": list(WINDS)}
    study, base = _study({"axes": [target, wind][:axes]})
    cases = cases_of(study, base)
    for case in cases:
        if case.number == len(cases) - 1:
            write_status(case, into, CaseStatus(State.FAILED, reason="the layer was gone"))
            continue
        place = case.coordinates
        settled = axes == 2 or case.number != 2
        folder_of(case, into).mkdir(parents=True, exist_ok=True)
        result = synthetic_case(float(place["target"]), float(place.get("wind", -0.06)), settled)
        write_dataset(result, result_of(case, into))
    return collect(study, cases, into, _attributes("axes"))


def branch_study() -> xr.Dataset:
    """A relay that is shallow until the key reaches 1.237 on the way up, deep until 0.413 on the way down."""
    spec = {"key": WIND, "lowest": 0.0, "highest": 1.6, "steps": 8, "measure": MEASURE, "refine_to": 0.02}
    study, base = _study({"branch": spec})
    assert study.branch is not None

    def equilibrium(value: float, previous: Visit | None) -> tuple[Visit, float]:
        was_deep = previous is not None and previous.scalar(MEASURE) > 150.0
        deep = value > (JUMP_DOWN if was_deep else JUMP_UP)
        depth = (190.0 if deep else 110.0) + 9.0 * value
        case = _case(study, base, f"{WIND}={value:g}", {WIND: -value})
        ending = ENDINGS[value != 0.8]
        visit = Visit(
            case, CaseStatus(State.DONE, ending=ending, outcome=ending), case, f"cases/{value:g}", _depths(depth)
        )
        return visit, depth

    values = [0.2 * number for number in range(9)]
    traced = trace(equilibrium, values, JumpRule(), study.branch.refine_to)
    return branch_dataset(traced, study.branch, describe(base, WIND)).assign_attrs(_attributes("branch"))


def switch_study() -> xr.Dataset:
    """Two exponential adjustments, of 130 days and 4200 days, with a little noise, and a control that stays."""
    switches = [
        {"name": "wind_slack", "changes": {WIND: -0.01}, "duration_days": 700.0, "series_interval_days": 10.0},
        {"name": "loss_off", "changes": {TARGET: 19.0}, "duration_days": 14600.0, "series_interval_days": 100.0},
    ]
    spec = {"switches": switches, "duration_days": 14600.0, "series_interval_days": 100.0, "measures": [MEASURE]}
    study, base = _study({"switch": spec})
    assert study.switch is not None
    cases = switch_cases(study, base)
    visits = [_visit(case, 140.0) for case in cases]
    random = np.random.default_rng(2)
    found = []
    for case in cases[1:]:
        interval = case.config.output.series_interval_days
        days = interval * np.arange(1, round(case.config.evolve.duration_days / interval) + 1)
        values = 140.0 + random.normal(0.0, 0.4, days.size)
        if case.name in E_FOLDING:
            final = {"wind_slack": 118.0, "loss_off": 230.0}[case.name]
            scale = E_FOLDING[case.name]
            decay = scale / interval * (np.exp((interval - days) / scale) - np.exp(-days / scale))
            values += (final - 140.0) * (1.0 - decay)
        fit = fit_relaxation(days, values, 140.0, interval)
        crossing = crossing_time(days - 0.5 * interval, values, 140.0, fit.final)
        found.append(Adjustment(case.name, MEASURE, days, values, 140.0, fit, crossing))
    return switch_dataset(study.switch, visits, found).assign_attrs(_attributes("switch"))


def sensitivity_study(kind: str) -> xr.Dataset:
    """Sensitivities of a depth that is a product of powers of three keys."""
    keys = list(POWERS)
    spec: dict[str, object] = {"kind": kind, "measures": [MEASURE]}
    if kind == "elasticities":
        spec |= {"keys": keys}
    else:
        ranges = zip(keys, (0.3, 5.0e4, 20.0), (0.9, 1.0e5, 45.0), strict=True)
        spec |= {"base_samples": 256, "resamples": 200}
        spec |= {"ranges": [{"key": key, "lowest": low, "highest": high} for key, low, high in ranges]}
    study, base = _study({"sensitivity": spec})
    cases = sensitivity_cases(study, base)
    depths = [100.0 * math.prod(_number(case, key) ** power for key, power in POWERS.items()) for case in cases]
    text = {
        "case_name": [case.name for case in cases],
        "status": ["done"] * len(cases),
        "ending": ["equilibrium"] * len(cases),
    }
    variables = {MEASURE: depths, f"{MEASURE}_std": [1.0] * len(cases), **text}
    collected = xr.Dataset({name: ("case", np.array(values)) for name, values in variables.items()})
    found = sensitivity_dataset(study, base, collected)
    return collected.assign(found).assign_attrs(found.attrs | _attributes(kind))


def _study(plan: dict[str, object]) -> tuple[Study, Config]:
    return Study.model_validate({"name": "trial", "base": "tiny.yaml", **plan}), loads(TINY)


def _attributes(name: str) -> dict[str, str]:
    return {
        "title": f"oceanbox study: synthetic_{name}",
        "oceanbox_study": f"name: synthetic_{name}\n",
        "oceanbox_config_identity": "0123456789abcdef" * 4,
    }


def _case(study: Study, base: Config, name: str, changes: dict[str, object]) -> Case:
    return Case(0, name, {}, changes, case_config(study, base, name, changes))


def _number(case: Case, key: str) -> float:
    value: object = case.config
    for part in key.split("."):
        value = getattr(value, part)
    assert isinstance(value, float)
    return value


def _depths(depth: float) -> dict[str, float]:
    return {MEASURE: depth, f"{MEASURE}_std": 2.0}


def _visit(case: Case, depth: float) -> Visit:
    status = CaseStatus(State.DONE, ending="completed", outcome="completed")
    return Visit(case, status, case, f"cases/{case.name}/result.nc", _depths(depth), 2.0)
