"""The collected dataset of a branch study."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import xarray as xr

from oceanbox import names
from oceanbox.study.branch import HysteresisLoop, TracedBranches
from oceanbox.study.branch_findings import branch_findings, branch_probes
from oceanbox.study.following import Point
from oceanbox.study.jumps import Jump
from oceanbox.study.keys import KeyWords
from oceanbox.study.threshold_specs import BranchSpec
from oceanbox.study.visits import Visit, visit_variables

__all__ = ["branch_dataset"]

Variables = dict[str, xr.Variable]
Attributes = dict[str, str]


def branch_dataset(traced: TracedBranches[Visit], spec: BranchSpec, words: KeyWords) -> xr.Dataset:
    """Both ways over (direction, parameter), what refining found over `probe`, jumps over `jump`, loops over `loop`.

    words    unit and sentence of the key that was moved

    Every scalar of the results and its standard deviation is there, and what became of each case; NaN where one failed.
    A dimension that would have no entry is left out with its variables.  The findings in words are an attribute.
    """
    up, down = traced.up.branch.points, tuple(reversed(traced.down.branch.points))
    variables = visit_variables([point.state for point in (*up, *down)], {"direction": 2, "parameter": len(up)})
    key = {"units": words.unit or "1", "comment": f"key {spec.key}"}
    if probes := branch_probes(traced):
        variables |= _probe_variables(probes, spec, key)
    if jumps := (*traced.jumps, *traced.up.provoked, *traced.down.provoked):
        variables |= _jump_variables(jumps, spec, key)
    if traced.loops:
        variables |= _loop_variables(traced.loops, spec, key)
    coords = {
        "direction": _texts("direction", ["up", "down"], "way of the key"),
        "parameter": _numbers("parameter", [point.parameter for point in up], key, spec.long_name or words.sentence),
    }
    attributes = {
        "oceanbox_branch_key": spec.key,
        "oceanbox_branch_measure": spec.measure,
        "oceanbox_branch_findings": "\n".join(branch_findings(traced, spec.measure, words.unit)),
    }
    return xr.Dataset(variables, coords, attributes)


def _probe_variables(probes: Sequence[tuple[str, Point[Visit]]], spec: BranchSpec, key: Attributes) -> Variables:
    points = [point for _, point in probes]
    measure = names.lookup(spec.measure)
    return {
        "probe_direction": _texts("probe", [way for way, _ in probes], "way on which a jump was refined"),
        "probe_parameter": _numbers("probe", [point.parameter for point in points], key, "key while refining"),
        f"probe_{spec.measure}": _numbers(
            "probe",
            [point.measure for point in points],
            {"units": measure.units},
            f"{measure.long_name} while refining",
        ),
        "probe_result_path": _texts(
            "probe", [point.state.result_path for point in points], "result file, from the folder of the study"
        ),
    }


def _jump_variables(jumps: Sequence[Jump[Visit]], spec: BranchSpec, key: Attributes) -> Variables:
    measure = names.lookup(spec.measure)
    units = {"units": measure.units}
    return {
        "jump_direction": _texts("jump", [jump.direction for jump in jumps], "way on which it was met"),
        "jump_nature": _texts("jump", [jump.nature.value for jump in jumps], "what refining has shown"),
        "jump_lower": _numbers("jump", [jump.lower for jump in jumps], key, "lower end of the bracket"),
        "jump_upper": _numbers("jump", [jump.upper for jump in jumps], key, "upper end of the bracket"),
        "jump_from": _numbers("jump", [j.before.measure for j in jumps], units, f"{measure.long_name} before the jump"),
        "jump_to": _numbers("jump", [j.after.measure for j in jumps], units, f"{measure.long_name} after the jump"),
    }


def _loop_variables(loops: Sequence[HysteresisLoop[Visit]], spec: BranchSpec, key: Attributes) -> Variables:
    measure = names.lookup(spec.measure)
    units = {"units": measure.units}
    area = {"units": " ".join(unit for unit in (measure.units, key["units"]) if unit != "1") or "1"}
    return {
        "loop_lower": _numbers("loop", [loop.lower.upper for loop in loops], key, "lower end of the loop, inner bound"),
        "loop_upper": _numbers("loop", [loop.upper.lower for loop in loops], key, "upper end of the loop, inner bound"),
        "loop_gap": _numbers("loop", [loop.largest_gap for loop in loops], units, "largest distance of the two ways"),
        "loop_area": _numbers("loop", [loop.area for loop in loops], area, "area between the two ways"),
    }


def _texts(dim: str, values: Sequence[str], long_name: str) -> xr.Variable:
    return xr.Variable(dim, np.array(values, dtype=object), {"long_name": long_name})


def _numbers(dim: str, values: Sequence[float], attributes: Attributes, long_name: str) -> xr.Variable:
    return xr.Variable(dim, np.array(values, dtype=np.float64), {"long_name": long_name, **attributes})
