"""One call from a study file to its collected dataset, table and methods section."""

from __future__ import annotations

import math
import time
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path

import xarray as xr

from oceanbox.config import identity, resolved_yaml
from oceanbox.experiment.outcome import Ending
from oceanbox.experiment.results import REFERENCES
from oceanbox.figures.study_page import draw_study
from oceanbox.output.files import whole_file
from oceanbox.output.provenance import global_attributes
from oceanbox.study.collecting import collect, write_collected, write_table
from oceanbox.study.engines import Engine
from oceanbox.study.executing import StudyProgress, execute, quiet
from oceanbox.study.loading import LoadedStudy, check_cases, load_study
from oceanbox.study.locking import alone_in
from oceanbox.study.methods import write_methods
from oceanbox.study.predicting import Forecast, forecast
from oceanbox.study.status import CaseStatus, State, status_of
from oceanbox.study.threshold_plans import THRESHOLD_PLANS, Gathered, gather

__all__ = ["StudyOutcome", "default_folder", "dry_run", "run_study", "study_attributes"]

FIGURES = "figures"


@dataclass(frozen=True)
class StudyOutcome:
    """A study that has been run as far as it can be.

    into        its folder
    dataset     what was collected
    paths       the files made of it
    statuses    of all cases
    findings    what a study of thresholds, memory or sensitivity has found, in sentences
    """

    into: Path
    dataset: xr.Dataset
    paths: tuple[Path, ...]
    statuses: tuple[CaseStatus, ...]
    findings: tuple[str, ...] = ()

    @property
    def failed(self) -> int:
        """Cases without a result."""
        return sum(status.state is State.FAILED for status in self.statuses)

    @property
    def unsettled(self) -> int:
        """Cases that did not reach equilibrium in the time they had."""
        return sum(status.ending == Ending.NOT_IN_EQUILIBRIUM.value for status in self.statuses)

    def failures(self) -> list[str]:
        """A line for each case that failed."""
        names = [str(name) for name in self.dataset["case_name"].values.ravel()]
        states = [str(state) for state in self.dataset["status"].values.ravel()]
        reasons = [" ".join(str(reason).split()) for reason in self.dataset["reason"].values.ravel()]
        rows = zip(names, states, reasons, strict=True)
        return [f"failed: {name}: {reason}" for name, state, reason in rows if state == State.FAILED.value]

    def __str__(self) -> str:
        done = sum(status.state is State.DONE for status in self.statuses)
        words = [f"{done} of {len(self.statuses)} cases done"]
        words += [f"{self.unsettled} of them not in equilibrium"] if self.unsettled else []
        words += [f"{self.failed} failed"] if self.failed else []
        return ", ".join(words)


def default_folder(loaded: LoadedStudy) -> Path:
    """``results/<name>`` below the working directory."""
    return Path("results") / loaded.study.name


def dry_run(path: str | Path, into: str | Path | None = None) -> Forecast:
    """The cases of a study, which of them are finished, and what the rest will cost.  Raises ConfigError."""
    loaded = load_study(path)
    folder = Path(into) if into is not None else default_folder(loaded)
    check_cases(loaded, [case for case in loaded.cases if not status_of(case, folder).finished])
    return forecast(loaded.cases, folder)


def run_study(
    path: str | Path,
    into: str | Path | None = None,
    workers: int | None = None,
    scheduler: str | None = None,
    report: Callable[[StudyProgress], None] = quiet,
    tell: Callable[[str], None] = lambda line: None,
) -> StudyOutcome:
    """Run what is missing of a study, collect all of it, write its table and its methods section, draw its pages.

    into         its folder; ``results/<name>`` where not given
    workers      processes on this machine; as many as it has processors where not given
    scheduler    address of a dask.distributed scheduler whose workers are used instead
    report       called with the progress over all cases
    tell         called with each warning about a case

    A case that fails is counted in the outcome and does not stop the others.  Raises ConfigError before anything runs,
    ResultConflict if the folder is in use, KeyboardInterrupt after the running cases have been saved.
    """
    loaded = load_study(path)
    folder = (Path(into) if into is not None else default_folder(loaded)).resolve()
    for warning in check_cases(loaded, [case for case in loaded.cases if not status_of(case, folder).finished]):
        tell(f"warning: {warning}")
    folder.mkdir(parents=True, exist_ok=True)
    with alone_in(folder):
        _keep_study(loaded, folder)
        with _engine(folder, workers, scheduler) as engine:
            gathered = _gather(loaded, folder, engine, report)
        return _written(loaded, folder, gathered)


