"""Running a configuration to equilibrium, or for a fixed time: the calls behind the command line."""

import signal
import threading
from collections.abc import Callable, Iterator, Mapping
from contextlib import contextmanager
from pathlib import Path
from typing import NamedTuple

import xarray as xr

from oceanbox.config import Config
from oceanbox.config import load as load_config
from oceanbox.errors import ConfigError, Fault, InterruptedRun, OceanboxError, UnstableRun
from oceanbox.experiment.assembly import Setup, assemble_setup
from oceanbox.experiment.consistency import require_consistent
from oceanbox.experiment.model import Model
from oceanbox.experiment.outcome import Ending, Outcome
from oceanbox.experiment.plan import Plan, equilibrium_plan, evolution_plan
from oceanbox.experiment.results import axes_of, provenance_of, result_dataset
from oceanbox.experiment.running import Progress, Run, WallClock
from oceanbox.experiment.store import Purpose, Store
from oceanbox.output.checkpoint import load_checkpoint
from oceanbox.output.files import part_of, read_dataset, write_dataset
from oceanbox.output.snapshots import Snapshots

__all__ = ["Checked", "Finished", "check", "default_folder", "equilibrate", "evolve", "silent"]

CHECKPOINT_SECONDS = 30.0
SNAPSHOT_FIELDS = ("thickness", "temperature", "salinity", "velocity_x", "velocity_y")


class Finished(NamedTuple):
    """A finished run: its result, how it ended, where its file is, and whether it had been finished before."""

    result: xr.Dataset
    outcome: Outcome
    path: Path
    found: bool


class Checked(NamedTuple):
    """A configuration that can be run, and what is unwise about it."""

    setup: Setup
    warnings: tuple[Fault, ...]


def check(config: Config | Path | str) -> Checked:
    """Assemble a configuration, or the file of one, and examine it.  Raises ConfigError with every fault found."""
    if isinstance(config, Config):
        setup = assemble_setup(config)
        return Checked(setup, require_consistent(setup))
    loaded = load_config(Path(config))
    try:
        setup = assemble_setup(loaded.config)
    except ConfigError as error:
        raise error.located(loaded.source.locate) from None
    return Checked(setup, require_consistent(setup, loaded.source.locate))


def silent(progress: Progress) -> None:
    """A reporter that reports nothing."""


def default_folder(config: Config) -> Path:
    """``results/<name>`` below the working directory."""
    return Path("results") / config.name


class _Keeper:
    """The observer of a run that lives in a store: checkpoints, snapshots, progress, stopping on a signal."""

    def __init__(self, store: Store, report: Callable[[Progress], None]) -> None:
        self._store, self._report = store, report
        self._bell = WallClock(CHECKPOINT_SECONDS)
        self._snapshots: Snapshots | None = None
        self.stop = threading.Event()

    def progress(self, progress: Progress) -> None:
        self._report(progress)

    def checkpoint_due(self) -> bool:
        return self.stop.is_set() or self._bell.rang()

    def save(self, run: Run) -> None:
        self._store.save(run)
        if self.stop.is_set():
            raise InterruptedRun(
                run.model.clock.days, f"run the same command again to go on from {self._store.checkpoint}"
            )

    def resume_snapshots(self, records: int) -> None:
        part = part_of(self._store.snapshots)
        if records > 0 and not part.exists() and self._store.snapshots.exists():
            # Killed after the snapshots were whole and before the result was.
            self._store.snapshots.replace(part)
        if records > 0 and part.exists():
            self._snapshots = Snapshots.resume(self._store.snapshots, records)

    def snapshot(self, run: Run, number: int) -> None:
        model = run.model
        if self._snapshots is None:
            attributes = provenance_of(model.setup.config, "snapshots of a run", [])
            self._snapshots = Snapshots.create(self._store.snapshots, SNAPSHOT_FIELDS, axes_of(model.setup), attributes)
        fields = {name: getattr(model, name) for name in SNAPSHOT_FIELDS}
        self._snapshots.append(model.clock.days, fields)

    def finish(self, attributes: Mapping[str, str]) -> None:
        if self._snapshots is not None:
            self._snapshots.finish(attributes)


