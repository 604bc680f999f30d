"""The Arakawa C-grid on a beta-plane: coordinates, areas, Coriolis parameter, edges."""

from oceanbox.grid.cgrid import HALO, Grid, build_grid

__all__ = ["HALO", "Grid", "build_grid"]
