"""Volume, heat and salt budgets from the very fluxes the steps used."""

from oceanbox.budgets.closure import Closure, closure
from oceanbox.budgets.rates import budget_maps, face_fluxes
from oceanbox.budgets.units import Water

__all__ = ["Closure", "Water", "budget_maps", "closure", "face_fluxes"]
