"""A channel has no seam: where its two ends meet is arbitrary, so a state moved along the channel moves on likewise."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.typing import NDArray

from oceanbox.experiment.model import Model
from tests.building import set_state
from tests.physics.busy_ocean import busy_ocean

Array = NDArray[np.float64]
FIELDS = ("thickness", "theta", "velocity_x", "velocity_y")
CHANNEL = {"basin.zonal_boundary": "periodic", "motion.sponge": None}


def channel(changes: dict[str, object], moved: int) -> Model:
    """The busy ocean in a channel, in a random state, with everything moved eastward by some cells."""
    model = busy_ocean(CHANNEL | changes)
    grid, rng = model.grid, np.random.default_rng(11)

    def noise(rows: int) -> Array:
        return np.roll(rng.uniform(-1.0, 1.0, (1, rows, grid.nx)), moved, axis=-1)

    thickness, theta = model.thickness * (1.0 + 0.3 * noise(grid.ny)), model.theta + noise(grid.ny)
    sigma, u, v = 0.3 * noise(grid.ny), 0.2 * noise(grid.ny), 0.2 * noise(grid.ny + 1)
    v[:, [0, -1]] = 0.0
    set_state(model, thickness, theta, sigma, np.concatenate([u, u[..., :1]], axis=-1), v)
    return model


@pytest.mark.parametrize("scheme", ["forward_backward", "runge_kutta_3"])
@pytest.mark.parametrize("thickness_flux", ["centred", "upwind_biased"])
def test_a_state_moved_along_a_channel_moves_on_likewise_to_the_last_bit(scheme: str, thickness_flux: str) -> None:
    """Every cell does the same arithmetic on the same numbers, wherever it lies."""
    changes = {"numerics.scheme": scheme, "numerics.thickness_flux": thickness_flux}
    here, there = channel(changes, moved=0), channel(changes, moved=5)
    for model in (here, there):
        model.advance(40)
    for name in FIELDS:
        ours, theirs = (getattr(model, name)[..., : model.grid.nx] for model in (here, there))
        assert np.array_equal(np.roll(ours, 5, axis=-1), theirs), name
    seam = here.velocity_x[..., [0, -1]]
    assert np.array_equal(seam[..., 0], seam[..., 1]) and seam.any()
