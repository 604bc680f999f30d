"""A model in memory: a setup, its state, the scheme that steps it, and the books of what the steps did."""

import math
from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from oceanbox.constants import SECONDS_PER_DAY
from oceanbox.errors import OceanboxError
from oceanbox.experiment.assembly import Setup
from oceanbox.physics.state import Constants, Ledger, State, empty_ledger
from oceanbox.stepping.forward_backward import advance_forward_backward
from oceanbox.stepping.hastened import Hastening, advance_hastened, empty_hastening
from oceanbox.stepping.limits import StepLimits, step_limits
from oceanbox.stepping.memory import Memory, Workspace, belt_rows, empty_memory, empty_workspace
from oceanbox.stepping.runge_kutta import STRONG_3, Tableau, advance_runge_kutta, empty_stages

__all__ = ["Clock", "Model", "choose_step", "deepest_expected", "limits_for", "warmest_anomaly"]

Array = NDArray[np.float64]
# Steps divide half a day, so that windows counted in Julian years end on a step.
HALF_DAY = 0.5 * SECONDS_PER_DAY
# A western boundary current with room to grow, m s-1; a faster one shortens the step when it comes.
EXPECTED_FLOW = 1.2


def warmest_anomaly(setup: Setup) -> float:
    """The largest T - T_a that forcing or initial state can bring about, K (prescribed heating apart)."""
    restored = np.where(setup.forcing.restoring_velocity > 0.0, setup.forcing.target_anomaly, -math.inf)
    initial = setup.initial.heat / setup.initial.thickness
    return float(max(restored.max(), initial.max(), 1.0))


def deepest_expected(setup: Setup) -> float:
    """``numerics.deepest_layer_m``, or twice the greatest thickness at the start, m."""
    named = setup.config.numerics.deepest_layer_m
    return named or 2.0 * float(setup.grid.centres(setup.initial.thickness).sum(axis=0).max())


def limits_for(setup: Setup) -> StepLimits:
    """Step limits for the fastest waves this setup should hold: its warmest water, as deep as it is expected to become."""
    constants, config = setup.constants, setup.config
    theta = warmest_anomaly(setup)
    buoyancy = constants.gravity * theta * (constants.expansion_abyss + 0.5 * constants.expansion_slope * theta)
    depth = constants.linear_depth or deepest_expected(setup)
    speed = math.sqrt(buoyancy * depth)
    crossing = 0.0 if constants.linear_depth > 0.0 else EXPECTED_FLOW / min(setup.grid.dx, setup.grid.dy)
    return step_limits(config.numerics.scheme, setup.grid, speed, crossing, constants.viscosity, constants.diffusivity)


def choose_step(limit: float, safety: float) -> float:
    """The longest step below ``safety`` times ``limit`` that divides half a day, s."""
    return HALF_DAY / math.ceil(HALF_DAY / (safety * limit))


@dataclass
class Clock:
    """Model time without drift: ``epoch`` plus a whole number of steps."""

    epoch: float  # s
    dt: float  # s
    steps: int  # since the epoch

    @property
    def seconds(self) -> float:
        """Model time, s."""
        return self.epoch + self.steps * self.dt

    @property
    def days(self) -> float:
        """Model time, days."""
        return self.seconds / SECONDS_PER_DAY

    def steps_until(self, seconds: float) -> int:
        """Steps to the step nearest to ``seconds``; 0 when that is now or past."""
        return max(0, round((seconds - self.epoch) / self.dt) - self.steps)


