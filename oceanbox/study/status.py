"""What became of a case, kept as a small JSON file beside its result."""

from __future__ import annotations

import json
import math
from dataclasses import asdict, dataclass
from enum import Enum
from pathlib import Path

import oceanbox
from oceanbox.output.files import whole_file
from oceanbox.study.plan import Case, folder_of

__all__ = ["CHECKPOINT", "RESULT", "STATE", "CaseStatus", "State", "result_of", "state_of", "status_of", "write_status"]

FILE = "status.json"
RESULT, STATE, CHECKPOINT = "result.nc", "state.nc", "checkpoint.nc"
"""Files that a run leaves in its folder; see `experiment.store`."""

UNREPEATABLE = ("UnstableRun", "ConfigError")
"""Failures that the same program will repeat: such a case counts as finished."""


class State(Enum):
    """Where a case is."""

    WAITING = "waiting"
    RUNNING = "running"
    DONE = "done"
    FAILED = "failed"


@dataclass(frozen=True)
class CaseStatus:
    """Where a case is and how it came there.

    reason         of a failure, in words; '' otherwise
    failure        the kind of the failure: the name of an error, or 'worker lost'
    ending         how a run that is done ended: a value of `Ending`
    outcome        the sentence on that
    seconds        wall time of all attempts so far that ended in an orderly way; NaN where it is not known
    started_from   the folder, relative to the study's, of the case it started from; '' for its own initial state
    version        of the program that ran it
    """

    state: State
    reason: str = ""
    failure: str = ""
    ending: str = ""
    outcome: str = ""
    seconds: float = math.nan
    started_from: str = ""
    version: str = oceanbox.__version__

    @property
    def finished(self) -> bool:
        """Whether running the case again would tell nothing new."""
        if self.state is State.FAILED:
            return self.failure in UNREPEATABLE and self.version == oceanbox.__version__
        return self.state is State.DONE


def result_of(case: Case, into: Path) -> Path:
    """The result file of a case."""
    return folder_of(case, into) / RESULT


def state_of(case: Case, into: Path) -> Path:
    """The state at the end of a case, from which another can start."""
    return folder_of(case, into) / STATE


def write_status(case: Case, into: Path, status: CaseStatus) -> None:
    """Replace the status of a case, whole or not at all."""
    folder = folder_of(case, into)
    folder.mkdir(parents=True, exist_ok=True)
    entries = {"case": case.name, **asdict(status), "state": status.state.value}
    entries["seconds"] = status.seconds if math.isfinite(status.seconds) else None
    with whole_file(folder / FILE) as part:
        part.write_text(json.dumps(entries, indent=1, ensure_ascii=False) + "\n", encoding="utf-8")


def status_of(case: Case, into: Path) -> CaseStatus:
    """The status of a case.  A whole result file is the proof that it is done, whatever else was written down."""
    noted = _noted(folder_of(case, into) / FILE)
    ended = _ending(result_of(case, into))
    if ended is not None:
        return CaseStatus(
            State.DONE,
            ending=ended[0],
            outcome=ended[1],
            seconds=noted.seconds,
            started_from=noted.started_from,
            version=ended[2],
        )
    if noted.state is State.DONE:  # its result has been taken away
        return CaseStatus(State.WAITING)
    return noted


def _noted(path: Path) -> CaseStatus:
    try:
        entries = dict(json.loads(path.read_text(encoding="utf-8")))
        seconds = entries["seconds"]
        return CaseStatus(
            State(entries["state"]),
            reason=str(entries["reason"]),
            failure=str(entries["failure"]),
            ending=str(entries["ending"]),
            outcome=str(entries["outcome"]),
            seconds=math.nan if seconds is None else float(seconds),
            started_from=str(entries["started_from"]),
            version=str(entries["version"]),
        )
    except (OSError, ValueError, KeyError, TypeError):
        return CaseStatus(State.WAITING)


def _ending(path: Path) -> tuple[str, str, str] | None:
    """Ending, outcome and program version of a result file, None where there is no whole one."""
    import netCDF4

    if not path.exists():
        return None
    try:
        with netCDF4.Dataset(path, "r") as file:
            names = ("oceanbox_ending", "oceanbox_outcome", "oceanbox_version")
            ending, outcome, version = (str(file.getncattr(name)) for name in names)
    except (OSError, AttributeError):
        return None
    return ending, outcome, version
