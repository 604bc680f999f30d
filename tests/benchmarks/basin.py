"""The reference basin on any grid, in motion: what every step in this folder is timed on."""

from __future__ import annotations

from functools import cache
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from oceanbox.config import Config, load
from oceanbox.experiment.assembly import assemble_setup
from oceanbox.experiment.model import Model
from oceanbox.grid import Grid
from tests.building import set_state

__all__ = ["GRIDS", "in_motion", "reference_config"]

Array = NDArray[np.float64]

# Rows northward by columns eastward; 200 by 120 is the reference grid itself.
GRIDS = ((100, 60), (200, 120), (400, 240), (1600, 960))
COARSE = (100, 60)
SPIN_UP_DAYS = 360.0


def reference_config(rows: int, columns: int, changes: dict[str, Any] | None = None) -> Config:
    """``configs/reference.yaml`` on ``rows`` by ``columns`` cells, with a viscosity for cells of that size.

    The viscosity sets how long a step may be, not what it costs.
    """
    top = Path(__file__).resolve().parents[2]
    viscosity = 8.0e4 if rows <= COARSE[0] else 1.0e4 * min(1.0, 200 / rows)
    fitted = {"basin.cells_y": rows, "basin.cells_x": columns, "motion.viscosity_m2_per_s": viscosity}
    return load(top / "configs" / "reference.yaml").config.with_changes(fitted | (changes or {}))


@cache
def _spun_up() -> Model:
    """The coarse basin after a year: gyres, equatorial currents and a cold tongue."""
    model = Model(assemble_setup(reference_config(*COARSE)))
    model.advance(round(SPIN_UP_DAYS * 86400.0 / model.clock.dt))
    return model


def _onto(field: Array, y: Array, x: Array, new_y: Array, new_x: Array) -> Array:
    """A layer's field between its points by straight lines, first along x, then along y."""
    along_x = np.stack([np.interp(new_x, x, row) for row in field])
    return np.stack([np.interp(new_y, y, column) for column in along_x.T], axis=1)


def _moving_fields(grid: Grid) -> dict[str, Array]:
    coarse = _spun_up()
    old = coarse.grid

    def centred(field: Array) -> Array:
        return _onto(field[0], old.y, old.x, grid.y, grid.x)[None]

    return {
        "thickness": centred(coarse.thickness),
        "theta": centred(coarse.theta),
        "velocity_x": _onto(coarse.velocity_x[0], old.y, old.x_face, grid.y, grid.x_face)[None],
        "velocity_y": _onto(coarse.velocity_y[0], old.y_face, old.x, grid.y_face, grid.x)[None],
    }


def in_motion(rows: int, columns: int, changes: dict[str, Any] | None = None) -> Model:
    """The reference basin on ``rows`` by ``columns`` cells, started from a year of the coarse one."""
    model = Model(assemble_setup(reference_config(rows, columns, changes)))
    set_state(model, **_moving_fields(model.grid))
    return model
