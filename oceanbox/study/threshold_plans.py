"""Branch, switch and sensitivity studies behind the same two calls: which cases there are, and running them to a dataset."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import xarray as xr

from oceanbox.config import Config
from oceanbox.study.branch_dataset import branch_dataset
from oceanbox.study.branch_findings import branch_findings, branch_visits
from oceanbox.study.branch_runs import first_ways, run_branch
from oceanbox.study.collecting import collect
from oceanbox.study.engines import Engine
from oceanbox.study.executing import StudyProgress, execute, quiet
from oceanbox.study.keys import describe
from oceanbox.study.plan import Case
from oceanbox.study.schema import Study
from oceanbox.study.sensitivity_cases import sensitivity_cases, sensitivity_dataset
from oceanbox.study.status import CaseStatus
from oceanbox.study.switching import adjustments, switch_cases, switch_dataset, switch_findings
from oceanbox.study.visits import visit_of

__all__ = ["THRESHOLD_PLANS", "Gathered", "gather", "planned_cases"]

THRESHOLD_PLANS = ("branch", "switch", "sensitivity")
"""The plans of a study that this module knows."""


@dataclass(frozen=True)
class Gathered:
    """A study that has been run as far as it can be.

    statuses    of every case that was run
    findings    in sentences
    """

    dataset: xr.Dataset
    statuses: tuple[CaseStatus, ...]
    findings: tuple[str, ...]


def planned_cases(study: Study, base: Config) -> list[Case]:
    """The cases that are known before anything runs; a branch study may add some to refine its jumps.

    base    the configuration that `study.base` names, with `study.changes`

    Raises ConfigError with the faults of all cases.
    """
    if study.branch is not None:
        return first_ways(study, base)
    return switch_cases(study, base) if study.switch is not None else sensitivity_cases(study, base)


def gather(
    study: Study, base: Config, into: Path, engine: Engine, report: Callable[[StudyProgress], None] = quiet
) -> Gathered:
    """Run what is missing of a study below its folder and collect all of it.

    Raises ConfigError before anything runs, KeyboardInterrupt as `execute` does.
    """
    if study.branch is not None:
        return _branch(study, base, into, engine, report)
    cases = planned_cases(study, base)
    statuses = execute(cases, into, engine, report)
    if study.switch is not None:
        visits = [visit_of(case, status, into) for case, status in zip(cases, statuses, strict=True)]
        found = adjustments(study.switch, visits, into)
        dataset = switch_dataset(study.switch, visits, found)
        return Gathered(dataset, tuple(statuses), tuple(switch_findings(visits, found)))
    collected = collect(study, cases, into)
    sensitivities = sensitivity_dataset(study, base, collected)
    findings = tuple(sensitivities.attrs["oceanbox_sensitivity_findings"].splitlines())
    return Gathered(collected.assign(sensitivities).assign_attrs(sensitivities.attrs), tuple(statuses), findings)


def _branch(
    study: Study, base: Config, into: Path, engine: Engine, report: Callable[[StudyProgress], None]
) -> Gathered:
    spec = study.branch
    assert spec is not None
    traced = run_branch(study, base, into, engine, report)
    words = describe(traced.up.branch.points[0].state.case.config, spec.key)
    return Gathered(
        branch_dataset(traced, spec, words),
        tuple(visit.status for visit in branch_visits(traced)),
        tuple(branch_findings(traced, spec.measure, words.unit)),
    )
