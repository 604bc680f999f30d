"""What anybody who has run such a model expects to see ("common practice": no source is given for these)."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest

from oceanbox.config import loads
from oceanbox.experiment.assembly import assemble_setup
from oceanbox.experiment.model import Model
from tests.building import box, run_days
from tests.physics.busy_ocean import busy_ocean
from tests.theory.columns import restoring_time

DAY = 86400.0


def test_a_basin_of_ten_degrees_under_twenty_everywhere_ends_at_twenty() -> None:
    """Moving water makes no new extremum, so nowhere is the departure slower than where the layer is deepest."""
    model = box(
        {
            "layers.0.initial_temperature_degC": 10.0,
            "surface.heat.restoring.coefficient_W_per_m2_K": 40.0,
            "surface.heat.restoring.target_temperature_degC": 20.0,
            "motion.viscosity_m2_per_s": 2.0e4,
            "mixing.lateral_diffusivity_m2_per_s": 500.0,
            "surface.wind.zonal_stress_N_per_m2": -0.04,
        }
    )
    deepest = 0.0
    for _ in range(260):
        run_days(model, 5.0)
        deepest = max(deepest, float(model.thickness.max()))
        assert float(model.temperature.max()) <= 20.0
    assert float(np.ptp(model.thickness)) > 5.0, "the wind should tilt the layer"
    assert np.abs(model.temperature - 20.0).max() <= 10.0 * math.exp(
        -model.clock.seconds / restoring_time(deepest, 40.0)
    )
    assert np.abs(model.temperature - 20.0).max() < 0.05


@pytest.mark.parametrize("scheme", ["forward_backward", "runge_kutta_3"])
@pytest.mark.parametrize("salinity", [35.0, 36.0])
def test_a_level_warm_layer_without_wind_and_heating_stays_as_it_is_for_ever(scheme: str, salinity: float) -> None:
    """To the last bit, with friction, mixing, upwelling, transformation and outcrop at hand but nothing to drive them."""
    model = busy_ocean(
        {
            "numerics.scheme": scheme,
            "layers.0.initial_thickness_m": 137.3,
            "layers.0.initial_temperature_degC": 23.7,
            "layers.0.initial_salinity_g_per_kg": salinity,
            "entrainment.diffusive": None,
            "entrainment.prescribed": None,
            "surface.heat.restoring": None,
            "surface.heat.prescribed_W_per_m2": None,
            "surface.heat.loss_band": None,
            "surface.fresh_water": None,
            "surface.wind.zonal_stress_N_per_m2": 0.0,
            "surface.wind.meridional_stress_N_per_m2": 0.0,
        }
    )
    before = [field.copy() for field in model.state]
    model.advance(2000)
    for was, field, name in zip(before, model.state, model.state._fields, strict=True):
        assert np.array_equal(was, field), name


COARSE = """
name: coarse
basin: {width_km: 6000.0, south_km: -5000.0, north_km: 5000.0, cells_x: 20, cells_y: 50}
motion: {viscosity_m2_per_s: 6.5e5}
transformation: {efficiency: {kind: cooling, scale_K: 10.0}}
"""


def coarse_ocean(changes: dict[str, Any] | None = None) -> Model:
    """The default ocean on 300 km x 200 km cells, with the viscosity that these need."""
    return Model(assemble_setup(loads(COARSE).with_changes(changes or {})))


def continue_with(changes: dict[str, Any], start: Model) -> Model:
    """The coarse ocean with other forcing, from the state of another run."""
    model = coarse_ocean(changes)
    for mine, theirs in zip(model.state, start.state, strict=True):
        mine[...] = theirs
    model.open_books()
    return model


def equatorial_depth(model: Model) -> np.ndarray:
    """Thickness along the equator, (nx,), m: the mean over the two rows beside it."""
    rows = np.abs(model.grid.y) < 1.01 * 0.5 * model.grid.dy
    return model.thickness[0, rows].mean(axis=0)


@pytest.fixture(scope="module")
def spun_up() -> Model:
    model = coarse_ocean()
    run_days(model, 4 * 360.0)
    return model


def test_slackened_wind_levels_the_thermocline_within_months_and_leaves_its_mean_depth(spun_up: Model) -> None:
    """Levelling is adiabatic and takes a few crossings of equatorial waves; volume changes diabatically, over decades.

    Half a year is enough for a Kelvin wave (28 days over the basin) and the Rossby wave it turns into (83 days back). A tenth
    of the wind then holds a tenth of the tilt, and the east, which is colder, leans the other way: b h^2 is what is level.
    "Hardly" is read as: the mean depth changes by less than a tenth of the share by which the tilt changes.
    """
    slack = continue_with(
        {
            "surface.wind.zonal_stress_N_per_m2": {
                "sum": [
                    {"shape": "gaussian", "peak": -0.006, "width_deg": 18.0},
                    {"shape": "band", "peak": 0.008, "from_deg": 25.0, "to_deg": 45.0},
                ]
            }
        },
        spun_up,
    )
    run_days(slack, 180.0)
    before, after = equatorial_depth(spun_up), equatorial_depth(slack)
    tilt, tilt_after = before[0] - before[-1], after[0] - after[-1]
    change_of_mean = abs(slack.thickness.mean() / spun_up.thickness.mean() - 1.0)
    assert tilt > 20.0
    assert abs(tilt_after) < 0.3 * tilt
    assert change_of_mean < 0.1 * (1.0 - tilt_after / tilt)


def test_switching_off_the_heat_loss_of_high_latitudes_deepens_the_equatorial_thermocline(spun_up: Model) -> None:
    """Warm water that is no longer destroyed piles up: after two years by more than a metre, all along the equator.

    Two runs go on from the same state; in one of them the air exchanges no heat beyond 30 degrees.
    """
    no_exchange = {"points": [[-30.0, 0.0], [-28.0, 35.0], [28.0, 35.0], [30.0, 0.0]]}
    without_loss = continue_with({"surface.heat.restoring.coefficient_W_per_m2_K": no_exchange}, spun_up)
    with_loss = continue_with({}, spun_up)
    for model in (without_loss, with_loss):
        run_days(model, 720.0)
    beyond = np.abs(with_loss.grid.latitude) > 30.0
    heating = with_loss.grid.centres(with_loss.ledger.heat_restoring)[beyond]
    assert heating.sum() < 0.0, "the run that keeps its loss should lose heat beyond 30 degrees"
    assert (equatorial_depth(without_loss) - equatorial_depth(with_loss)).min() > 1.0