@contextmanager
def _stopping_on_signals(stop: threading.Event) -> Iterator[None]:
    """SIGINT and SIGTERM ask the run to stop at its next checkpoint; outside the main thread nothing is caught."""
    if threading.current_thread() is not threading.main_thread():
        yield
        return
    before = {number: signal.getsignal(number) for number in (signal.SIGINT, signal.SIGTERM)}
    for number in before:
        signal.signal(number, lambda *_: stop.set())
    try:
        yield
    finally:
        for number, handler in before.items():
            signal.signal(number, handler)


def _start_from(model: Model, path: Path) -> None:
    """Take the state of another run of the same grid."""
    arrays, _ = load_checkpoint(path)
    for name, mine in model.state._asdict().items():
        saved = arrays.get(f"state__{name}")
        if saved is None or saved.shape != mine.shape:
            got = "no such field" if saved is None else f"shape {saved.shape}"
            raise OceanboxError(
                f"{path}: {name}: got {got}; this configuration needs {mine.shape}; give the state of a run of the same grid"
            )
        mine[...] = saved
    model.open_books()


def _finish(run: Run, store: Store, keeper: _Keeper, outcome: Outcome) -> xr.Dataset:
    provenance = provenance_of(run.model.setup.config, outcome.sentence, run.notes)
    provenance |= {name: str(value) for name, value in store.purpose.attributes().items()}
    provenance["oceanbox_ending"] = outcome.ending.value
    keeper.finish(provenance)
    result = result_dataset(run, outcome, provenance)
    store.save_state(run)
    write_dataset(result, store.result)
    store.end()
    return result


def _already_finished(store: Store) -> Finished:
    result = read_dataset(store.result)
    outcome = Outcome(Ending(result.attrs["oceanbox_ending"]), result.attrs["oceanbox_outcome"])
    return Finished(result, outcome, store.result, found=True)


def _run(
    command: str,
    config: Config | Path | str,
    plan_of: Callable[[Config], Plan],
    into: Path | str | None,
    start: Path | None,
    report: Callable[[Progress], None],
) -> Finished:
    checked = check(config)
    config = checked.setup.config
    store = Store(Path(into) if into is not None else default_folder(config), Purpose.of(command, config, start))
    if store.finished():
        return _already_finished(store)
    model = Model(checked.setup)
    keeper = _Keeper(store, report)
    store.prepare(config)
    if start is not None:
        _start_from(model, start)
    run = Run(model, plan_of(config), keeper)
    if store.resume(run):
        keeper.resume_snapshots(run.counts.snapshots)
    with _stopping_on_signals(keeper.stop):
        try:
            outcome = run.until_end()
        except UnstableRun:
            # The run has been rewound to the last sound state; a checkpoint would only repeat the breakdown.
            store.save_state(run)
            raise
        return Finished(_finish(run, store, keeper, outcome), outcome, store.result, found=False)


def equilibrate(
    config: Config | Path | str,
    into: Path | str | None = None,
    start: Path | str | None = None,
    report: Callable[[Progress], None] = silent,
) -> Finished:
    """Run ``config`` (or the file of one) to equilibrium, or to the longest time it allows, from its initial state or from
    the state file ``start``.

    The result is written into the folder ``into`` (default ``results/<name>``) and returned.  A finished result of the same
    configuration is returned at once; an interrupted run goes on where it was.

    Raises ConfigError, ResultConflict, UnstableRun, InterruptedRun.
    """
    return _run("equilibrate", config, equilibrium_plan, into, Path(start) if start is not None else None, report)


def evolve(
    config: Config | Path | str,
    into: Path | str | None = None,
    start: Path | str | None = None,
    report: Callable[[Progress], None] = silent,
) -> Finished:
    """Run ``config`` for ``evolve.duration_days``, from its initial state or from the state file ``start``.

    As `equilibrate` otherwise; snapshots, if asked for, are in ``snapshots.nc`` beside the result.
    """
    return _run("evolve", config, evolution_plan, into, Path(start) if start is not None else None, report)
