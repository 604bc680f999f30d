"""A layer cut into layers that move together is still that layer (derived)."""

from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

from oceanbox.experiment.model import Model
from tests.physics.layered import Fields, fill, layered_box, random_fields, rates, roughly, smoothly

Array = NDArray[np.float64]
SHARES = {2: (0.3, 0.7), 3: (0.2, 0.5, 0.3)}
EPS = np.finfo(float).eps


def cut(whole: Fields, shares: tuple[float, ...] | Array) -> Fields:
    """Layers of the same Theta, Sigma, u and v; ``shares`` of the thickness, (L,) or (L, ny, nx)."""
    parts = np.asarray(shares)
    parts = parts if parts.ndim == 3 else parts[:, np.newaxis, np.newaxis]
    return Fields(whole.thickness * parts, *(np.repeat(field, len(parts), axis=0) for field in whole[1:]))


def moving_layer(layers: int, fields: Fields, changes: dict[str, Any]) -> Model:
    model = layered_box(layers, changes)
    fill(model, fields)
    return model


@pytest.mark.parametrize("scheme", ["forward_backward", "runge_kutta_3"])
@pytest.mark.parametrize("layers", [2, 3])
def test_layers_of_one_buoyancy_move_as_one(layers: int, scheme: str) -> None:
    """Uniform buoyancy, cut in the same shares everywhere: two days, in which waves cross the box three times.

    To 1e-12 of the largest value: a step's round-off is eps of the pressure, eps b h dt/dx or half an eps of the current, and
    200 of them add up to 100 eps = 2e-14 when the flow does not amplify them.
    """
    changes = {"numerics.step_s": 900.0, "numerics.scheme": scheme}
    one = layered_box(1, changes)
    whole = random_fields(one.grid, 1, smoothly(np.random.default_rng(5)))
    whole = whole._replace(theta=np.full_like(whole.theta, 15.0), sigma=np.full_like(whole.sigma, 0.3))
    fill(one, whole)
    many = moving_layer(layers, cut(whole, SHARES[layers]), changes)
    before = one.thickness
    one.advance(200)
    many.advance(200)
    assert np.abs(one.thickness - before).max() > 10.0
    pairs = (
        (many.thickness.sum(axis=0), one.thickness[0]),
        *((u, one.velocity_x[0]) for u in many.velocity_x),
        *((v, one.velocity_y[0]) for v in many.velocity_y),
    )
    for part, single in pairs:
        assert np.abs(part - single).max() < 1e-12 * np.abs(single).max()


@pytest.mark.parametrize("layers", [2, 3])
def test_pressure_force_on_layers_adds_up_to_that_on_the_whole(layers: int) -> None:
    """Buoyancy and shares that vary from cell to cell: the layers shear, their transport accelerates as one layer's.

    Sum_i <h_i> force_i = <h> force at every face; round-off of the terms P/dx, 40 operations.
    """
    one = layered_box(1)
    rng = np.random.default_rng(6)
    whole = random_fields(one.grid, 1, roughly(rng), speed=0.0)
    shares = rng.uniform(0.2, 1.0, (layers, one.grid.ny, one.grid.nx))
    shares /= shares.sum(axis=0)
    fill(one, whole)
    many = moving_layer(layers, cut(whole, shares), {})
    single, parts = rates(one), rates(many)
    grid = one.grid
    assert np.abs(parts.velocity_x[0] - parts.velocity_x[-1]).max() > 0.1 * np.abs(single.velocity_x).max()
    for mean, part, force, spacing in (
        (grid.average_centres_to_x_faces, parts.velocity_x, single.velocity_x, grid.dx),
        (grid.average_centres_to_y_faces, parts.velocity_y, single.velocity_y, grid.dy),
    ):
        together = (mean(many.thickness) * part).sum(axis=0)
        size = float((one.buoyancy * one.thickness**2).max()) / spacing
        assert np.abs(together - mean(one.thickness)[0] * force[0]).max() < 40 * EPS * size
