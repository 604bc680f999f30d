"""What the warm layer holds: volume, heat, salt and kinetic energy."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from oceanbox.diagnostics.labelled import array_of, scalars
from oceanbox.diagnostics.reference import Reference

if TYPE_CHECKING:
    import xarray as xr

__all__ = ["KG_PER_G", "contents_of", "excess_content", "kinetic_energy"]

Array = NDArray[np.float64]

KG_PER_G = 1.0e-3


def excess_content(thickness: Array, tracer: Array, abyss: float, cell_area: Array) -> float:
    """Volume integral of a tracer relative to its value in the abyss, in its unit times m3.

    thickness, tracer  (layer, ny, nx); thickness in m
    """
    return float((thickness * (tracer - abyss) * cell_area).sum())


def kinetic_energy(
    thickness: Array, velocity_x: Array, velocity_y: Array, cell_area: Array, reference_density: float
) -> float:
    """Kinetic energy, J, of layers (layer, ny, nx) with velocities on their x and y faces, m s-1.

    Squares are averaged from faces to centres, as in the Bernoulli function of the C-grid.
    """
    square_x = 0.5 * (velocity_x[..., 1:] ** 2 + velocity_x[..., :-1] ** 2)
    square_y = 0.5 * (velocity_y[..., 1:, :] ** 2 + velocity_y[..., :-1, :] ** 2)
    return float(0.5 * reference_density * (thickness * (square_x + square_y) * cell_area).sum())


def contents_of(dataset: xr.Dataset, reference: Reference) -> xr.Dataset:
    """Volume (m3), heat (J) and salt (kg) relative to the abyss, and kinetic energy (J); 0-d variables.

    They belong to the mean state: the kinetic energy of the mean flow leaves out that of the eddies. Raises
    UnreadableResult if a variable is missing or not finite.
    """
    thickness = array_of(dataset, "thickness")
    area = array_of(dataset, "cell_area")
    density = reference.reference_density_kg_per_m3
    warmth = excess_content(thickness, array_of(dataset, "temperature"), reference.abyss_temperature_degC, area)
    saltiness = excess_content(thickness, array_of(dataset, "salinity"), reference.abyss_salinity_g_per_kg, area)
    energy = kinetic_energy(thickness, array_of(dataset, "velocity_x"), array_of(dataset, "velocity_y"), area, density)
    return scalars(
        {
            "warm_water_volume": float((thickness * area).sum()),
            "heat_content": density * reference.heat_capacity_J_per_kg_K * warmth,
            "salt_content": density * KG_PER_G * saltiness,
            "kinetic_energy": energy,
        }
    )
