"""What unforced, frictionless layers keep: volume, buoyancy, energy.

One layer of varying buoyancy: Ripa 1993, Geophys. Astrophys. Fluid Dyn. 70, 85 (from memory).  Several layers, and the discrete
form that conserves exactly: derived.
"""

from typing import Any

import numpy as np
import pytest

from oceanbox.stepping.runge_kutta import CLASSICAL_4
from tests.physics.layered import (
    buoyancy_content,
    energy,
    energy_tendency,
    fill,
    layered_box,
    random_fields,
    rates,
    roughly,
    smoothly,
)

LAYERS = (1, 2, 3)
STEP = {"numerics.step_s": 600.0}


@pytest.mark.parametrize("boundary", ["walls", "periodic"])
@pytest.mark.parametrize("draw", [smoothly, roughly])
@pytest.mark.parametrize("layers", LAYERS)
def test_no_flow_changes_the_energy(layers: int, draw: Any, boundary: str) -> None:
    """Of 20 random oceans each, smooth or rough: what all terms together do is round-off of the sum of their sizes.

    A sum of n terms of random sign errs by sqrt(n) eps of their mean size: 2e-18 of the sum here; 1e-14 is the bound asked for.
    """
    model = layered_box(layers, {"basin.zonal_boundary": boundary})
    for seed in range(20):
        fill(model, random_fields(model.grid, layers, draw(np.random.default_rng(seed))))
        total, absolute = energy_tendency(model)
        assert abs(total) <= 1e-14 * absolute, seed


@pytest.mark.parametrize("layers", LAYERS)
def test_energy_tendency_is_the_slope_of_the_energy(layers: int) -> None:
    """The chain rule above against a step of 0.1 s along the tendency of an ocean with salt and heat sources added.

    Sources make the energy change, so that both sides are far from zero; the step errs by its square over the time scales of
    some minutes, 1e-5.
    """
    model = layered_box(layers)
    fields = random_fields(model.grid, layers, smoothly(np.random.default_rng(layers)))
    fill(model, fields)
    rate = rates(model)
    total, absolute = energy_tendency(model)
    rng = np.random.default_rng(99)
    push = [1e-4 * rng.uniform(0.0, 1.0, r.shape) for r in rate[3:]]
    u, v = model.velocity_x, model.velocity_y
    push[0][..., [0, -1]], push[1][:, [0, -1]] = 0.0, 0.0
    hx = model.grid.average_centres_to_x_faces(model.thickness)
    hy = model.grid.average_centres_to_y_faces(model.thickness)
    expected = total + float((hx * u * push[0]).sum() + (hy * v * push[1]).sum())
    assert abs(expected) > 1e-3 * absolute
    ends = []
    for dt in (-0.1, 0.1):
        h = fields.thickness + dt * rate.thickness
        fill(
            model,
            type(fields)(
                h,
                (fields.thickness * fields.theta + dt * rate.theta) / h,
                (fields.thickness * fields.sigma + dt * rate.sigma) / h,
                fields.velocity_x + dt * (rate.velocity_x + push[0]),
                fields.velocity_y + dt * (rate.velocity_y + push[1]),
            ),
        )
        ends.append(energy(model))
    assert (ends[1] - ends[0]) / 0.2 == pytest.approx(expected, rel=1e-5)


@pytest.mark.parametrize("scheme", ["forward_backward", "runge_kutta_3"])
@pytest.mark.parametrize("layers", LAYERS)
def test_volume_and_buoyancy_are_kept_over_a_thousand_steps(layers: int, scheme: str) -> None:
    """Of every layer, to 1e-13: a thousand additions of round-off of random sign to each of a thousand cells are 1e-16.

    A layer that runs thin meets the limiter of outflow, which must lose nothing either.
    """
    model = layered_box(layers, STEP | {"numerics.scheme": scheme})
    fill(model, random_fields(model.grid, layers, smoothly(np.random.default_rng(7))))
    before = model.thickness
    volume, buoyancy = before.sum(axis=(1, 2)), buoyancy_content(model).sum(axis=(1, 2))
    model.advance(1000)
    assert np.abs(model.thickness - before).max() > 1.0
    assert model.thickness.sum(axis=(1, 2)) == pytest.approx(volume, rel=1e-13)
    assert buoyancy_content(model).sum(axis=(1, 2)) == pytest.approx(buoyancy, rel=1e-13)


@pytest.mark.parametrize("layers", LAYERS)
def test_energy_drift_falls_with_the_fourth_power_of_the_step_or_faster(layers: int) -> None:
    """Classical four-stage method: half a day in steps of 1200 s and of 600 s."""
    drifts = []
    for dt in (1200.0, 600.0):
        model = layered_box(layers, {"numerics.scheme": "runge_kutta_3", "numerics.step_s": dt}, CLASSICAL_4)
        fill(model, random_fields(model.grid, layers, smoothly(np.random.default_rng(3))))
        before = energy(model)
        model.advance(round(43200.0 / dt))
        drifts.append(energy(model) / before - 1.0)
    coarse, fine = np.abs(drifts)
    assert fine > 1e-13, "the drift is lost in round-off: the step is too short to tell"
    assert coarse / fine >= 2.0**4
