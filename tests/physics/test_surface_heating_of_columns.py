"""Columns under a restoring heat flux: the slab, and the column that cold water rises into.

A uniform ocean without wind stays at rest, so every cell of it is such a column. Column integration is exact, so what is
left is round-off: a step rounds the heat content a few times by eps/2, and a slab forgets none of it faster than it
forgets its initial state, so n steps err by at most 4 n eps times the content.
"""

from __future__ import annotations

import math

import numpy as np
import pytest

from oceanbox.experiment.model import Model
from tests.building import ABYSS_DEGC, box
from tests.theory.columns import restored_slab_temperature, restoring_time, upwelling_column
from tests.theory.printed import rounds_to

EPS = float(np.finfo(float).eps)
DAY = 86400.0


def column(depth: float, start: float, target: float, coefficient: float, **changes: object) -> Model:
    """A uniform ocean at rest: its depth [m], temperature [degC], target [degC] and coefficient [W m-2 K-1]."""
    return box(
        {
            "layers.0.initial_thickness_m": depth,
            "layers.0.initial_temperature_degC": start,
            "surface.heat.restoring.coefficient_W_per_m2_K": coefficient,
            "surface.heat.restoring.target_temperature_degC": target,
            "numerics.exchange_interval_days": 0.0,
        }
        | changes
    )


@pytest.mark.parametrize("scheme", ["forward_backward", "runge_kutta_3"])
@pytest.mark.parametrize(("start", "target"), [(12.0, 28.0), (28.0, 12.0)], ids=["warming", "cooling"])
@pytest.mark.parametrize(("step_days", "steps"), [(0.05, 2000), (5.0, 20), (100.0, 1)])
def test_a_slab_relaxes_exponentially_at_any_step(
    scheme: str, start: float, target: float, step_days: float, steps: int
) -> None:
    """T = T* + (T0 - T*) exp(-t lambda/(rho0 c_p h)), Haney 1971 for the flux; derived."""
    model = column(50.0, start, target, 40.0, **{"numerics.scheme": scheme, "numerics.step_s": step_days * DAY})
    model.advance(steps)
    exact = restored_slab_temperature(100.0 * DAY, start, target, restoring_time(50.0, 40.0))
    allowed = 4.0 * (steps + 1) * EPS * 28.0
    assert np.abs(model.temperature - exact).max() <= allowed


def test_a_slab_does_not_care_how_often_it_meets_the_air() -> None:
    """Exchanging every fifth step over five steps gives the exponential as well; a stretch that ends between owes no time."""
    model = column(
        50.0, 12.0, 28.0, 40.0, **{"numerics.step_s": 0.05 * DAY, "numerics.exchange_interval_days": 0.25}
    )  # fmt: skip
    model.advance(3)
    early = restored_slab_temperature(0.15 * DAY, 12.0, 28.0, restoring_time(50.0, 40.0))
    assert np.abs(model.temperature - early).max() <= 8.0 * EPS * 28.0
    model.advance(1997)
    exact = restored_slab_temperature(100.0 * DAY, 12.0, 28.0, restoring_time(50.0, 40.0))
    assert np.abs(model.temperature - exact).max() <= 4.0 * 401 * EPS * 28.0


@pytest.mark.parametrize(("coefficient", "printed_days"), [(40.0, "59.1965"), (35.0, "67.6532")])
def test_fifty_metres_of_water_relax_with_the_e_folding_time_of_the_handbook(
    coefficient: float, printed_days: str
) -> None:
    """rho0 c_p h/lambda is 59.1965 days at 40 W m-2 K-1 and 67.6532 at 35; derived."""
    start, target = 12.0, 28.0
    model = column(50.0, start, target, coefficient, **{"numerics.step_s": 0.5 * DAY})
    model.advance(60)
    left = (target - model.temperature) / (target - start)
    assert np.ptp(left) == 0.0
    assert rounds_to(-30.0 / math.log(left[0, 0, 0]), printed_days)


