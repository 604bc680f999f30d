"""The run loop: step to the next thing that is due, do it, go on.

Everything due happens at fixed model times, so a run that was cut anywhere and continued from a checkpoint does exactly what the
uncut run did.  Checkpoints alone follow the clock on the wall, and change nothing.
"""

import json
import math
import time
from collections.abc import Callable
from dataclasses import asdict, dataclass, replace
from typing import Any, Protocol

import numpy as np
from numpy.typing import NDArray

from oceanbox.constants import SECONDS_PER_DAY
from oceanbox.equilibrium import Drift, Tolerances, WindowMeans, drift_between, held
from oceanbox.errors import UnstableRun
from oceanbox.experiment.health import describe_breakdown, is_sound
from oceanbox.experiment.integrals import window_means
from oceanbox.experiment.model import Model, choose_step
from oceanbox.experiment.outcome import Ending, Outcome
from oceanbox.experiment.plan import SECONDS_PER_YEAR, Plan
from oceanbox.experiment.recorder import Recorder
from oceanbox.experiment.spinup import SpinUp
from oceanbox.stepping.limits import step_limits

__all__ = ["Observer", "Progress", "Run"]

Array = NDArray[np.float64]
# The step is shortened when the fastest wave leaves less than this margin to the limit.
LIMIT_MARGIN = 0.95


@dataclass(frozen=True)
class Progress:
    """Where a run is: model days, the last day it can reach, steps so far, the drift of the last window if any."""

    days: float
    end_days: float
    steps: int
    drift: Drift | None
    heat_imbalance: float
    note: str


class Observer(Protocol):
    """What the loop tells the outside and asks of it."""

    def progress(self, progress: Progress) -> None:
        """Called after every sample."""

    def snapshot(self, run: "Run", number: int) -> None:
        """Called at every snapshot time with its number."""

    def checkpoint_due(self) -> bool:
        """Whether the loop should now save a checkpoint."""

    def save(self, run: "Run") -> None:
        """Save a checkpoint; raises InterruptedRun to stop the run afterwards."""


@dataclass
class Progressing:
    """Counters of a run, part of its checkpoint."""

    samples: int = 0
    points: int = 0
    windows: int = 0
    snapshots: int = 0
    good_windows: int = 0
    window_open: bool = False
    judged_from: float = 0.0  # s; windows are counted from here


