"""The arrays a scheme works in, and what it must remember from earlier steps."""

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from oceanbox.grid import Grid

__all__ = ["Memory", "Workspace", "empty_memory", "empty_workspace"]

Array = NDArray[np.float64]


class Memory(NamedTuple):
    """What the multi-step scheme remembers; part of a restart.  Each (3, L, ny+4, nx+4), a ring over the step count."""

    transport_x: Array  # U of the last steps
    transport_y: Array
    advection_x: Array  # vorticity flux and Bernoulli gradient, x faces
    advection_y: Array
    pressure_x: Array  # pressure force, x faces
    pressure_y: Array


class Workspace(NamedTuple):
    """Scratch arrays, never carried from one step to the next.  (L, ny+4, nx+4) or (ny+4, nx+4)."""

    flux_x: Array  # (L,...) transport used for this step
    flux_y: Array
    tracer_x: Array  # (...) flux of heat or salt through x faces
    tracer_y: Array
    concentration: Array  # (...) Theta or Sigma
    buoyancy: Array  # (L,...)
    layer_pair: Array  # (2,...) for the pressure force
    vorticity: Array  # (...) q at corners
    kinetic: Array  # (...)
    mixed_x: Array  # (...) mixed-layer transport
    mixed_y: Array
    gain: Array  # (L,...) water entrained in the step
    share: Array  # (...) outflow share
    force_x: Array  # (L,...) the forces of this step
    force_y: Array
    pressure_x: Array  # (L,...) the newest pressure force
    pressure_y: Array
    thickness_x: Array  # (L,...) h on x faces
    thickness_y: Array  # (L,...) h on y faces


def empty_memory(grid: Grid, layers: int) -> Memory:
    """A memory of a fluid at rest."""
    return Memory(*(np.zeros((3, layers, *grid.shape)) for _ in Memory._fields))


def empty_workspace(grid: Grid, layers: int) -> Workspace:
    """Scratch arrays at zero."""
    deep, flat = (layers, *grid.shape), grid.shape
    pair = (2, *grid.shape)
    flat_fields = {"tracer_x", "tracer_y", "concentration", "vorticity", "kinetic", "mixed_x", "mixed_y", "share"}
    shapes = dict.fromkeys(Workspace._fields, deep) | dict.fromkeys(flat_fields, flat) | {"layer_pair": pair}
    return Workspace(*(np.zeros(shapes[name]) for name in Workspace._fields))
