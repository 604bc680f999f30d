"""What became of single cases, with the scalars of their results, and as variables of a dataset."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from oceanbox.config import Config
from oceanbox.constants import DAYS_PER_YEAR
from oceanbox.experiment.outcome import Ending
from oceanbox.study.plan import Case, folder_of
from oceanbox.study.status import CaseStatus, State, result_of

if TYPE_CHECKING:
    import xarray as xr

__all__ = ["Visit", "at_own_pace", "visit_of", "visit_variables"]


@dataclass(frozen=True)
class Visit:
    """A case that is over.

    next_start   the case from whose end a later one can start: this one, or where it failed the one it started from itself
    result_path  relative to the folder of the study
    scalars      every scalar of its result and the standard deviations, by name; empty where it failed
    years        model time that it took
    """

    case: Case
    status: CaseStatus
    next_start: Case | None
    result_path: str
    scalars: dict[str, float] = field(default_factory=dict)
    years: float = math.nan

    @property
    def failed(self) -> bool:
        """Whether there is no result."""
        return self.status.state is not State.DONE

    @property
    def unsettled(self) -> bool:
        """Whether an equilibrium was looked for and not reached."""
        return self.status.ending == Ending.NOT_IN_EQUILIBRIUM.value

    def scalar(self, name: str) -> float:
        """A scalar of the result; NaN where there is none."""
        return self.scalars.get(name, math.nan)


def at_own_pace(config: Config) -> Config:
    """The configuration for a run that starts where another one ended.

    The ocean adjusts without help, since an extrapolation towards equilibrium could throw it off its branch, and the wind blows
    at once, since a rise from calm is for oceans at rest.
    """
    return config.with_changes({"equilibrium.acceleration": None, "surface.wind.ramp_days": 0.0})


def visit_of(case: Case, status: CaseStatus, into: Path) -> Visit:
    """Read what a case has left below the folder of its study."""
    import xarray as xr

    path = folder_of(case, into).relative_to(into) / "result.nc"
    if status.state is not State.DONE:
        return Visit(case, status, case.start, path.as_posix())
    with xr.open_dataset(result_of(case, into), decode_times=False) as result:
        scalars = {str(name): float(value) for name, value in result.data_vars.items() if value.ndim == 0}
        years = float(result["window_bounds"][-1]) / DAYS_PER_YEAR
    return Visit(case, status, case, path.as_posix(), scalars, years)


_TEXTS: dict[str, tuple[str, Callable[[Visit], str]]] = {
    "case_name": ("name of the case", lambda visit: visit.case.name),
    "status": ("what became of the case", lambda visit: visit.status.state.value),
    "reason": ("why the case failed", lambda visit: visit.status.reason),
    "outcome": ("how the run ended, in its own words", lambda visit: visit.status.outcome),
    "ending": ("how the run ended", lambda visit: visit.status.ending),
    "started_from": ("folder of the case it started from", lambda visit: visit.status.started_from),
    "result_path": (
        "result file, from the folder of the study",
        lambda visit: "" if visit.failed else visit.result_path,
    ),
}
_NUMBERS: dict[str, tuple[str, str, Callable[[Visit], float]]] = {
    "years": ("model time that the run took", "year", lambda visit: visit.years),
    "wall_seconds": ("time that the run took", "s", lambda visit: visit.status.seconds),
}


def visit_variables(visits: Sequence[Visit], sizes: dict[str, int]) -> dict[str, xr.Variable]:
    """Every scalar of the results and how the runs ended, over the dimensions `sizes`, the last of which runs fastest.

    NaN where a run has no result.
    """
    import xarray as xr

    from oceanbox import names

    dims, shape = tuple(sizes), tuple(sizes.values())
    known = {name for visit in visits for name in visit.scalars}
    variables = {}
    for name in names.all_names():
        if name in known:
            values = np.array([visit.scalar(name) for visit in visits]).reshape(shape)
            variables[name] = xr.Variable(dims, values, names.lookup(name).cf_attributes())
    for name, (long_name, text_of) in _TEXTS.items():
        texts = np.array([text_of(visit) for visit in visits], dtype=object).reshape(shape)
        variables[name] = xr.Variable(dims, texts, {"long_name": long_name})
    for name, (long_name, units, number_of) in _NUMBERS.items():
        numbers = np.array([number_of(visit) for visit in visits], dtype=np.float64).reshape(shape)
        variables[name] = xr.Variable(dims, numbers, {"long_name": long_name, "units": units})
    return variables
