"""The shipped basin on its coarse cells, run to equilibrium: observations and common practice."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from statsmodels.datasets import elnino

from oceanbox.config import load
from oceanbox.experiment.api import Finished, equilibrate, evolve
from oceanbox.experiment.outcome import Ending

pytestmark = pytest.mark.slow
QUICK = Path(__file__).parents[2] / "configs" / "quick.yaml"


@pytest.fixture(scope="module")
def equilibrium(tmp_path_factory: pytest.TempPathFactory) -> Finished:
    return equilibrate(QUICK, tmp_path_factory.mktemp("quick"))


def test_it_reaches_equilibrium(equilibrium: Finished) -> None:
    """What the air gives the tropics it takes at high latitudes, and as much water is made as destroyed."""
    result = equilibrium.result
    assert equilibrium.outcome.ending is Ending.EQUILIBRIUM
    assert float(result["heat_imbalance"]) <= 0.02
    assert float(result["exchange_imbalance"]) <= 0.05
    assert (
        float(np.abs(result["northward_heat_transport"] - result["northward_heat_transport_from_surface"]).max()) <= 1e9
    )


def test_the_far_eastern_equatorial_surface_is_as_warm_as_observed(equilibrium: Finished) -> None:
    """Within the range of yearly means of the sea surface temperature at 0-10 S, 90-80 W, 1950 to 2010 (public domain).

    Yearly, because the model has no seasons. Plausibility only: the basin is an invented one.
    """
    yearly = elnino.load_pandas().data.set_index("YEAR").mean(axis=1)
    east = float(equilibrium.result["surface_temperature_equator_east"])
    assert yearly.min() <= east <= yearly.max(), f"{east:.2f} degC, observed {yearly.min():.2f} to {yearly.max():.2f}"


def test_a_cold_tongue_reaches_west_from_the_eastern_wall(equilibrium: Finished) -> None:
    """Under easterly trades the thermocline shoals eastward and the surface above it is colder (common practice)."""
    result = equilibrium.result
    assert float(result["equatorial_tilt"]) != 0.0
    assert float(result["thermocline_depth_equator_west"]) > float(result["thermocline_depth_equator_east"]) + 10.0
    assert float(result["surface_temperature_equator_west"]) > float(result["surface_temperature_equator_east"]) + 1.0
    assert float(result["cold_tongue_area"]) > 0.0


def test_without_heat_loss_at_high_latitudes_the_equatorial_thermocline_is_deeper(
    equilibrium: Finished, tmp_path: Path
) -> None:
    """Four years on, with no exchange of heat beyond 30 degrees: warm water that is not destroyed piles up."""
    no_exchange = {"points": [[-30.0, 0.0], [-28.0, 35.0], [28.0, 35.0], [30.0, 0.0]]}
    changes = {
        "surface.heat.restoring.coefficient_W_per_m2_K": no_exchange,
        "evolve.duration_days": 1461.0,
        "equilibrium.window_years": 1.0,
    }
    config = load(QUICK).config.with_changes(changes)
    later = evolve(config, tmp_path, start=equilibrium.path.parent / "state.nc").result
    # Heating a column by the water that it entrains is a difference that leaves a rounding where there is no flux.
    assert float(later["applied_high_latitude_loss"]) < 1e-12 * float(later["tropical_heat_gain"])
    for where in ("west", "east", "mean"):
        name = f"thermocline_depth_equator_{where}"
        assert float(later[name]) > float(equilibrium.result[name]) + 1.0, name
