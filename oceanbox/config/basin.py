"""The basin: its size, its cells, its walls and its rotation."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Literal

from oceanbox.config.section import CrossFault, Real, Section, Whole, choice, quantity


class Basin(Section):
    """A rectangle on a beta-plane, divided into equal cells."""

    width_km: Real = quantity(6000.0, "The distance from the western to the eastern wall.", "km", gt=0.0)
    south_km: Real = quantity(-5000.0, "The y of the southern wall, measured from the origin.", "km")
    north_km: Real = quantity(5000.0, "The y of the northern wall, measured from the origin.", "km")
    cells_x: Whole = quantity(120, "The number of cells from west to east.", ge=4)
    cells_y: Whole = quantity(200, "The number of cells from south to north.", ge=4)
    zonal_boundary: Literal["walls", "periodic"] = choice(
        "walls",
        "What closes the basin in the west and east: walls, or water that re-enters on the other side.",
    )
    side_walls: Literal["free_slip", "no_slip"] = choice("free_slip", "How the flow along a wall feels it.")
    coriolis_at_origin_per_s: Real = quantity(0.0, "The Coriolis parameter at y = 0.", "s-1")
    beta_per_m_s: Real = quantity(2.28e-11, "The northward gradient of the Coriolis parameter.", "m-1 s-1", ge=0.0)

    def cross_faults(self) -> Iterator[CrossFault]:
        """The northern wall lies north of the southern one."""
        if self.north_km <= self.south_km:
            yield CrossFault(
                "north_km",
                f"{self.north_km:g} with south_km {self.south_km:g}",
                "must be more than south_km",
                "raise north_km or lower south_km",
            )
