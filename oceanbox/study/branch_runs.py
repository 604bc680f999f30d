"""A branch study of the model: each step a run from the state of the one before it."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np

from oceanbox.config import Config
from oceanbox.errors import ConfigError, Fault
from oceanbox.study.branch import TracedBranches, trace
from oceanbox.study.engines import Engine
from oceanbox.study.executing import StudyProgress, execute, quiet
from oceanbox.study.jumps import JumpRule
from oceanbox.study.plan import Case, case_config
from oceanbox.study.schema import Study
from oceanbox.study.threshold_specs import BranchSpec
from oceanbox.study.visits import Visit, at_own_pace, visit_of

__all__ = ["branch_parameters", "first_ways", "run_branch"]


def branch_parameters(spec: BranchSpec) -> list[float]:
    """The values of the key from lowest to highest; twelve digits, so that 0.1 is 0.1 and not its neighbour."""
    return [float(f"{value:.12g}") for value in np.linspace(spec.lowest, spec.highest, spec.steps + 1)]


def first_ways(study: Study, base: Config) -> list[Case]:
    """The cases up and down that are known before anything has run: without refining and if none fails.

    base    the configuration that `study.base` names, with `study.changes`

    Raises ConfigError with what is wrong with any of them.
    """
    faults: list[Fault] = []
    cases: list[Case] = []
    values = branch_parameters(_spec(study))
    for number, value in enumerate([*values, *values[-2::-1]]):
        try:
            cases.append(_case(study, base, number, value, cases[-1] if cases else None))
        except ConfigError as error:
            faults += error.faults
    if faults:
        raise ConfigError(dict.fromkeys(faults))
    return cases


def run_branch(
    study: Study,
    base: Config,
    into: Path,
    engine: Engine,
    report: Callable[[StudyProgress], None] = quiet,
) -> TracedBranches[Visit]:
    """Run a branch study below the folder `into`, one case after another; what is finished there is not run again.

    A case that fails is a point without a measure, and the next one starts where it had started itself.  Raises ConfigError
    before anything runs, KeyboardInterrupt as `execute` does.
    """
    first_ways(study, base)
    spec = _spec(study)
    numbers = iter(range(1_000_000_000))

    def equilibrium(value: float, previous: Visit | None) -> tuple[Visit, float]:
        case = _case(study, base, next(numbers), value, previous.next_start if previous is not None else None)
        (status,) = execute([case], into, engine, report)
        visit = visit_of(case, status, into)
        return visit, visit.scalar(spec.measure)

    return trace(equilibrium, branch_parameters(spec), JumpRule(spec.jump_factor, spec.least_jump), spec.refine_to)


def _spec(study: Study) -> BranchSpec:
    if study.branch is None:
        raise ValueError(f"study {study.name}: got a {study.plan} study; this is for branch studies")
    return study.branch


def _case(study: Study, base: Config, number: int, value: float, start: Case | None) -> Case:
    spec = _spec(study)
    name = f"{spec.key}={value:.12g}"
    changes = {spec.key: value}
    config = case_config(study, base, name, changes)
    if start is not None:
        config = at_own_pace(config)
    return Case(number, name, {spec.key: value}, changes, config, command=study.command, start=start)
