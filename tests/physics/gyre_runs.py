"""Wind-driven gyres run to their steady state, from the configurations in ``configs/checks``."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from oceanbox.config import Config, load
from oceanbox.config.fields import Cosine
from oceanbox.constants import DAYS_PER_YEAR, SECONDS_PER_DAY
from oceanbox.experiment.assembly import assemble_setup
from oceanbox.experiment.model import Model
from tests.building import run_days
from tests.theory.gyre_on_grid import GridGyre
from tests.theory.gyres import GyreBasin
from tests.theory.munk_gyre import Side

Array = NDArray[np.float64]
FOLDER = Path(__file__).parents[2] / "configs" / "checks"
SVERDRUP = 1e6


def gyre_config(name: str, changes: dict[str, Any] | None = None) -> Config:
    """A configuration of ``configs/checks`` with dotted keys changed."""
    config = load(FOLDER / f"{name}.yaml").config
    return config.with_changes(changes) if changes else config


def quickened(config: Config, factor: float) -> Config:
    """The same gyre with g' and wind stress ``factor`` times larger.

    Without momentum advection the steady equations are linear in P = g' h^2/2, transport and stress: the thickness stays as
    it is, transports grow by ``factor``, and so does the speed of the Rossby waves that bring the steady state about.
    """
    layer = config.layers[0]
    wind = config.surface.wind.zonal_stress_N_per_m2
    assert isinstance(wind, Cosine) and isinstance(layer.initial_temperature_degC, float)
    abyss = config.water.abyss_temperature_degC
    warmer = abyss + factor * (layer.initial_temperature_degC - abyss)
    return config.with_changes(
        {
            "layers": [layer.model_dump() | {"initial_temperature_degC": warmer}],
            "surface.wind.zonal_stress_N_per_m2": wind.model_dump() | {"amplitude": factor * wind.amplitude},
        }
    )


@dataclass(frozen=True)
class SteadyGyre:
    """A model that has run from rest for a while, and what may be left of its spin-up.

    The spin-up dies out at least as fast as it did in the last quarter of the run, by more than a half; what is left then is
    less than the change over that quarter: ``left_psi`` [m3 s-1] and ``left_thickness`` [m], the largest in the basin.
    """

    model: Model
    left_psi: float
    left_thickness: float

    @property
    def basin(self) -> GyreBasin:
        """The basin and wind, for the published solutions; y from the southern wall."""
        grid, config = self.model.grid, self.model.setup.config
        wind = config.surface.wind.zonal_stress_N_per_m2
        assert isinstance(wind, Cosine)
        density = config.water.reference_density_kg_per_m3
        return GyreBasin(grid.nx * grid.dx, grid.ny * grid.dy, -wind.amplitude, grid.beta, density)

    @property
    def on_grid(self) -> GridGyre:
        """The exact solution of the difference equations."""
        grid, motion = self.model.grid, self.model.setup.config.motion
        side: Side = "no_slip" if grid.no_slip else "free_slip"
        drag = motion.drag_per_day / SECONDS_PER_DAY
        return GridGyre(self.basin, grid.nx, grid.ny, drag, motion.viscosity_m2_per_s, side)

    @property
    def gravity(self) -> float:
        """g' [m s-2]."""
        return float(self.model.buoyancy.mean())

    @property
    def thickness(self) -> Array:
        """h, (ny, nx) [m]."""
        return self.model.thickness[0]

    @property
    def transport_x(self) -> Array:
        """U on x faces, (ny, nx+1) [m2 s-1]."""
        return transport_x(self.model)

    @property
    def transport_y(self) -> Array:
        """V on y faces, (ny+1, nx) [m2 s-1]."""
        return transport_y(self.model)

    @property
    def streamfunction(self) -> Array:
        """psi at corners, (ny+1, nx+1) [m3 s-1]."""
        return streamfunction(self.model)


def transport_x(model: Model) -> Array:
    """U = <h>^x u on x faces, (ny, nx+1) [m2 s-1]."""
    return model.grid.average_centres_to_x_faces(model.thickness[0]) * model.velocity_x[0]


def transport_y(model: Model) -> Array:
    """V = <h>^y v on y faces, (ny+1, nx) [m2 s-1]."""
    return model.grid.average_centres_to_y_faces(model.thickness[0]) * model.velocity_y[0]


def streamfunction(model: Model) -> Array:
    """psi at corners, (ny+1, nx+1) [m3 s-1]: zero on the southern wall, U = -psi_y."""
    from_south = -model.grid.dy * np.cumsum(transport_x(model), axis=0)
    return np.vstack([np.zeros(model.grid.nx + 1), from_south])


def run_gyre(config: Config, years: float) -> SteadyGyre:
    """Run from rest for ``years``."""
    model = Model(assemble_setup(config))
    run_days(model, 0.75 * years * DAYS_PER_YEAR)
    psi, thickness = streamfunction(model), model.thickness[0]
    run_days(model, 0.25 * years * DAYS_PER_YEAR)
    return SteadyGyre(
        model,
        left_psi=float(np.abs(streamfunction(model) - psi).max()),
        left_thickness=float(np.abs(model.thickness[0] - thickness).max()),
    )


def at(field: Array, model: Model, x: float, y: float) -> float:
    """A field at centres (ny, nx), interpolated linearly to (x, y) [m], y from the southern wall."""
    grid = model.grid
    along = [float(np.interp(x, grid.x, row)) for row in field]
    return float(np.interp(y, grid.y - grid.y_south, along))
