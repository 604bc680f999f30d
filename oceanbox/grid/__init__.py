"""The Arakawa C-grid on a beta-plane: coordinates, areas, Coriolis parameter, edges."""

from oceanbox.grid.cgrid import HALO, Grid, build_grid, to_degrees

__all__ = ["HALO", "Grid", "build_grid", "to_degrees"]
