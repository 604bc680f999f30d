"""The whole configuration, and the rules between its sections."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any, Self

from pydantic import Field

from oceanbox.config.basin import Basin
from oceanbox.config.changing import with_changes
from oceanbox.config.exchange import Entrainment, Outcrop, Transformation
from oceanbox.config.motion import Mixing, Motion
from oceanbox.config.running import Equilibrium, Evolve, Numerics, Output
from oceanbox.config.section import CrossFault, Section, subsection
from oceanbox.config.surface import Surface
from oceanbox.config.water import Layer, Water


class Config(Section):
    """One experiment, complete: every key has a value."""

    name: str = Field(
        description="The name of the experiment and of its results, of a-z, 0-9, '_' and '-'.",
        pattern=r"^[a-z0-9_-]+$",
    )
    description: str = Field(default="", description="The experiment in one sentence.")
    basin: Basin = subsection(Basin, "The basin.")
    water: Water = subsection(Water, "The equation of state and the abyss.")
    layers: tuple[Layer, ...] = Field(
        default_factory=lambda: (Layer(),),
        description="The moving layers from the top down, exactly one for now.",
        min_length=1,
        max_length=1,
    )
    motion: Motion = subsection(Motion, "The momentum equation.")
    mixing: Mixing = subsection(Mixing, "The lateral mixing.")
    entrainment: Entrainment = subsection(Entrainment, "The making of warm water.")
    transformation: Transformation | None = subsection(
        Transformation, "The destruction of warm water by surface loss, or null for none."
    )
    outcrop: Outcrop | None = subsection(Outcrop, "The rule for a layer as dense as the abyss, or null for none.")
    surface: Surface = subsection(Surface, "The surface fluxes.")
    equilibrium: Equilibrium = subsection(Equilibrium, "The search for equilibrium.")
    evolve: Evolve = subsection(Evolve, "A run of fixed length.")
    output: Output = subsection(Output, "What a run records.")
    numerics: Numerics = subsection(Numerics, "The time stepping and discretisation.")

    def cross_faults(self) -> Iterator[CrossFault]:
        """Rules that need more than one section."""
        yield from self._sponge_faults()
        yield from self._depth_faults()

    def _sponge_faults(self) -> Iterator[CrossFault]:
        sponge = self.motion.sponge
        missing = [side for side in sponge.sides if side in ("west", "east")] if sponge else []
        if missing and self.basin.zonal_boundary == "periodic":
            yield CrossFault(
                "motion.sponge.sides",
                f"{' and '.join(missing)} with basin.zonal_boundary periodic",
                "a sponge needs a wall",
                "keep south and north only, or set basin.zonal_boundary to walls",
            )

    def _depth_faults(self) -> Iterator[CrossFault]:
        deepest = self.numerics.deepest_layer_m
        if deepest is None:
            return
        starts = [layer.initial_thickness_m for layer in self.layers]
        depths: list[tuple[str, Any]] = [("motion.linear_about_depth_m", self.motion.linear_about_depth_m)]
        depths += [(f"layers.{index}.initial_thickness_m", start) for index, start in enumerate(starts)]
        for key, depth in depths:
            if isinstance(depth, float) and depth > deepest:
                yield CrossFault(
                    key,
                    f"{depth:g} with numerics.deepest_layer_m {deepest:g}",
                    "must be at most numerics.deepest_layer_m, which sets the time step",
                    "raise numerics.deepest_layer_m or lower this depth",
                )

    def with_changes(self, changes: Mapping[str, Any]) -> Self:
        """A copy with the given dotted keys changed, checked anew.

        changes    values as they would stand in a YAML file, by dotted key, such as {"surface.wind.ramp_days": 3.0};
                   items of a list by number: "layers.0.initial_thickness_m"

        Raises ConfigError, one fault for each thing wrong.
        """
        return with_changes(self, changes)
