"""Window-mean budget maps and face fluxes from a ledger and the state before and after.

Every map is a gain of the warm layer (summed over the moving layers), (ny, nx); storage = sum of terms + residual.
"""

import numpy as np
from numpy.typing import NDArray

from oceanbox.budgets.units import Water
from oceanbox.grid import Grid
from oceanbox.physics.state import Ledger, State

__all__ = ["BUDGETS", "budget_maps", "face_fluxes"]

Array = NDArray[np.float64]

# Terms, storage and residual of each budget, by the names of the result file.
BUDGETS: dict[str, tuple[tuple[str, ...], str, str]] = {
    "volume": (
        (
            "volume_convergence",
            "entrainment_upwelling",
            "entrainment_diffusive",
            "entrainment_shoaling",
            "entrainment_prescribed",
            "transformation",
            "outcrop_volume",
        ),
        "volume_storage",
        "volume_residual",
    ),
    "heat": (
        ("heat_flux_prescribed", "heat_flux_restoring", "heat_advection", "heat_mixing", "outcrop_heat"),
        "heat_storage",
        "heat_residual",
    ),
    "salt": (
        ("virtual_salt_flux", "salt_advection", "salt_mixing", "transformation_salt", "outcrop_salt"),
        "salt_storage",
        "salt_residual",
    ),
}


def _convergence(grid: Grid, through_x: Array, through_y: Array) -> Array:
    """-(F_x + F_y) summed over layers; compute arrays (L, ny+4, nx+4) in, (ny, nx) out."""
    x = grid.x_faces(through_x).sum(axis=0)
    y = grid.y_faces(through_y).sum(axis=0)
    return -np.diff(x, axis=1) / grid.dx - np.diff(y, axis=0) / grid.dy


def _gain(grid: Grid, before: Array, after: Array) -> Array:
    return grid.centres(after).sum(axis=0) - grid.centres(before).sum(axis=0)


def budget_maps(
    grid: Grid, ledger: Ledger, before: State, after: State, seconds: float, water: Water
) -> dict[str, Array]:
    """All terms of the three budgets as rates over the ``seconds`` the ledger covers, m s-1, W m-2, kg m-2 s-1."""
    centre = grid.centres
    amounts = {
        "volume_convergence": _convergence(grid, ledger.volume_x, ledger.volume_y),
        "entrainment_upwelling": centre(ledger.entrainment_upwelling),
        "entrainment_diffusive": centre(ledger.entrainment_diffusive),
        "entrainment_shoaling": centre(ledger.entrainment_shoaling),
        "entrainment_prescribed": centre(ledger.entrainment_prescribed),
        "transformation": centre(ledger.transformation),
        "outcrop_volume": centre(ledger.outcrop_volume),
        "volume_storage": _gain(grid, before.thickness, after.thickness),
        "heat_flux_prescribed": centre(ledger.heat_prescribed),
        "heat_flux_restoring": centre(ledger.heat_restoring),
        "heat_advection": _convergence(grid, ledger.heat_advection_x, ledger.heat_advection_y),
        "heat_mixing": _convergence(grid, ledger.heat_mixing_x, ledger.heat_mixing_y),
        "outcrop_heat": centre(ledger.outcrop_heat),
        "heat_storage": _gain(grid, before.heat, after.heat),
        "virtual_salt_flux": centre(ledger.virtual_salt),
        "salt_advection": _convergence(grid, ledger.salt_advection_x, ledger.salt_advection_y),
        "salt_mixing": _convergence(grid, ledger.salt_mixing_x, ledger.salt_mixing_y),
        "transformation_salt": centre(ledger.transformation_salt),
        "outcrop_salt": centre(ledger.outcrop_salt),
        "salt_storage": _gain(grid, before.salt, after.salt),
    }
    units = {"volume": 1.0, "heat": water.heat, "salt": water.salt}
    maps: dict[str, Array] = {}
    for budget, (terms, storage, residual) in BUDGETS.items():
        for name in (*terms, storage):
            maps[name] = amounts[name] * (units[budget] / seconds)
        maps[residual] = maps[storage] - sum(maps[name] for name in terms)
    maps["surface_heat_flux"] = maps["heat_flux_prescribed"] + maps["heat_flux_restoring"]
    return maps


def face_fluxes(grid: Grid, ledger: Ledger, seconds: float, water: Water) -> dict[str, Array]:
    """Window-mean transports of water by layer [m2 s-1] and of heat, all layers together [W m-1], on their faces."""
    heat = water.heat / seconds
    return {
        "transport_x": grid.x_faces(ledger.volume_x) / seconds,
        "transport_y": grid.y_faces(ledger.volume_y) / seconds,
        "heat_transport_x": grid.x_faces(ledger.heat_advection_x).sum(axis=0) * heat,
        "heat_transport_y": grid.y_faces(ledger.heat_advection_y).sum(axis=0) * heat,
        "heat_diffusion_x": grid.x_faces(ledger.heat_mixing_x).sum(axis=0) * heat,
        "heat_diffusion_y": grid.y_faces(ledger.heat_mixing_y).sum(axis=0) * heat,
    }