class Run:
    """One model on its way through a plan."""

    def __init__(self, model: Model, plan: Plan, observer: Observer) -> None:
        self.model = model
        self.plan = plan
        self.observer = observer
        self.recorder = Recorder(model)
        self.counts = Progressing(window_open=plan.windows_repeat or plan.window_start() == 0.0)
        self.previous: WindowMeans | None = None
        self.drift: Drift | None = None
        self.held: dict[str, bool] = {}
        self.notes: list[str] = []
        # Wave speed and crossing rate for which the step was last checked.
        self._checked: tuple[float, float] = (0.0, 0.0)
        acceleration = model.setup.config.equilibrium.acceleration
        self.spin_up: SpinUp | None = None
        if acceleration is not None and acceleration.lead_years * SECONDS_PER_YEAR < plan.accelerated_until:
            self.spin_up = SpinUp(model, acceleration.memory, acceleration.pace_limit, self._tolerances())
        self._good_fields = [np.empty_like(field) for field in (*model.state, *model.memory)]
        self._copy_good_state()

    # -- the loop -----------------------------------------------------------------------------------------------------

    def until_end(self) -> Outcome:
        """Run to the end of the plan or to equilibrium.

        Raises UnstableRun (the last sound state is then in ``model``) and InterruptedRun.
        """
        clock = self.model.clock
        if clock.seconds == 0.0 and self.plan.snapshot < math.inf and self.counts.snapshots == 0:
            self._take_snapshot()
        outcome: Outcome | None = None
        while outcome is None:
            self._advance_to(self._next_time())
            outcome = self._do_what_is_due()
            self._report()
            if outcome is None and self.observer.checkpoint_due():
                self.observer.save(self)
        # Nothing can break any more, and the result needs the room.
        self._good_fields.clear()
        return outcome

    def _next_time(self) -> float:
        plan, counts = self.plan, self.counts
        due = [plan.end, (counts.samples + 1) * plan.sample, (counts.points + 1) * plan.series]
        if self._spinning_up():
            due.append(self._cycle_end())
        elif plan.windows_repeat:
            due.append(self._window_end())
        elif not counts.window_open:
            due.append(plan.window_start())
        if plan.snapshot < math.inf:
            due.append(counts.snapshots * plan.snapshot)
        return min(due)

    def _advance_to(self, seconds: float) -> None:
        steps = self.model.clock.steps_until(seconds)
        if steps == 0:
            return
        self.model.advance(steps)
        if not is_sound(self.model):
            self._rewind()
            if not self._spin_up_survives():
                raise self._find_breakdown(steps)
            return
        self._keep_step_stable()
        self._copy_good_state()

    def _is_due(self, seconds: float) -> bool:
        return self.model.clock.steps_until(seconds) == 0

    def _do_what_is_due(self) -> Outcome | None:
        plan, counts = self.plan, self.counts
        if self._is_due((counts.samples + 1) * plan.sample):
            counts.samples += 1
            self.recorder.sample()
        if self._is_due((counts.points + 1) * plan.series):
            counts.points += 1
            self.recorder.close_interval()
        if plan.snapshot < math.inf and self._is_due(counts.snapshots * plan.snapshot):
            self._take_snapshot()
        if self._spinning_up():
            if self._is_due(self._cycle_end()):
                self._end_cycle()
        elif plan.windows_repeat and self._is_due(self._window_end()):
            return self._end_window()
        if not plan.windows_repeat and not counts.window_open and self._is_due(plan.window_start()):
            counts.window_open = True
            self.recorder.open_window()
        if self._is_due(plan.end):
            self._ensure_sampled()
            days = self.model.clock.days
            if plan.windows_repeat:
                years = self.model.clock.seconds / SECONDS_PER_YEAR
                return Outcome(
                    Ending.NOT_IN_EQUILIBRIUM, f"not in equilibrium after {years:g} years: {self._measures()}"
                )
            return Outcome(Ending.COMPLETED, f"ran for the {days:g} days asked for")
        return None

    def _take_snapshot(self) -> None:
        self.observer.snapshot(self, self.counts.snapshots)
        self.counts.snapshots += 1

    def _ensure_sampled(self) -> None:
        """A window shorter than the sample interval still needs one sample."""
        if self.recorder.fields.count == 0:
            self.recorder.sample()

    # -- spin-up ------------------------------------------------------------------------------------------------------

    def _spinning_up(self) -> bool:
        return self.spin_up is not None and not self.spin_up.counts.ended

    def _cycle_end(self) -> float:
        """End of the cycle of the acceleration that is under way; cycle 0 is the lead, s."""
        assert self.spin_up is not None
        asked = self.model.setup.config.equilibrium.acceleration
        assert asked is not None
        return (asked.lead_years + self.spin_up.counts.cycles * asked.cycle_years) * SECONDS_PER_YEAR

    def _end_cycle(self) -> None:
        """Extrapolate, or end the spin-up: then the windows that are judged begin."""
        spin_up, asked = self.spin_up, self.model.setup.config.equilibrium
        assert spin_up is not None and asked.acceleration is not None
        self._note(spin_up.end_cycle(asked.acceleration.cycle_years / 10.0))
        if self._cycle_end() > self.plan.accelerated_until:
            self._note(spin_up.run_out())
        self._after_spin_up()

    def _spin_up_survives(self) -> bool:
        """Whether the breakdown just rewound was one of hastened steps; the run can then go on."""
        if self.spin_up is None:
            return False
        told = self.spin_up.survive()
        if told:
            self._note(told)
            self._after_spin_up()
        return told != ""

    def _after_spin_up(self) -> None:
        """New books for the next cycle or the first window; true steps if the spin-up has ended."""
        assert self.spin_up is not None
        counts = self.spin_up.counts
        if counts.ended:
            self.model.step_truly()
            self.model.change_step(self.model.clock.dt)
            self.counts.judged_from = self.model.clock.seconds
            self._note(
                f"spin-up ended after {counts.cycles} cycles; it added {counts.volume_added:.4g} m3, "
                f"{counts.heat_added:.4g} J and {counts.salt_added:.4g} kg of salt outside every window that is judged"
            )
        self.recorder.open_window()
        self._copy_good_state()

    def _note(self, told: str) -> None:
        if told:
            self.notes.append(f"day {self.model.clock.days:.0f}: {told}")

    def _window_end(self) -> float:
        return self.counts.judged_from + (self.counts.windows + 1) * self.plan.window

    # -- equilibrium --------------------------------------------------------------------------------------------------

    def _end_window(self) -> Outcome | None:
        plan, counts, asked = self.plan, self.counts, self.model.setup.config.equilibrium
        counts.windows += 1
        self._ensure_sampled()
        means = self.recorder.scalars.mean
        seconds = self.model.clock.seconds - self.model.opened_at
        now = window_means(self.model, seconds, float(means["warm_water_volume"]), float(means["heat_content"]))
        if self.previous is not None:
            self.drift = drift_between(self.previous, now, asked.window_years)
            self.held = held(self.drift, self._tolerances())
            counts.good_windows = counts.good_windows + 1 if all(self.held.values()) else 0
        self.previous = now
        years = self.model.clock.seconds / SECONDS_PER_YEAR
        if counts.good_windows >= asked.windows_in_a_row:
            return Outcome(
                Ending.EQUILIBRIUM,
                f"in equilibrium after {years:g} years, all measures held for {counts.good_windows} windows of "
                f"{asked.window_years:g} years: {self._measures()}",
            )
        if not self._is_due(plan.end):
            self.recorder.open_window()
        return None

    def _tolerances(self) -> Tolerances:
        asked = self.model.setup.config.equilibrium
        return Tolerances(
            asked.volume_drift_per_decade,
            asked.heat_drift_per_decade,
            asked.heat_imbalance,
            asked.exchange_imbalance,
        )

    def _measures(self) -> str:
        if self.drift is None:
            return "no two windows to compare"
        words = {
            "volume_per_decade": "volume drift per decade",
            "heat_per_decade": "heat drift per decade",
            "heat_imbalance": "heat imbalance",
            "exchange_imbalance": "exchange imbalance",
        }
        return ", ".join(
            f"{words[name]} {value:.2g} ({'held' if self.held[name] else 'not held'})"
            for name, value in asdict(self.drift).items()
        )

    # -- keeping the run sound ----------------------------------------------------------------------------------------

    def _copy_good_state(self) -> None:
        """Into arrays made once: on a large grid they are a fifth of all memory."""
        model = self.model
        for good, field in zip(self._good_fields, (*model.state, *model.memory), strict=True):
            good[...] = field
        self._good_clock = (model.clock.epoch, model.clock.dt, model.clock.steps, model.total_steps)

    def _rewind(self) -> None:
        model = self.model
        for good, field in zip(self._good_fields, (*model.state, *model.memory), strict=True):
            field[...] = good
        model.clock.epoch, model.clock.dt, model.clock.steps, model.total_steps = self._good_clock

    def _find_breakdown(self, steps: int) -> UnstableRun:
        """Repeat the stretch that broke, rewound, step by step, to name the step and the place."""
        for _ in range(steps):
            self._copy_good_state()
            self.model.advance(1)
            if not is_sound(self.model):
                break
        broken = Model(self.model.setup)
        broken.restore(self.model.arrays())
        broken.clock, broken.total_steps = replace(self.model.clock), self.model.total_steps
        days = self.model.clock.days
        self._rewind()
        error = describe_breakdown(broken, self.model)
        error.model_days = days
        return error

    def _keep_step_stable(self) -> None:
        """Shorten the step, and say so, when the ocean has become faster than the step was chosen for."""
        model, numerics = self.model, self.model.setup.config.numerics
        if model.constants.linear_depth > 0.0:
            return
        speed, crossing = model.fastest_wave(), model.crossing_rate()
        if speed <= 1.02 * self._checked[0] and crossing <= 1.1 * self._checked[1]:
            return
        self._checked = speed, crossing
        limits = step_limits(
            numerics.scheme, model.grid, speed, crossing, model.constants.viscosity, model.constants.diffusivity
        )
        if model.clock.dt <= LIMIT_MARGIN * limits.smallest:
            return
        shorter = choose_step(limits.smallest, numerics.step_safety)
        self.notes.append(
            f"day {model.clock.days:.0f}: step shortened from {model.clock.dt:g} s to {shorter:g} s ({limits.cause})"
        )
        model.change_step(shorter)

    # -- checkpoint ---------------------------------------------------------------------------------------------------

    def _report(self) -> None:
        series = self.recorder.series.get("heat_imbalance", [math.nan])
        self.observer.progress(
            Progress(
                days=self.model.clock.days,
                end_days=self.plan.end / SECONDS_PER_DAY,
                steps=self.model.total_steps,
                drift=self.drift,
                heat_imbalance=series[-1],
                note=self.notes[-1] if self.notes else "",
            )
        )

    def checkpoint_arrays(self) -> dict[str, Array]:
        """All arrays that a restart needs."""
        spin_up = self.spin_up.arrays() if self._spinning_up() and self.spin_up else {}
        return self.model.arrays() | self.recorder.arrays() | spin_up

    def checkpoint_attributes(self) -> dict[str, str | int | float]:
        """All numbers and texts that a restart needs; floats keep every bit."""
        clock = self.model.clock
        record: dict[str, Any] = {
            "counts": asdict(self.counts),
            "previous": asdict(self.previous) if self.previous else None,
            "drift": asdict(self.drift) if self.drift else None,
            "held": self.held,
            "notes": self.notes,
            "clock": [clock.epoch, clock.dt, clock.steps],
            "total_steps": self.model.total_steps,
            "opened_at": self.model.opened_at,
            "checked": list(self._checked),
            "spin_up": self.spin_up.record() if self.spin_up else None,
        }
        # json writes the shortest text that reads back as the same float.
        return {"run": json.dumps(record)}

    def restore(self, arrays: dict[str, Array], attributes: dict[str, Any]) -> None:
        """Take over a checkpoint of the same configuration."""
        record = json.loads(attributes["run"])
        self.model.restore(arrays)
        self.recorder.restore(arrays)
        self.counts = Progressing(**record["counts"])
        self.previous = WindowMeans(**record["previous"]) if record["previous"] else None
        self.drift = Drift(**record["drift"]) if record["drift"] else None
        self.held, self.notes = record["held"], record["notes"]
        clock = self.model.clock
        clock.epoch, clock.dt, clock.steps = record["clock"]
        self.model.total_steps = record["total_steps"]
        self.model.opened_at = record["opened_at"]
        self._checked = tuple(record["checked"])
        if self.spin_up is not None:
            self.spin_up.restore(arrays, record["spin_up"])
        self._copy_good_state()


class WallClock:
    """Says when ``interval`` seconds have passed since the last time it said so."""

    def __init__(self, interval: float, now: Callable[[], float] = time.monotonic) -> None:
        self._interval, self._now = interval, now
        self._last = now()

    def rang(self) -> bool:
        """Whether the interval has passed; starts the next one if so."""
        if self._now() - self._last < self._interval:
            return False
        self._last = self._now()
        return True
