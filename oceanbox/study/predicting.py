"""What is left of a study and what it will cost, before anything runs."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from oceanbox.config import Config
from oceanbox.constants import DAYS_PER_YEAR
from oceanbox.study.plan import Case
from oceanbox.study.status import CaseStatus, State, status_of

__all__ = ["Forecast", "forecast"]


@dataclass(frozen=True)
class Forecast:
    """The cases of a study, how far each is, and the wall time of one core [s] that each will still need.

    basis    what the prediction stands on, in words
    """

    cases: tuple[Case, ...]
    statuses: tuple[CaseStatus, ...]
    seconds: tuple[float, ...]
    basis: str

    @property
    def left(self) -> int:
        """The number of cases that are not finished."""
        return sum(not status.finished for status in self.statuses)

    def total_seconds(self, workers: int) -> float:
        """Wall time of all that is left, on some workers."""
        return sum(self.seconds) / max(1, min(workers, self.left))


def forecast(cases: Sequence[Case], into: Path) -> Forecast:
    """Predict from the finished cases of the same study, or from timing a few steps of each kind of setup."""
    statuses = [status_of(case, into) for case in cases]
    known = [status.seconds for status in statuses if status.state is State.DONE and math.isfinite(status.seconds)]
    if known:
        mean = sum(known) / len(known)
        each = [mean] * len(cases)
        basis = f"the mean of {len(known)} cases that are done"
    else:
        from oceanbox.experiment.cost import usual_years

        costs: dict[str, float] = {}
        each = [_timed(case, costs) for case in cases]
        searched = [usual_years(case.config) for case in cases if case.command == "equilibrate"]
        basis = "timing a few steps" + (f", if equilibrium takes {max(searched):g} model years" if searched else "")
    left = [0.0 if status.finished else cost for status, cost in zip(statuses, each, strict=True)]
    return Forecast(tuple(cases), tuple(statuses), tuple(left), basis)


def _timed(case: Case, costs: dict[str, float]) -> float:
    """Wall time of a case [s]; `costs` keeps that of a model year of each kind of setup."""
    from oceanbox.experiment.cost import usual_years

    config = case.config
    key = f"{config.basin!r} {config.numerics!r} {config.motion!r}"
    if key not in costs:
        costs[key] = _year(config)
    if case.command == "evolve":
        return costs[key] * config.evolve.duration_days / DAYS_PER_YEAR
    return costs[key] * usual_years(config)


def _year(config: Config) -> float:
    from oceanbox.experiment.assembly import assemble_setup
    from oceanbox.experiment.cost import seconds_per_step
    from oceanbox.experiment.scales import derive_scales

    setup = assemble_setup(config)
    return seconds_per_step(setup) * derive_scales(setup).steps_per_year
