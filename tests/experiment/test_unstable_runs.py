"""A run that breaks down ends at once, names step, place and cause, and leaves the last state that means something."""

from __future__ import annotations

import math
import re
from pathlib import Path

import numpy as np
import pytest

from oceanbox.config import Config, loads
from oceanbox.errors import UnstableRun
from oceanbox.experiment import api
from oceanbox.experiment.assembly import assemble_setup
from oceanbox.experiment.health import is_sound
from oceanbox.experiment.model import Model, limits_for
from oceanbox.experiment.plan import evolution_plan
from oceanbox.experiment.running import Run
from oceanbox.output.checkpoint import load_checkpoint
from tests.experiment.tiny_runs import TINY, Quiet


def hasty() -> Config:
    """The tiny ocean with six times the longest step, which the check before a run would refuse.

    Samples are so far apart that the run has broken down before it could notice that its step is too long.
    """
    seldom = {"output.sample_interval_days": 100.0, "output.series_interval_days": 100.0}
    config = loads(TINY).with_changes(seldom | {"evolve.snapshot_interval_days": None})
    return config.with_changes({"numerics.step_s": 6.0 * limits_for(assemble_setup(config)).smallest})


def broken_run(config: Config) -> tuple[Run, UnstableRun]:
    run = Run(Model(assemble_setup(config)), evolution_plan(config), Quiet())
    with pytest.raises(UnstableRun) as caught:
        run.until_end()
    return run, caught.value


def test_a_run_with_too_long_a_step_ends_and_says_why() -> None:
    """Step, day, layer, cell, the fields around it one step before, the cause and what to do about it."""
    config = hasty()
    limit = limits_for(assemble_setup(config)).smallest
    _, error = broken_run(config)
    step = config.numerics.step_s
    assert step is not None
    assert 0 < error.step < 200
    assert error.model_days == pytest.approx(error.step * step / 86400.0)
    text = str(error)
    assert text.startswith(f"unstable at step {error.step} (day {error.model_days:.2f}): layer 1, x = ")
    assert re.search(r"x = -?\d+ km, y = -?\d+ km \(cell \d+, \d+\) broke down", text)
    assert all(name in text for name in ("h/m [", "T/degC [", "u/(m s-1) [", "v/(m s-1) ["))
    assert f"likely cause: the step of {step:g} s is above the limit of {limit:g} s" in text
    assert text.endswith(f"set numerics.step_s to null or below {limit:.0f}")


def test_the_step_that_is_named_is_the_one_that_broke() -> None:
    """All steps before it are sound and it is not: found by taking the same steps one by one."""
    config = hasty()
    _, error = broken_run(config)
    model = Model(assemble_setup(config))
    model.advance(error.step - 1)
    assert is_sound(model)
    model.advance(1)
    assert not is_sound(model)


def test_a_run_that_broke_is_left_one_step_before() -> None:
    config = hasty()
    run, error = broken_run(config)
    assert run.model.total_steps == error.step - 1
    assert is_sound(run.model)


def test_the_place_that_is_named_is_where_the_water_went_wrong() -> None:
    """A heat flux that is not a number in one cell breaks that cell, and within the step the faces around it."""
    config = loads(TINY).with_changes({"evolve.snapshot_interval_days": None})
    model = Model(assemble_setup(config))
    j, i = 11, 5
    model.setup.forcing.prescribed_heating[j + 2, i + 2] = math.nan
    run = Run(model, evolution_plan(config), Quiet())
    with pytest.raises(UnstableRun) as caught:
        run.until_end()
    place = re.search(r"x = (-?\d+) km, y = (-?\d+) km \(cell (\d+), (\d+)\)", str(caught.value))
    assert place is not None
    x, y, row, column = (int(number) for number in place.groups())
    assert abs(row - j) <= 1 and abs(column - i) <= 1
    assert (x, y) == (round(model.grid.x[column] / 1e3), round(model.grid.y[row] / 1e3))


def test_no_current_is_faster_than_water_can_be() -> None:
    """A run is stopped before infinities if a current passes 20 m s-1."""
    model = Model(assemble_setup(loads(TINY)))
    assert is_sound(model)
    model.state.velocity_y[0, 8, 5] = -20.1
    assert not is_sound(model)


def test_the_last_sound_state_of_a_broken_run_is_kept(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """In state.nc, beside the resolved configuration; no result, and no restart point that would break again."""
    monkeypatch.setattr(api, "require_consistent", lambda *_: ())
    with pytest.raises(UnstableRun) as caught:
        api.evolve(hasty(), tmp_path)
    assert {path.name for path in tmp_path.iterdir()} == {"state.nc", "config.yaml"}
    arrays, attributes = load_checkpoint(tmp_path / "state.nc")
    assert all(np.isfinite(array).all() for array in arrays.values())
    assert np.abs(arrays["state__velocity_x"]).max() < 20.0
    assert 0.0 <= float(attributes["days"]) < caught.value.model_days
