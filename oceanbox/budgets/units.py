"""From what the ledger counts (m, K m, g kg-1 m) to fluxes of heat and salt."""

from dataclasses import dataclass

__all__ = ["Water"]


@dataclass(frozen=True)
class Water:
    """Reference density rho0 [kg m-3] and specific heat c_p [J kg-1 K-1] of the layers."""

    density: float
    heat_capacity: float

    @property
    def heat(self) -> float:
        """J m-2 for each K m: rho0 c_p."""
        return self.density * self.heat_capacity

    @property
    def salt(self) -> float:
        """kg m-2 of salt for each (g kg-1) m: rho0/1000."""
        return 1e-3 * self.density