# lambda 40 W m-2 K-1, T* 28 degC, water of 20 degC rising at 1e-5 m s-1.
UPWELLING = {"water.abyss_temperature_degC": 20.0, "entrainment.prescribed.velocity_m_per_day": 1e-5 * DAY}


@pytest.mark.parametrize("scheme", ["forward_backward", "runge_kutta_3"])
@pytest.mark.parametrize("step_days", [0.1, 10.0])
def test_a_column_that_cold_water_rises_into_keeps_its_temperature_of_balance(scheme: str, step_days: float) -> None:
    """T = (lambda T* + rho0 c_p w T_d)/(lambda + rho0 c_p w) = 23.9547 degC, and it takes up 161.813 W m-2; derived.

    The heat taken up is that needed by the water that rises. Each of the n steps rounds contents that grow to h Theta.
    """
    balance = upwelling_column(40.0, 28.0, 20.0, 1e-5)
    model = column(
        60.0, balance.temperature, 28.0, 40.0,
        **UPWELLING, **{"numerics.scheme": scheme, "numerics.step_s": step_days * DAY},
    )  # fmt: skip
    steps = round(100.0 / step_days)
    model.advance(steps)
    assert np.abs(model.temperature - balance.temperature).max() <= 4.0 * (steps + 1) * EPS * balance.temperature
    assert rounds_to(model.temperature.mean(), "23.9547")
    heat = model.grid.centres(model.ledger.heat_restoring) * model.setup.water.heat / (100.0 * DAY)
    # The content of 60 to 146 m, K m, is rounded in each step; the flux is its change over the whole time.
    rounding = 4.0 * (steps + 1) * EPS * 146.4 * 4.0 * model.setup.water.heat / (100.0 * DAY)
    assert np.abs(heat - balance.heat_gain).max() <= rounding
    assert rounds_to(heat.mean(), "161.813")
    needed = model.setup.water.heat * 1e-5 * (balance.temperature - 20.0)
    assert np.abs(heat - needed).max() <= rounding


@pytest.mark.parametrize("start", [20.0, 27.5])
def test_a_column_that_cold_water_rises_into_approaches_balance_as_a_power_of_its_depth(start: float) -> None:
    """h Theta_t = k (Theta* - Theta) - w Theta with h = h0 + w t: the departure decays as (h0/h)^(1 + k/w); derived."""
    balance = upwelling_column(40.0, 28.0, 20.0, 1e-5)
    model = column(60.0, start, 28.0, 40.0, **UPWELLING, **{"numerics.step_s": 2.0 * DAY})
    model.advance(50)
    k = 40.0 / model.setup.water.heat
    depth = 60.0 + 1e-5 * 100.0 * DAY
    exact = balance.temperature + (start - balance.temperature) * (60.0 / depth) ** (1.0 + k / 1e-5)
    assert np.abs(model.thickness - depth).max() <= 50 * EPS * depth
    # Powers of numbers near 1 lose one digit more.
    assert np.abs(model.temperature - exact).max() <= 10.0 * 51 * EPS * 28.0


@pytest.mark.parametrize("start", [8.0, 28.0])
def test_a_given_flux_and_a_restoring_one_add_up(start: float) -> None:
    """T approaches T* + Q/lambda with the same e-folding time; derived."""
    flux = 80.0
    model = column(
        50.0, start, 15.0, 40.0, **{"numerics.step_s": 3.0 * DAY, "surface.heat.prescribed_W_per_m2": flux}
    )  # fmt: skip
    model.advance(30)
    exact = restored_slab_temperature(90.0 * DAY, start, 15.0 + flux / 40.0, restoring_time(50.0, 40.0))
    assert np.abs(model.temperature - exact).max() <= 4.0 * 31 * EPS * 28.0
    given = model.grid.centres(model.ledger.heat_prescribed) * model.setup.water.heat
    assert given == pytest.approx(np.full_like(given, flux * 90.0 * DAY), rel=31 * EPS)


def test_the_quiet_box_is_as_cold_as_its_abyss_where_the_tests_say_so() -> None:
    """The columns above are set in degrees; the model counts from the abyss."""
    assert box().setup.config.water.abyss_temperature_degC == ABYSS_DEGC
