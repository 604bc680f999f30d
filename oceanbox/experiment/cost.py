"""What a run will cost, from timing a few steps of the very setup; kept per machine beside the compiled code."""

import contextlib
import json
import time
from collections.abc import Callable
from functools import partial
from pathlib import Path

from oceanbox.compiling import CACHE_FOLDER
from oceanbox.config import Config
from oceanbox.constants import SECONDS_PER_DAY
from oceanbox.experiment.assembly import Setup
from oceanbox.experiment.health import is_sound
from oceanbox.experiment.model import Model
from oceanbox.experiment.recorder import Recorder

__all__ = ["START_AND_END", "seconds_per_step", "usual_years"]

# Timing goes on until this much processor time is spent, s.
TIMED_SECONDS = 0.5
FIRST_STEPS = 200
# To start and to write the result on a grid of some thousand cells, compiled before, s.
START_AND_END = 2.0
TIMED_SAMPLES = 5


def _calibration_file() -> Path:
    return CACHE_FOLDER / "calibration.json"


def _known() -> dict[str, float]:
    try:
        return dict(json.loads(_calibration_file().read_text(encoding="utf-8")))
    except (OSError, ValueError):
        return {}


def _best(act: Callable[[], object], times: int) -> float:
    """Shortest time of an act, s: other work on the machine can only slow it down."""
    spent = []
    for _ in range(times):
        start = time.perf_counter()
        act()
        spent.append(time.perf_counter() - start)
    return min(spent)


def _measure(setup: Setup) -> float:
    """Best time of a step over several stretches, and a step's share of what is looked at and recorded between stretches."""
    model = Model(setup)
    # The first steps from rest are slow out of proportion: the first waves spread numbers too small for full speed.
    model.advance(FIRST_STEPS)
    best, spent, steps = float("inf"), 0.0, 10
    while spent < TIMED_SECONDS:
        took = _best(partial(model.advance, steps), 1)
        best = min(best, took / steps)
        spent += took
        steps = max(steps, int(0.05 * TIMED_SECONDS / best) + 1)
    recorder = Recorder(model)
    recorder.sample()

    def look() -> None:
        is_sound(model)
        recorder.sample()

    looked_at = _best(look, TIMED_SAMPLES)
    interval = setup.config.output.sample_interval_days * SECONDS_PER_DAY
    return best + looked_at * min(1.0, model.clock.dt / interval)


def seconds_per_step(setup: Setup) -> float:
    """Wall time of one step of ``setup`` on this machine, its share of recording included, s; measured once for each kind."""
    grid, constants = setup.grid, setup.constants
    terms = [
        constants.momentum_advection,
        constants.upwind_thickness,
        constants.viscosity > 0.0,
        constants.diffusivity > 0.0,
        constants.mixed_depth > 0.0,
        constants.efficiency_scale,
        setup.config.numerics.scheme,
        setup.config.output.sample_interval_days,
    ]
    key = f"{setup.initial.thickness.shape[0]}x{grid.ny}x{grid.nx} {terms}"
    known = _known()
    if key not in known:
        known[key] = _measure(setup)
        # A calibration that cannot be kept is measured again next time.
        with contextlib.suppress(OSError):
            _calibration_file().write_text(json.dumps(known, indent=1), encoding="utf-8")
    return known[key]


# Model years to equilibrium of the middle one of the shipped configurations, with and without acceleration.
USUAL_YEARS, USUAL_YEARS_PLAIN = 10.0, 40.0


def usual_years(config: Config) -> float:
    """Model years after which a run is taken to be in equilibrium before anything better is known."""
    usual = USUAL_YEARS if config.equilibrium.acceleration is not None else USUAL_YEARS_PLAIN
    return min(usual, config.equilibrium.longest_years)
