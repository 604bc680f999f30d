"""The hand-written C step (``c_step.c``), compiled when first wanted and called with the arrays of a model."""

from __future__ import annotations

import ctypes
import hashlib
import shutil
import subprocess
import tempfile
from functools import cache
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from oceanbox.physics.state import Constants, Forcing, Ledger, State
from oceanbox.stepping.memory import Memory
from oceanbox.stepping.weights import advection_weights, pressure_weights, transport_weights
from tests.benchmarks.numpy_step import require_reference_physics

__all__ = ["FLAGS", "advance_c", "have_compiler"]

Array = NDArray[np.float64]
FLAGS = ("-O3", "-march=native")
HERE = Path(__file__).parent
POINTER = ctypes.POINTER(ctypes.c_double)
LINES = 16

NUMBERS = {
    "dx": "dx", "dy": "dy", "sign": "tangential_sign", "viscosity": "viscosity", "diffusivity": "diffusivity",
    "wind_ramp": "wind_ramp", "gravity": "gravity", "expansion": "expansion_abyss", "slope": "expansion_slope",
    "mixed_depth": "mixed_depth", "half_length": "half_thickness", "shoaling_depth": "shoaling_depth",
    "shoaling_time": "shoaling_time", "efficiency": "efficiency", "efficiency_scale": "efficiency_scale",
    "floor": "floor_depth", "margin": "outcrop_margin", "outcrop_time": "outcrop_time",
}  # fmt: skip
RINGS = dict(zip(("tx", "ty", "ax", "ay", "px", "py"), Memory._fields, strict=True))
FORCING = {
    "wind_x": "wind_x", "wind_y": "wind_y", "shear_x": "shear_x", "shear_y": "shear_y",
    "prescribed": "prescribed_heating", "restoring": "restoring_velocity", "target": "target_anomaly",
    "entrainment": "prescribed_entrainment", "drag_x": "drag_x", "drag_y": "drag_y", "coriolis": "coriolis",
}  # fmt: skip
BOOKS = {
    "volume_x": "volume_x", "volume_y": "volume_y", "advected_x": "heat_advection_x", "advected_y": "heat_advection_y",
    "mixed_x": "heat_mixing_x", "mixed_y": "heat_mixing_y", "upwelled": "entrainment_upwelling",
    "shoaled": "entrainment_shoaling", "entrained": "entrainment_prescribed", "transformed": "transformation",
    "outcrop_volume": "outcrop_volume", "heat_prescribed": "heat_prescribed", "heat_restoring": "heat_restoring",
    "outcrop_heat": "outcrop_heat", "limited_faces": "limited_faces",
}  # fmt: skip


class Numbers(ctypes.Structure):
    """``Numbers`` of c_step.c."""

    _fields_ = [("rows", ctypes.c_long), ("columns", ctypes.c_long), *((name, ctypes.c_double) for name in NUMBERS)]


class Fields(ctypes.Structure):
    """``Fields`` of c_step.c."""

    _fields_ = [
        *((name, POINTER) for name in ("h", "heat", "u", "v")),
        *((name, POINTER * 3) for name in RINGS),
        *((name, POINTER) for name in (*FORCING, *BOOKS)),
    ]


class Scratch(ctypes.Structure):
    """``Scratch`` of c_step.c."""

    _fields_ = [(name, POINTER) for name in ("flux_x", "flux_y", "force_x", "gain", "lines")]


def have_compiler() -> bool:
    """True where gcc can be called."""
    return shutil.which("gcc") is not None


@cache
def _library() -> ctypes.CDLL:
    """The compiled step, kept in the folder for temporary files under a hash of its sources and flags."""
    sources = [HERE / "c_step.c", HERE / "c_exchange.h"]
    digest = hashlib.sha256(b"".join(source.read_bytes() for source in sources) + " ".join(FLAGS).encode())
    target = Path(tempfile.gettempdir()) / f"c_step_{digest.hexdigest()[:16]}.so"
    if not target.exists():
        with tempfile.TemporaryDirectory() as folder:
            fresh = Path(folder) / "step.so"
            subprocess.run(
                ["gcc", *FLAGS, "-std=gnu11", "-Wall", "-shared", "-fPIC", "-o", fresh, sources[0], "-lm"], check=True
            )
            shutil.move(fresh, target)
    return ctypes.CDLL(str(target))


def _pointer(array: Array) -> ctypes.POINTER:
    if not array.flags.c_contiguous or array.dtype != np.float64:
        raise ValueError("got an array that is not contiguous float64")
    return array.ctypes.data_as(POINTER)


def _fields(state: State, memory: Memory, forcing: Forcing, ledger: Ledger) -> Fields:
    fields = Fields()
    for name, field in zip(("h", "heat", "u", "v"), (state[0], state[1], state[3], state[4]), strict=True):
        setattr(fields, name, _pointer(field[0]))
    for name, ring in RINGS.items():
        for slot in range(3):
            getattr(fields, name)[slot] = _pointer(getattr(memory, ring)[slot, 0])
    for names, group in ((FORCING, forcing), (BOOKS, ledger)):
        for name, field_name in names.items():
            setattr(fields, name, _pointer(getattr(group, field_name)))
    return fields


def advance_c(
    state: State, memory: Memory, forcing: Forcing, constants: Constants, ledger: Ledger,
    steps_done: int, history: int, start_time: float, dt: float, exchange_every: int, steps: int,
) -> None:  # fmt: skip
    """Take ``steps`` steps in place; arguments as those of `numpy_step.advance_numpy`."""
    require_reference_physics(state, constants)
    rows, columns = state.thickness.shape[1:]
    numbers = Numbers(rows, columns, *(getattr(constants, name) for name in NUMBERS.values()))
    scratch_arrays = [np.zeros((rows, columns)) for _ in range(4)] + [np.zeros((LINES, columns))]
    scratch = Scratch(*(_pointer(array) for array in scratch_arrays))
    fields = _fields(state, memory, forcing, ledger)
    weights = [
        np.array([rule(known) for known in range(4)])
        for rule in (transport_weights, advection_weights, pressure_weights)
    ]
    integer, real = ctypes.c_long, ctypes.c_double
    _library().advance(
        ctypes.byref(numbers), ctypes.byref(fields), ctypes.byref(scratch), integer(steps_done), integer(history),
        real(start_time), real(dt), integer(exchange_every), integer(steps), *(_pointer(weight) for weight in weights),
    )  # fmt: skip
