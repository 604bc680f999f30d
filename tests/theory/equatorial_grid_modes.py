r"""Equatorial waves as a C-grid, exact in time, carries them: their frequencies there are biased.

u lies on x faces and p at centres, both at y_j; v lies on y faces y_(j+1/2), zero on the walls. For fields
exp[i (k x - omega t)] with v = i w the linear equations in pressure units p = g' eta / c are

    omega u = -C w + c K p,    omega w = -C^T u - c D p,    omega p = c K u - c D^T w,

K = (2/dx) sin(k dx/2), D the y difference from centres to faces and C the 4-point Coriolis average, whose
x part is the factor cos(k dx/2). Using C in one equation and C^T in the other makes the matrix symmetric: the
energy-conserving form. f stands either at corners (the vorticity form, u_t = <f <v>^x>^y, v_t = -<f <u>^y>^x)
or at centres; the two have biases of opposite sign on Rossby waves.

Source: derived; the energy-conserving average is that of Sadourny (1975), J. Atmos. Sci. 32, 680-689.
"""

from dataclasses import dataclass
from functools import lru_cache
from typing import Literal, NamedTuple

import numpy as np
import scipy.linalg
from numpy.typing import NDArray

from tests.theory.equatorial_waves import MeridionalStructure

Array = NDArray[np.floating]
CoriolisPlace = Literal["corner", "centre"]


@dataclass(frozen=True)
class Channel:
    """A channel between walls at y = -+ half_width [m], cells dx by dy [m], c [m s-1], beta [m-1 s-1]."""

    dx: float
    dy: float
    half_width: float
    wave_speed: float
    beta: float
    coriolis_place: CoriolisPlace = "corner"

    @property
    def y_centre(self) -> Array:
        """Latitudes of u and p [m], (ny,)."""
        return -self.half_width + self.dy * (np.arange(round(2.0 * self.half_width / self.dy)) + 0.5)

    @property
    def y_face(self) -> Array:
        """Latitudes of v between the walls [m], (ny - 1,)."""
        return -self.half_width + self.dy * np.arange(1, self.y_centre.size)


class GridMode(NamedTuple):
    """A wave of the grid: omega [s-1] and real amplitudes in one velocity unit, u, p (ny,) and w (ny - 1,).

    The fields are u = u cos(theta), v = -w sin(theta), h = (H / c) p cos(theta), theta = k x - omega t.
    """

    frequency: float
    u: Array
    w: Array
    p: Array


def coriolis_average(channel: Channel, wavenumber: float) -> Array:
    """C [s-1], (ny, ny - 1): (C v)_j is the 4-point average of f v at the u point."""
    ny = channel.y_centre.size
    rows = np.arange(ny - 1)
    average = np.zeros((ny, ny - 1))
    average[rows, rows] = average[rows + 1, rows] = 0.5 * np.cos(0.5 * wavenumber * channel.dx)
    if channel.coriolis_place == "corner":
        return channel.beta * average * channel.y_face
    return channel.beta * average * channel.y_centre[:, np.newaxis]


def channel_operator(channel: Channel, wavenumber: float) -> Array:
    """The symmetric matrix [s-1] of the module's equations on (u, w, p), (3 ny - 1, 3 ny - 1); k in m-1."""
    ny = channel.y_centre.size
    c = channel.wave_speed
    difference = (np.eye(ny - 1, ny, 1) - np.eye(ny - 1, ny)) / channel.dy
    slope = 2.0 / channel.dx * np.sin(0.5 * wavenumber * channel.dx) * np.eye(ny)
    average = coriolis_average(channel, wavenumber)
    return np.block(
        [
            [np.zeros((ny, ny)), -average, c * slope],
            [-average.T, np.zeros((ny - 1, ny - 1)), -c * difference],
            [c * slope, -c * difference.T, np.zeros((ny, ny))],
        ]
    )


@lru_cache(maxsize=8)
def grid_modes(channel: Channel, wavenumber: float) -> tuple[GridMode, ...]:
    """All 3 ny - 1 waves of wavenumber k [m-1], by ascending omega; (u, w, p) of each has unit length.

    Kept for the last few channels, since several waves are mostly asked of one.
    """
    ny = channel.y_centre.size
    frequencies, vectors = scipy.linalg.eigh(channel_operator(channel, wavenumber))
    return tuple(
        GridMode(float(frequency), vector[:ny], vector[ny : 2 * ny - 1], vector[2 * ny - 1 :])
        for frequency, vector in zip(frequencies, vectors.T, strict=True)
    )


def matching_grid_mode(
    channel: Channel,
    wavenumber: float,
    centre_structure: MeridionalStructure,
    face_structure: MeridionalStructure,
    depth: float,
) -> GridMode:
    """The wave of the grid that most resembles a continuous one, scaled to its amplitude.

    centre_structure is the continuous wave at channel.y_centre (its u and h are used), face_structure the same
    at channel.y_face (its v is used), depth [m] the rest depth that made them.

    Raises ValueError when no wave of the grid shares three quarters of its energy: the grid does not carry it.
    """
    wanted = np.concatenate([centre_structure.u, -face_structure.v, centre_structure.h * channel.wave_speed / depth])
    size = float(np.linalg.norm(wanted))
    modes = grid_modes(channel, wavenumber)
    overlaps = np.array([np.concatenate([m.u, m.w, m.p]) @ wanted / size for m in modes])
    best = int(np.argmax(np.abs(overlaps)))
    if overlaps[best] ** 2 < 0.75:
        raise ValueError(f"the closest wave of the grid shares only {overlaps[best] ** 2:.0%} of the energy; refine it")
    scale = size * np.sign(overlaps[best])
    mode = modes[best]
    return GridMode(mode.frequency, mode.u * scale, mode.w * scale, mode.p * scale)


def kelvin_frequency_on_c_grid(wavenumber: float, wave_speed: float, dx: float) -> float:
    """omega = c (2/dx) sin(k dx/2) [s-1], exact on the C-grid at any dy; relative error -(k dx)^2 / 24.

    The Kelvin wave has v = 0 there too: f <u>^y cos(k dx/2) = -c D p has a solution with u = p.
    """
    return float(wave_speed * 2.0 / dx * np.sin(0.5 * wavenumber * dx))
