"""A run never goes on past a state that means nothing: the check, and the report of where and why it broke."""

import numpy as np
from numpy.typing import NDArray

from oceanbox.errors import UnstableRun
from oceanbox.experiment.model import Model, limits_for

__all__ = ["FASTEST_CURRENT", "describe_breakdown", "is_sound"]

Array = NDArray[np.float64]
# No current of a reduced-gravity layer comes near this, m s-1.
FASTEST_CURRENT = 20.0


def is_sound(model: Model) -> bool:
    """Whether every field is finite, every thickness positive and no current faster than `FASTEST_CURRENT`."""
    state = model.state
    finite = all(np.isfinite(field).all() for field in state)
    if not finite:
        return False
    if model.constants.linear_depth == 0.0 and not (model.thickness > 0.0).all():
        return False
    return bool(np.abs(state.velocity_x).max() < FASTEST_CURRENT and np.abs(state.velocity_y).max() < FASTEST_CURRENT)


def _worst_cell(model: Model) -> tuple[int, int, int]:
    """Layer, row and column of the first cell that is not sound, or of the fastest current."""
    with np.errstate(invalid="ignore", divide="ignore"):
        speed = np.abs(model.velocity_x[..., 1:]) + np.abs(model.velocity_y[..., 1:, :])
        fields = speed + model.thickness + model.theta
        bad = ~np.isfinite(fields) | (model.thickness <= 0.0)
    where = np.argwhere(bad)
    if where.size:
        return tuple(int(n) for n in where[0])  # type: ignore[return-value]
    return tuple(int(n) for n in np.unravel_index(int(np.argmax(speed)), speed.shape))  # type: ignore[return-value]


def _around(name: str, field: Array, j: int, i: int) -> str:
    rows = field[max(j - 1, 0) : j + 2, max(i - 1, 0) : i + 2]
    text = "; ".join(" ".join(f"{value:.4g}" for value in row) for row in rows[::-1])
    return f"{name} [{text}]"


def _likely_cause(model: Model) -> tuple[str, str]:
    """Cause and remedy, from the last sound state."""
    limits = limits_for(model.setup)
    dt = model.clock.dt
    if dt > limits.smallest:
        return (
            f"the step of {dt:g} s is above the limit of {limits.smallest:g} s set by {limits.cause}",
            f"set numerics.step_s to null or below {limits.smallest:.0f}",
        )
    shortest = float(model.thickness.min())
    if shortest < 0.05 * float(model.thickness.mean()):
        return (
            f"a layer only {shortest:.3g} m thick beside thick ones",
            "raise entrainment.shoaling.minimum_thickness_m, or set numerics.thickness_flux to upwind_biased",
        )
    return (
        "grid-scale noise that viscosity does not control, or forcing too strong for the grid",
        "raise motion.viscosity_m2_per_s, refine the grid, or lower numerics.step_safety",
    )


def describe_breakdown(broken: Model, last_good: Model) -> UnstableRun:
    """The error for a model that broke in the step after ``last_good``: step, place, fields around it, likely cause."""
    k, j, i = _worst_cell(broken)
    grid = broken.grid
    cause, remedy = _likely_cause(last_good)
    around = ", ".join(
        _around(name, field[k], j, i)
        for name, field in (
            ("h/m", last_good.thickness),
            ("T/degC", last_good.temperature),
            ("u/(m s-1)", last_good.velocity_x),
            ("v/(m s-1)", last_good.velocity_y),
        )
    )
    what = (
        f"layer {k + 1}, x = {grid.x[i] / 1e3:.0f} km, y = {grid.y[j] / 1e3:.0f} km (cell {j}, {i}) broke down; "
        f"one step before, around it (rows from north to south): {around}; likely cause: {cause}"
    )
    return UnstableRun(what, broken.total_steps, broken.clock.days, remedy)