class Model:
    """State, memory and ledger of one experiment, stepped in place.

    ``ledger`` books everything since `open_books`, ``opening`` is the state it started from.
    """

    def __init__(self, setup: Setup, tableau: Tableau = STRONG_3) -> None:
        """A model at the initial state of ``setup``; ``tableau`` is used by the Runge-Kutta scheme alone."""
        self.setup = setup
        self.grid = setup.grid
        self.constants: Constants = setup.constants
        layers = setup.initial.thickness.shape[0]
        named = setup.config.numerics.step_s
        dt = named or choose_step(limits_for(setup).smallest, setup.config.numerics.step_safety)
        self.clock = Clock(0.0, dt, 0)
        self.total_steps = 0
        self.state = State(*(field.copy() for field in setup.initial))
        self.memory: Memory = empty_memory(self.grid, layers)
        self.ledger: Ledger = empty_ledger(self.grid, layers)
        self._tableau = tableau
        self._runge_kutta = setup.config.numerics.scheme != "forward_backward"
        self._hastening: Hastening | None = None
        self._pace_limit, self._rossby = 1.0, 0.0
        self._work = self._belts()
        self._stages = empty_stages(self.grid, layers, tableau) if self._runge_kutta else None
        self.open_books()

    def _belts(self) -> Workspace:
        """Belts of all rows, except for the scheme that sweeps in bands."""
        rows, columns = self.grid.shape
        layers = self.state.thickness.shape[0]
        sweeps = self._hastening is None and not self._runge_kutta
        return empty_workspace(self.grid, layers, belt_rows(columns, layers) if sweeps else rows)

    def open_books(self) -> None:
        """Start a new ledger from the present state."""
        for entry in self.ledger:
            entry[...] = 0.0
        self._notice_salt()
        self.opening = State(*(field.copy() for field in self.state))
        self.opened_at = self.clock.seconds

    def _notice_salt(self) -> None:
        """Carry salt from now on if there is any, whatever the configuration started with."""
        if self.state.salt.any():
            self.constants = self.constants._replace(salty=True)

    def advance(self, steps: int) -> None:
        """Take ``steps`` steps."""
        clock = self.clock
        if self._hastening is not None:
            advance_hastened(
                self.state, self._hastening, self.setup.forcing, self.constants, self.ledger, self._work,
                self._pace_limit, self._rossby, clock.seconds, clock.dt, steps,
            )  # fmt: skip
        elif self._stages is not None:
            advance_runge_kutta(
                self.state, self._stages, self._tableau, self.setup.forcing, self.constants, self.ledger, self._work,
                clock.seconds, clock.dt, steps,
            )  # fmt: skip
        else:
            advance_forward_backward(
                self.state, self.memory, self.setup.forcing, self.constants, self.ledger, self._work,
                self.total_steps, clock.steps, clock.seconds, clock.dt, self.exchange_every, steps,
            )  # fmt: skip
        clock.steps += steps
        self.total_steps += steps

    def hasten(self, pace_limit: float, rossby: float) -> None:
        """From now on step towards the steady state, not truly (``stepping.hastened``, which explains the two numbers)."""
        self._hastening = empty_hastening(self.grid, self.state.thickness.shape[0])
        self._work = self._belts()
        self._pace_limit, self._rossby = pace_limit, rossby

    def step_truly(self) -> None:
        """From now on step truly; a multi-step scheme that has no history of the state needs `change_step` besides."""
        self._hastening = None
        self._work = self._belts()

    @property
    def exchange_every(self) -> int:
        """Steps between exchanges of the columns with air and abyss."""
        interval = self.setup.config.numerics.exchange_interval_days * SECONDS_PER_DAY
        return max(1, math.floor(interval / self.clock.dt))

    def change_step(self, dt: float) -> None:
        """Go on with another step; the multi-step scheme starts afresh from the present state."""
        self.clock = Clock(self.clock.seconds, dt, 0)

    @property
    def theta(self) -> Array:
        """T - T_a at interior centres, (L, ny, nx), K."""
        return self.grid.centres(self.state.heat) / self.thickness

    @property
    def temperature(self) -> Array:
        """Temperature at interior centres, (L, ny, nx), degC."""
        return self.theta + self.setup.config.water.abyss_temperature_degC

    @property
    def salinity(self) -> Array:
        """Salinity at interior centres, (L, ny, nx), g kg-1."""
        anomaly = self.grid.centres(self.state.salt) / self.thickness
        return anomaly + self.setup.config.water.abyss_salinity_g_per_kg

    @property
    def thickness(self) -> Array:
        """Layer thickness at interior centres, (L, ny, nx), m."""
        return self.grid.centres(self.state.thickness)

    @property
    def velocity_x(self) -> Array:
        """u on x faces, (L, ny, nx+1), m s-1."""
        return self.grid.x_faces(self.state.velocity_x)

    @property
    def velocity_y(self) -> Array:
        """v on y faces, (L, ny+1, nx), m s-1."""
        return self.grid.y_faces(self.state.velocity_y)

    @property
    def buoyancy(self) -> Array:
        """b at interior centres, (L, ny, nx), m s-2."""
        c, theta = self.constants, self.theta
        sigma = self.salinity - self.setup.config.water.abyss_salinity_g_per_kg
        return c.gravity * (theta * (c.expansion_abyss + 0.5 * c.expansion_slope * theta) - c.contraction * sigma)

    def fastest_wave(self) -> float:
        """Largest sqrt(sum of b h) over the basin, m s-1; in linear dynamics that of the rest depth."""
        if self.constants.linear_depth > 0.0:
            return math.sqrt(max(float(self.buoyancy.max()), 0.0) * self.constants.linear_depth)
        return math.sqrt(max(float((self.buoyancy * self.thickness).sum(axis=0).max()), 0.0))

    def crossing_rate(self) -> float:
        """Largest |u|/dx + |v|/dy over the cells, s-1."""
        u, v = np.abs(self.velocity_x), np.abs(self.velocity_y)
        along_x = np.maximum(u[..., 1:], u[..., :-1]) / self.grid.dx
        along_y = np.maximum(v[..., 1:, :], v[..., :-1, :]) / self.grid.dy
        return float((along_x + along_y).max())

    def arrays(self) -> dict[str, Array]:
        """Everything of the model that a restart needs, by name."""
        groups: dict[str, dict[str, Array]] = {
            "state": self.state._asdict(),
            "memory": self.memory._asdict(),
            "ledger": self.ledger._asdict(),
            "opening": self.opening._asdict(),
        }
        return {f"{group}__{name}": value for group, values in groups.items() for name, value in values.items()}

    def restore(self, arrays: Mapping[str, Array]) -> None:
        """Take over the arrays of a restart.  Raises OceanboxError if they are of another grid."""
        for name, mine in self.arrays().items():
            saved = arrays[name]
            if saved.shape != mine.shape:
                raise OceanboxError(
                    f"{name}: got shape {saved.shape}; this configuration needs {mine.shape}; start from a state of the same grid"
                )
            mine[...] = saved
        self._notice_salt()
