"""Every compiled kernel does what its Python source says.

A model on a 5 x 4 grid is stepped in plain Python.  Each kernel it calls, down to the smallest, is first called compiled on
copies of the very arguments; both must leave the same results.
"""

from __future__ import annotations

import importlib
import pkgutil
from collections.abc import Callable, Iterator
from functools import cache
from types import ModuleType
from typing import Any

import numba
import numpy as np
import pytest
from numba.extending import is_jitted

import oceanbox.grid
import oceanbox.physics
import oceanbox.stepping
from oceanbox.experiment import model as model_module
from oceanbox.experiment.model import Model
from tests.building import box, replace_constants, set_state
from tests.physics.layered import fill, layered_box, random_fields, roughly

# Fused multiplications and reordered sums differ in the last places of the largest terms; where those cancel, what is left is
# round-off of numbers up to thousands (K m, the heat of a column).
ROUNDOFF = 1e-12
CANCELLED = 1e-12
STEPS = 4  # the multi-step scheme has found its weights after three

BUSY: dict[str, Any] = {
    "basin.cells_x": 4,
    "basin.cells_y": 5,
    "basin.south_km": -1500.0,
    "basin.north_km": 3500.0,
    "water.equation_of_state": "quadratic",
    "motion.viscosity_m2_per_s": 2e4,
    "motion.drag_per_day": 0.1,
    "motion.sponge": {"sides": ["west", "north"], "width_km": 600.0},
    "mixing.lateral_diffusivity_m2_per_s": 3e3,
    "entrainment.upwelling.mixed_layer_depth_m": 60.0,
    "entrainment.diffusive.diffusivity_m2_per_s": 1e-4,
    "entrainment.shoaling": {"minimum_thickness_m": 100.0},
    "transformation": {"efficiency": {"kind": "cooling", "scale_K": 8.0}, "floor_thickness_m": 60.0},
    "outcrop": {"margin_K": 1.5},
    "surface.heat.restoring.target_temperature_degC": {
        "shape": "linear",
        "value_at_origin": 20.0,
        "slope_per_deg": -1.0,
    },
    "surface.heat.prescribed_W_per_m2": 10.0,
    "surface.fresh_water": {"precipitation_minus_evaporation_m_per_year": 1.0, "balance": "uniform"},
    "surface.wind": {"zonal_stress_N_per_m2": 0.1, "meridional_stress_N_per_m2": -0.05, "ramp_days": 1.0},
    "numerics.step_s": 7200.0,
    "numerics.exchange_interval_days": 0.0,
}
CALM: dict[str, Any] = {"entrainment": {}, "transformation": None, "outcrop": None, "surface.heat.restoring": None}
LINEAR = CALM | {"motion.momentum_advection": False, "motion.linear_about_depth_m": 150.0}
CASES: dict[str, dict[str, Any]] = {
    "busy": BUSY,
    "busy, by Runge-Kutta": BUSY | {"numerics.scheme": "runge_kutta_3"},
    "upwind in a channel": BUSY
    | {
        "basin.zonal_boundary": "periodic",
        "basin.side_walls": "no_slip",
        "motion.sponge.sides": ["south", "north"],
        "motion.viscosity_acts_on": "transport",
        "motion.momentum_advection": False,
        "numerics.thickness_flux": "upwind_biased",
    },
    "linear": BUSY | LINEAR,
    "hastened": BUSY,
}

TWO_LAYERS = "two layers"


def modules() -> Iterator[ModuleType]:
    """Every module that may hold a kernel."""
    for package in (oceanbox.grid, oceanbox.physics, oceanbox.stepping):
        for found in pkgutil.iter_modules(package.__path__, package.__name__ + "."):
            yield importlib.import_module(found.name)


def full_name(kernel: Any) -> str:
    """The module of a kernel and its own name."""
    return f"{kernel.py_func.__module__}.{kernel.py_func.__name__}"


def all_kernels() -> set[str]:
    """The full names of all kernels there are."""
    return {full_name(value) for module in modules() for value in vars(module).values() if is_jitted(value)}


def copied(argument: Any, memo: dict[tuple[int, Any], Any]) -> Any:
    """A deep copy of kernel arguments: arrays, named tuples, tuples, numbers.  One array given twice stays one (``memo``)."""
    if isinstance(argument, np.ndarray):
        return memo.setdefault((argument.ctypes.data, argument.shape), argument.copy())
    if isinstance(argument, tuple):
        parts = [copied(part, memo) for part in argument]
        return type(argument)(*parts) if hasattr(argument, "_fields") else tuple(parts)
    return argument


