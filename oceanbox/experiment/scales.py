"""Derived scales of a setup: what the grid resolves, which waves it holds, how long a step may be.  No run."""

import math
from dataclasses import dataclass

import numpy as np

from oceanbox.constants import DAYS_PER_YEAR, SECONDS_PER_DAY
from oceanbox.diagnostics.scales import equatorial_radius, munk_width, stommel_width
from oceanbox.experiment.assembly import Setup
from oceanbox.experiment.model import choose_step, limits_for, warmest_anomaly
from oceanbox.stepping.limits import StepLimits

__all__ = ["Scales", "derive_scales"]

MID_LATITUDE_DEG = 30.0


@dataclass(frozen=True)
class Scales:
    """Scales of the initial layer; NaN where a scale does not exist."""

    cells: int
    dx: float  # m
    dy: float  # m
    thickness: float  # mean at the start, m
    reduced_gravity: float  # of the warmest water, m s-2
    wave_speed: float  # sqrt(b h), m s-1
    kelvin_crossing: float  # width/c, s
    equatorial_radius: float  # sqrt(c/beta), m
    mid_latitude_radius: float  # c/f at 30 degrees, m
    munk_width: float  # (A/beta)^(1/3), m
    stommel_width: float  # r/beta, m
    wind_has_curl: bool
    equator_inside: bool
    limits: StepLimits
    step: float  # s
    memory: float  # bytes

    @property
    def steps_per_year(self) -> float:
        """Steps in a model year of 365.25 days."""
        return DAYS_PER_YEAR * SECONDS_PER_DAY / self.step

    @property
    def boundary_layer(self) -> float:
        """Width of the wider frictional western boundary layer, m; 0 without friction."""
        return max(self.munk_width, self.stommel_width)


# Arrays of the size of the grid at the end of a run, when it needs most: state, three copies of it, memory of the scheme and its
# copy, ledger, forcing; moments of seven fields and marks in the ledger; the maps of the result beyond what is freed for them.
MODEL_ARRAYS = 4 * 5 + 2 * 18 + 22 + 12
RECORDED_ARRAYS = 2 * 7 + 9
RESULT_ARRAYS = 54


def _wind_has_curl(setup: Setup) -> bool:
    grid, maps = setup.grid, setup.maps
    tau_y = np.diff(maps.wind_stress_y[1:-1], axis=1) / grid.dx
    tau_x = np.diff(maps.wind_stress_x, axis=0)[:, 1:-1] / grid.dy
    size = float(np.abs(maps.wind_stress_x).max() + np.abs(maps.wind_stress_y).max()) / max(grid.dx, grid.dy)
    return bool(np.abs(tau_y - tau_x).max(initial=0.0) > 1e-9 * size) if size > 0.0 else False


def derive_scales(setup: Setup) -> Scales:
    """The scales of ``setup``."""
    grid, config, constants = setup.grid, setup.config, setup.constants
    theta = warmest_anomaly(setup)
    gravity = constants.gravity * theta * (constants.expansion_abyss + 0.5 * constants.expansion_slope * theta)
    thickness = float(grid.centres(setup.initial.thickness).sum(axis=0).mean())
    speed = math.sqrt(gravity * (constants.linear_depth or thickness))
    beta = grid.beta
    f_walls = grid.coriolis(grid.y_face[[0, -1]])
    f_mid = abs(float(grid.coriolis(np.asarray(math.radians(MID_LATITUDE_DEG) * 6.371e6))))
    limits = limits_for(setup)
    nan = math.nan
    layers = setup.initial.thickness.shape[0]
    cells = grid.shape[0] * grid.shape[1] * layers
    return Scales(
        cells=grid.nx * grid.ny,
        dx=grid.dx,
        dy=grid.dy,
        thickness=thickness,
        reduced_gravity=gravity,
        wave_speed=speed,
        kelvin_crossing=grid.nx * grid.dx / speed,
        equatorial_radius=equatorial_radius(speed, beta) if beta > 0.0 else nan,
        mid_latitude_radius=speed / f_mid if f_mid > 0.0 else nan,
        munk_width=munk_width(constants.viscosity, beta) if beta > 0.0 else nan,
        stommel_width=stommel_width(config.motion.drag_per_day / SECONDS_PER_DAY, beta) if beta > 0.0 else nan,
        wind_has_curl=_wind_has_curl(setup),
        equator_inside=bool(f_walls[0] < 0.0 < f_walls[1]),
        limits=limits,
        step=config.numerics.step_s or choose_step(limits.smallest, config.numerics.step_safety),
        memory=8.0 * cells * (MODEL_ARRAYS + RECORDED_ARRAYS + RESULT_ARRAYS),
    )
