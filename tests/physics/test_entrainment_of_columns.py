"""Making warm water in one column: each closure is its own differential equation, solved exactly over a step.

A step of any length must land on the solution, so many short steps and one long one agree; only round-off is left, at most
a few eps of the thickness in each step.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from oceanbox.physics.column import transformed_thickness
from oceanbox.physics.entrainment import diffusive_gain, shoaling_gain, upwelling_gain
from oceanbox.physics.state import Constants
from tests.building import box
from tests.theory.columns import (
    balanced_upwelling_thickness,
    diffusive_entrainment_thickness,
    upwelling_entrainment_thickness,
)

EPS = float(np.finfo(float).eps)
DAY = 86400.0
MIXED_DEPTH, HALF_THICKNESS = 50.0, 30.0
MINIMUM, SHOALING_TIME = 60.0, 2.0 * DAY

CLOSURES = {
    "entrainment.upwelling.mixed_layer_depth_m": MIXED_DEPTH,
    "entrainment.upwelling.thermocline_half_thickness_m": HALF_THICKNESS,
    "entrainment.diffusive.diffusivity_m2_per_s": 1.0e-4,
    "entrainment.shoaling.minimum_thickness_m": MINIMUM,
    "entrainment.shoaling.time_days": SHOALING_TIME / DAY,
}
STRETCHES = pytest.mark.parametrize(("step", "steps"), [(0.02 * DAY, 5000), (DAY, 100), (100.0 * DAY, 1)])


@pytest.fixture(scope="module")
def constants() -> Constants:
    return box(CLOSURES | {"transformation.efficiency": {"kind": "constant", "value": 1.0}}).constants


def after(depth: float, steps: int, gain: Callable[[float], float]) -> float:
    for _ in range(steps):
        depth += gain(depth)
    return depth


@STRETCHES
@pytest.mark.parametrize("start", [20.0, 150.0])
def test_vertical_mixing_deepens_a_column_by_the_square_root_law(
    constants: Constants, start: float, step: float, steps: int
) -> None:
    """h = sqrt(h0^2 + 2 kappa t) solves h_t = kappa/h; derived."""
    depth = after(start, steps, lambda h: diffusive_gain(h, step, constants))
    exact = diffusive_entrainment_thickness(100.0 * DAY, start, 1.0e-4)
    assert depth == pytest.approx(float(exact), rel=4.0 * steps * EPS)


@STRETCHES
@pytest.mark.parametrize("scheme", ["forward_backward", "runge_kutta_3"])
def test_an_ocean_at_rest_deepens_by_the_square_root_law(scheme: str, step: float, steps: int) -> None:
    """As the column above, through the whole model, which books what it gained."""
    model = box(
        {
            "entrainment.diffusive.diffusivity_m2_per_s": 1.0e-4,
            "numerics.step_s": step,
            "numerics.exchange_interval_days": 0.0,
            "numerics.scheme": scheme,
        }
    )
    model.advance(steps)
    exact = float(diffusive_entrainment_thickness(100.0 * DAY, 150.0, 1.0e-4))
    assert np.abs(model.thickness / exact - 1.0).max() <= 4.0 * steps * EPS
    gained = model.grid.centres(model.ledger.entrainment_diffusive)
    assert np.abs(gained - (exact - 150.0)).max() <= 8.0 * steps * EPS * exact


@STRETCHES
@pytest.mark.parametrize("start", [20.0, MIXED_DEPTH, 80.0, 250.0])
@pytest.mark.parametrize("upwelling", [1e-6, 2e-5])
def test_upwelling_deepens_a_column_by_the_logarithmic_law(
    constants: Constants, start: float, upwelling: float, step: float, steps: int
) -> None:
    """h_t = w exp(-(h - H_m)/l): exp((h - H_m)/l) grows linearly in time; derived.

    The exponential turns an error of h into h/l times as many eps.
    """
    depth = after(start, steps, lambda h: upwelling_gain(h, upwelling, step, constants))
    exact = upwelling_entrainment_thickness(100.0 * DAY, start, upwelling, MIXED_DEPTH, HALF_THICKNESS)
    assert depth == pytest.approx(float(exact), rel=4.0 * (1.0 + start / HALF_THICKNESS) * steps * EPS)


def test_a_column_inside_the_mixed_layer_takes_all_that_wells_up(constants: Constants) -> None:
    """phi = 1 where h <= H_m: h grows by w t; derived."""
    depth = after(20.0, 50, lambda h: upwelling_gain(h, 1e-6, DAY / 2, constants))
    exact = upwelling_entrainment_thickness(25.0 * DAY, 20.0, 1e-6, MIXED_DEPTH, HALF_THICKNESS)
    assert depth == pytest.approx(float(exact), rel=4.0 * 50 * EPS)


def test_sinking_makes_no_warm_water(constants: Constants) -> None:
    """w_e = phi max(w_up, 0)."""
    assert upwelling_gain(80.0, -1e-5, DAY, constants) == 0.0
    assert upwelling_gain(80.0, 0.0, DAY, constants) == 0.0


@pytest.mark.parametrize("step", [0.25 * DAY, 10.0 * DAY])
def test_upwelling_and_destruction_balance_at_the_logarithm_of_their_ratio(constants: Constants, step: float) -> None:
    """h = H_m + l ln(w/w_d), in the steady state of entrainment and transformation taking turns; derived.

    Taking turns, the column gains l ln(1 + phi w dt/l) = w_d dt in each step, so phi w = w_d (e^x - 1)/x, x = w_d dt/l.
    12000 days are 35 relaxation times l/w_d: what is left is the round-off of a step over the share x a step removes.
    """
    upwelling, destruction, theta = 2e-5, 1e-6, 15.0
    b = constants.gravity * constants.expansion_abyss * theta
    heating = -destruction * theta * step  # K m, which with efficiency 1 destroys heating/Theta
    h = 100.0
    for _ in range(round(12000.0 * DAY / step)):
        h += upwelling_gain(h, upwelling, step, constants)
        h -= transformed_thickness(h, theta, b, h * theta, heating, 0.0, constants)
    x = destruction * step / HALF_THICKNESS
    splitting = HALF_THICKNESS * np.log(np.expm1(x) / x)
    exact = balanced_upwelling_thickness(upwelling, destruction, MIXED_DEPTH, HALF_THICKNESS)
    assert h == pytest.approx(exact - splitting, rel=4.0 * EPS / x)


@STRETCHES
@pytest.mark.parametrize("start", [1.0, 30.0, 59.0])
def test_shoaling_closes_the_gap_to_the_least_thickness_hyperbolically(
    constants: Constants, start: float, step: float, steps: int
) -> None:
    """h_t = (h_min - h)^2/(t_e h_min), whose gap is gap/(1 + gap t/(t_e h_min)); derived."""
    depth = after(start, steps, lambda h: shoaling_gain(h, step, constants))
    gap = MINIMUM - start
    exact = MINIMUM - gap / (1.0 + gap * 100.0 * DAY / (SHOALING_TIME * MINIMUM))
    assert depth == pytest.approx(exact, rel=4.0 * steps * EPS)


def test_shoaling_agrees_with_the_numerical_solution_of_its_equation(constants: Constants) -> None:
    """The equation itself, solved by a general-purpose integrator to 1e-10 relative."""
    start, step, steps = 5.0, 0.25 * DAY, 40
    solved = solve_ivp(
        lambda _, h: (MINIMUM - h) ** 2 / (SHOALING_TIME * MINIMUM), (0.0, 10.0 * DAY), [start], rtol=1e-10, atol=1e-10
    )
    depth = after(start, steps, lambda h: shoaling_gain(h, step, constants))
    assert depth == pytest.approx(solved.y[0, -1], rel=1e-8)


def test_a_column_thicker_than_the_least_thickness_needs_no_help(constants: Constants) -> None:
    assert shoaling_gain(MINIMUM, DAY, constants) == 0.0
    assert shoaling_gain(200.0, DAY, constants) == 0.0


@pytest.mark.parametrize("scheme", ["forward_backward", "runge_kutta_3"])
def test_entrained_water_brings_no_heat_no_salt_anomaly_and_no_momentum(scheme: str) -> None:
    """It has the properties of the abyss, at rest: the contents h Theta and h Sigma and the transport h u stay, h grows.

    A uniform zonal flow in a channel that does not rotate is steady but for this dilution. Heat and salt stay to the bit.
    Velocity is divided by 1 + w dt/h, h that after the step: at most (w dt/h)^2 too little in each of n steps, so together
    w dt w t/h0^2 of the velocity.
    """
    model = box(
        {
            "basin.zonal_boundary": "periodic",
            "basin.beta_per_m_s": 0.0,
            "layers.0.initial_salinity_g_per_kg": 36.0,
            "entrainment.prescribed.velocity_m_per_day": 1.0,
            "numerics.step_s": 7200.0,
            "numerics.exchange_interval_days": 0.0,
            "numerics.scheme": scheme,
        }
    )
    model.state.velocity_x[...] = 0.3
    model.open_books()
    steps, per_step = 120, 1.0 / 12.0
    model.advance(steps)
    grown = 150.0 + steps * per_step
    assert np.abs(model.thickness - grown).max() <= steps * EPS * grown
    assert np.array_equal(model.grid.centres(model.state.heat), model.grid.centres(model.opening.heat))
    assert np.array_equal(model.grid.centres(model.state.salt), model.grid.centres(model.opening.salt))
    excess = model.velocity_x / (0.3 * 150.0 / grown) - 1.0
    assert excess.min() >= -4.0 * steps * EPS
    assert excess.max() <= per_step * steps * per_step / 150.0**2
    assert not model.velocity_y.any()
