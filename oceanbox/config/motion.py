"""Momentum: what moves and what slows the water; and the lateral mixing of its properties."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Literal

from pydantic import Field

from oceanbox.config.section import CrossFault, Real, Section, YesNo, choice, optional_subsection, quantity

Side = Literal["west", "east", "south", "north"]


class Sponge(Section):
    """Drag that rises smoothly towards some walls."""

    sides: tuple[Side, ...] = Field(description="The walls that carry a sponge.", min_length=1)
    width_km: Real = quantity(500.0, "The distance from the wall over which the drag falls to zero.", "km", gt=0.0)
    rate_per_day: Real = quantity(0.5, "The drag at the wall.", "day-1", gt=0.0)

    def cross_faults(self) -> Iterator[CrossFault]:
        """Each wall is named once."""
        if len(set(self.sides)) < len(self.sides):
            yield CrossFault(
                "sides",
                "[" + ", ".join(self.sides) + "]",
                "each wall at most once",
                "remove the repeated wall",
            )


class Motion(Section):
    """Terms of the momentum equation that a configuration can change."""

    momentum_advection: YesNo = choice(True, "Whether the flow carries its own momentum.")
    linear_about_depth_m: Real | None = quantity(
        None, "The rest depth about which all dynamics are linear, or null for the full equations.", "m", gt=0.0
    )
    viscosity_m2_per_s: Real = quantity(8.0e3, "The lateral viscosity.", "m2 s-1", ge=0.0)
    viscosity_acts_on: Literal["velocity", "transport"] = choice(
        "velocity", "What the lateral friction smooths: velocity, or transport as exact solutions assume."
    )
    drag_per_day: Real = quantity(0.0, "The linear drag at the base of the layer.", "day-1", ge=0.0)
    sponge: Sponge | None = optional_subsection("The drag near the walls, or null.")

    def cross_faults(self) -> Iterator[CrossFault]:
        """Linear dynamics have no advection of momentum, so asking for both is a contradiction."""
        if self.linear_about_depth_m is not None and self.momentum_advection:
            yield CrossFault(
                "momentum_advection",
                f"true with linear_about_depth_m {self.linear_about_depth_m:g}",
                "linear dynamics have no advection of momentum",
                "set momentum_advection to false, or linear_about_depth_m to null",
            )


class Mixing(Section):
    """Lateral mixing of temperature and salinity."""

    lateral_diffusivity_m2_per_s: Real = quantity(
        500.0, "The lateral diffusivity of temperature and salinity.", "m2 s-1", ge=0.0
    )