def require_same(compiled: Any, plain: Any, name: str) -> None:
    """Fails unless both agree to round-off of the largest value in an array."""
    if isinstance(compiled, tuple):
        assert isinstance(plain, tuple)
        for one, other in zip(compiled, plain, strict=True):
            require_same(one, other, name)
        return
    if compiled is None or isinstance(compiled, str):
        assert compiled == plain, name
        return
    one, other = np.asarray(compiled, dtype=float), np.asarray(plain, dtype=float)
    finite = np.isfinite(other)
    assert np.array_equal(finite, np.isfinite(one)), f"{name}: compiled and plain are not finite in different places"
    largest = float(np.abs(other[finite]).max(initial=0.0))
    off = float(np.abs(one[finite] - other[finite]).max(initial=0.0))
    assert off <= ROUNDOFF * largest + CANCELLED, f"{name}: compiled and plain differ by {off:g} of {largest:g}"


class Twins:
    """All kernels replaced, wherever a module names them, by plain Python that checks itself against the compiled one."""

    def __init__(self) -> None:
        self.called: set[str] = set()
        self._places = [
            (module, name, value)
            for module in [*modules(), model_module]
            for name, value in vars(module).items()
            if is_jitted(value)
        ]

    def put_in(self) -> None:
        """Replace the kernels."""
        for module, name, kernel in self._places:
            setattr(module, name, self._twin(kernel))

    def take_out(self) -> None:
        """Put the kernels back."""
        for module, name, kernel in self._places:
            setattr(module, name, kernel)

    def _compile(self, kernel: Any, arguments: tuple[Any, ...]) -> None:
        """Compile for these arguments if that has not been done; the compiler must see kernels where twins are now."""
        types = tuple(numba.typeof(argument) for argument in arguments)
        if types not in kernel.overloads:
            self.take_out()
            kernel.compile(types)
            self.put_in()

    def _twin(self, kernel: Any) -> Callable[..., Any]:
        name = full_name(kernel)

        def both(*arguments: Any) -> Any:
            self.called.add(name)
            copies = copied(arguments, memo={})
            self._compile(kernel, copies)
            result = kernel(*copies)
            expected = kernel.py_func(*arguments)
            require_same(copies, arguments, name)
            require_same(result, expected, name)
            return expected

        return both


def stirred(changes: dict[str, Any]) -> Model:
    """An ocean in which everything varies, thin and cold enough in places for every closure to act."""
    model = box(changes)
    rng = np.random.default_rng(3)
    grid = model.grid
    velocity_x, velocity_y = rng.normal(0.0, 0.5, (1, 5, 5)), rng.normal(0.0, 0.5, (1, 6, 4))
    velocity_y[:, [0, -1]] = 0.0
    if grid.periodic_x:
        velocity_x[..., -1] = velocity_x[..., 0]
    else:
        velocity_x[..., [0, -1]] = 0.0
    set_state(
        model,
        thickness=rng.uniform(40.0, 250.0, (1, 5, 4)),
        theta=rng.uniform(-0.5, 20.0, (1, 5, 4)),
        sigma=rng.normal(0.0, 1.0, (1, 5, 4)),
        velocity_x=velocity_x,
        velocity_y=velocity_y,
    )
    return model


def two_layers() -> Model:
    """Two layers in motion over the abyss: each presses on the other."""
    model = layered_box(2, {"basin.cells_x": 4, "basin.cells_y": 5})
    fill(model, random_fields(model.grid, 2, roughly(np.random.default_rng(5))))
    return model


@cache
def kernels_called_by(case: str) -> frozenset[str]:
    """Names of the kernels that a few steps of ``case`` called, each having been compared."""
    twins = Twins()
    twins.put_in()
    try:
        model = stirred(CASES[case]) if case in CASES else two_layers()
        replace_constants(model, centred_tracers=case.endswith("channel"))
        if case == "hastened":
            model.hasten(pace_limit=10.0, rossby=0.5)
        model.advance(STEPS)
        # A current that would empty cells brings in the limiter of thickness.
        model.state.velocity_x[...] *= 100.0
        model.advance(1)
    finally:
        twins.take_out()
    return frozenset(twins.called)


@pytest.mark.parametrize("case", [*CASES, TWO_LAYERS])
def test_compiled_kernels_equal_their_source(case: str) -> None:
    """To round-off, for every call of five steps; a difference fails inside and names the kernel."""
    assert kernels_called_by(case)


def test_every_kernel_has_been_compared() -> None:
    """The cases together call all there are, so a new kernel must come with a case that calls it."""
    called = frozenset().union(*(kernels_called_by(case) for case in (*CASES, TWO_LAYERS)))
    assert called == all_kernels()
