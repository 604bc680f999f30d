"""The arrays a scheme works in, and what it must remember from earlier steps."""

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from oceanbox.grid import Grid

__all__ = ["Memory", "Workspace", "belt_rows", "empty_memory", "empty_workspace"]

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
    """Scratch belts (`physics.rows`), never carried from one step to the next.  Each (L, B, nx+4)."""

    per_thickness: Array  # 1/h before the step
    temperature: Array  # Theta before the step
    salinity: Array  # Sigma before the step
    thickness_x: Array  # h on x faces, before the step
    thickness_y: Array
    flux_x: Array  # transport that moves the water in this step
    flux_y: Array
    share: Array  # outflow share
    tracer_x: Array  # flux of heat or salt
    tracer_y: Array
    salt_x: Array
    salt_y: Array
    vorticity: Array  # q at corners
    turned: Array  # f <V>/<h> at corners
    kinetic: Array
    force_x: Array  # friction and rotation
    force_y: Array
    mixed_x: Array  # mixed-layer transport
    mixed_y: Array
    gain: Array  # water entrained in the step
    heating: Array  # heat the surface gives
    later_thickness_x: Array  # h on x faces, after the water has moved
    later_thickness_y: Array
    buoyancy: Array
    pressure: Array  # P and d of the pressure force
    depth: Array
    later_transport_x: Array  # U of the new u
    later_turned: Array  # f <U>/<h> at corners


# Belts should stay in cache, but a sweep in few bands starts fewer loops: measured, twice a core's own cache is best.
BELT_BYTES = 2 * 2**20
FEWEST_BELT_ROWS, MOST_BELT_ROWS = 8, 128


def belt_rows(columns: int, layers: int) -> int:
    """Places of a belt, a power of two: as many as fit the cache.  Results do not depend on it."""
    a_row = 8 * columns * layers * len(Workspace._fields)
    rows = MOST_BELT_ROWS
    while rows > FEWEST_BELT_ROWS and rows * a_row > BELT_BYTES:
        rows //= 2
    return rows


def empty_memory(grid: Grid, layers: int) -> Memory:
    """A memory of a fluid at rest."""
    return Memory(*(np.zeros((3, layers, *grid.shape)) for _ in Memory._fields))


def empty_workspace(grid: Grid, layers: int, rows: int) -> Workspace:
    """Belts at zero, with ``rows`` places: a power of two, or at least as many as the grid has rows."""
    return Workspace(*(np.zeros((layers, rows, grid.shape[1])) for _ in Workspace._fields))
