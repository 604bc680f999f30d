"""The configurations in ``configs/checks`` run as they are and give what the comments at their top say."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from oceanbox.config import load
from oceanbox.constants import SECONDS_PER_DAY
from oceanbox.experiment.api import check, evolve
from oceanbox.experiment.outcome import Ending
from tests.physics.check_ocean import FOLDER
from tests.theory.adjustment import adjusted_step_height, adjusted_step_velocity
from tests.theory.yoshida_jet import yoshida_rates_on_c_grid

PATHS = sorted(FOLDER.glob("*.yaml"))


@pytest.mark.parametrize("path", PATHS, ids=lambda path: path.stem)
def test_a_check_can_be_run_and_says_which_solution_it_is(path: Path) -> None:
    """Its name is that of its file, its physics make sense, and its first lines are a comment."""
    config = load(path).config
    assert config.name == path.stem
    assert config.description.endswith(".")
    assert check(path).setup.config == config
    assert path.read_text(encoding="utf-8").startswith("# ")


def test_the_adjusted_step_comes_out_of_a_run(tmp_path: Path) -> None:
    """Within 1.2 mm of the exponential, and 6.32 mm s-1 at the step to the same share."""
    finished = evolve(FOLDER / "rossby_adjustment.yaml", into=tmp_path)
    assert finished.outcome.ending is Ending.COMPLETED
    result, radius = finished.result, np.sqrt(0.02 * 500.0) / 1e-4
    y = result["y"].values
    height = adjusted_step_height(y, 1.0, radius)
    current = -adjusted_step_velocity(y, 1.0, radius, 0.02, 1e-4)
    assert result["thickness"].values[0, :, 0] - 500.0 == pytest.approx(height, rel=0, abs=1.2e-3)
    assert result["velocity_x"].values[0, :, 0] == pytest.approx(current, rel=0, abs=2.5e-3 * 6.32e-3)


def test_the_yoshida_jet_comes_out_of_a_run(tmp_path: Path) -> None:
    """From day 20 to day 60 u gains 2.8 cm s-1 and h 1.03 m a day on the rows beside the equator, as the grid must.

    A line fitted with weights sin^2, which keep little of what rings on (tests/physics/test_yoshida_jet.py); 0.1 % because
    snapshots every other day fold fast waves onto slow ones.
    """
    import xarray as xr

    finished = evolve(FOLDER / "yoshida_jet.yaml", into=tmp_path)
    assert finished.outcome.ending is Ending.COMPLETED
    with xr.open_dataset(tmp_path / "snapshots.nc") as snapshots:
        u = snapshots["velocity_x"].values[:, 0, 79:81, 0].mean(axis=1)
        h = snapshots["thickness"].values[:, 0, 79:81, 0].mean(axis=1)
    days = 2.0 * np.arange(10, 31)
    rates = [np.polyfit(days, field[10:], 1, w=np.sin(np.pi * (days - 19.0) / 42.0))[0] for field in (u, h)]
    on_grid = yoshida_rates_on_c_grid(finished.result["y_face"].values, 0.05, 150.0, 0.04, 2.28e-11)
    expected = [rate[79] * SECONDS_PER_DAY for rate in (on_grid.acceleration, on_grid.deepening)]
    assert rates == pytest.approx(expected, rel=1e-3)