@contextmanager
def _engine(folder: Path, workers: int | None, scheduler: str | None) -> Iterator[Engine]:
    if scheduler is not None:
        from oceanbox.study.engines.cluster import ClusterEngine

        with ClusterEngine(scheduler, folder) as cluster:
            yield cluster
    else:
        from oceanbox.study.engines.local import LocalEngine

        with LocalEngine(workers) as local:
            yield local


def _keep_study(loaded: LoadedStudy, folder: Path) -> None:
    """Leave the study file beside its results."""
    with whole_file(folder / "study.yaml") as part:
        part.write_text(loaded.path.read_text(encoding="utf-8"), encoding="utf-8")


def _gather(loaded: LoadedStudy, folder: Path, engine: Engine, report: Callable[[StudyProgress], None]) -> Gathered:
    study, base = loaded.study, loaded.base
    if study.plan in THRESHOLD_PLANS:
        return gather(study, base, folder, engine, OverAll(len(loaded.cases), report))
    statuses = execute(loaded.cases, folder, engine, report)
    return Gathered(collect(study, loaded.cases, folder), tuple(statuses), ())


class OverAll:
    """Adds up the progress of several calls of `execute`; `total` is the number of cases expected of them all."""

    def __init__(self, total: int, report: Callable[[StudyProgress], None]) -> None:
        self._total, self._report = total, report
        self._found = self._done = self._failed = 0
        self._began = time.monotonic()

    def __call__(self, progress: StudyProgress) -> None:
        found, done = self._found + progress.found, self._done + progress.done
        failed = self._failed + progress.failed
        ended = found + done + failed
        total = max(self._total, ended + len(progress.running))
        ran = done + failed
        pace = (time.monotonic() - self._began) / ran if ran else math.nan
        self._report(StudyProgress(total, found, done, failed, progress.running, pace * (total - ended)))
        if progress.found + progress.done + progress.failed == progress.total:  # the last report of a call
            self._found, self._done, self._failed = found, done, failed


def study_attributes(loaded: LoadedStudy, statuses: Sequence[CaseStatus]) -> dict[str, str]:
    """Global attributes of what is collected: how the study was made, so that it can be made again."""
    study = loaded.study
    done = sum(status.state is State.DONE for status in statuses)
    attributes = global_attributes(
        title=f"oceanbox study: {study.name}",
        summary=" ".join(study.description.split()) or f"Cases of {loaded.base.name}.",
        config_text=resolved_yaml(loaded.base),
        config_identity=identity(loaded.base),
        outcome=f"{done} of {len(statuses)} cases done",
        references=REFERENCES,
    )
    return attributes | {"oceanbox_study": loaded.path.read_text(encoding="utf-8")}


def _written(loaded: LoadedStudy, folder: Path, gathered: Gathered) -> StudyOutcome:
    dataset = gathered.dataset.assign_attrs(study_attributes(loaded, gathered.statuses))
    paths = (
        write_collected(dataset, folder),
        write_table(dataset, folder),
        write_methods(loaded.study, loaded.base, gathered.statuses, folder),
    )
    figures = draw_study(dataset, folder, loaded.pages, folder / FIGURES)
    return StudyOutcome(folder, dataset, (*paths, *figures), gathered.statuses, gathered.findings)
