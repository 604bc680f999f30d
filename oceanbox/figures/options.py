"""What can stand on a page: one model of options for each kind of panel."""

# ruff: noqa: N815  (attributes are the keys of the YAML file, whose ending is the unit)

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated, Any, ClassVar, Literal

from pydantic import Discriminator, Field, Tag

from oceanbox.config.section import CrossFault, Real, Section, Whole, choice, quantity

__all__ = [
    "Approach",
    "EquatorialSection",
    "Exchange",
    "HeatBudget",
    "Panel",
    "PanelOptions",
    "TemperatureMap",
    "ThermoclineMap",
]

HeatTerm = Literal["surface_heat_flux", "heat_advection", "heat_mixing", "outcrop_heat", "heat_storage"]


class PanelOptions(Section):
    """What every panel has."""

    tag: ClassVar[str]
    span_columns: Whole = quantity(1, "The number of columns of the page that the panel takes.", ge=1)
    relative_height: Real = quantity(1.0, "The height of the panel beside that of the other rows.", gt=0.0)


class ThermoclineMap(PanelOptions):
    """Map of thermocline depth with arrows of the current in the top layer."""

    tag: ClassVar[str] = "<thermocline_map>"
    kind: Literal["thermocline_map"] = choice("thermocline_map", "The word that picks this panel.")
    shallowest_m: Real | None = quantity(None, "The lower end of the colour scale, or null to fit the field.", "m")
    deepest_m: Real | None = quantity(None, "The upper end of the colour scale, or null to fit the field.", "m")
    arrows: Literal["current", "none"] = choice("current", "Whether arrows of the mean current are drawn.")
    arrows_across: Whole = quantity(12, "The number of arrows from the western to the eastern edge.", ge=2)

    def cross_faults(self) -> Iterator[CrossFault]:
        """A colour scale must rise."""
        yield from _scale_faults("shallowest_m", self.shallowest_m, "deepest_m", self.deepest_m)


class TemperatureMap(PanelOptions):
    """Map of surface temperature with the outline of the cold tongue."""

    tag: ClassVar[str] = "<temperature_map>"
    kind: Literal["temperature_map"] = choice("temperature_map", "The word that picks this panel.")
    coldest_degC: Real | None = quantity(None, "The lower end of the colour scale, or null to fit the field.", "degC")
    warmest_degC: Real | None = quantity(None, "The upper end of the colour scale, or null to fit the field.", "degC")
    outline: Literal["cold_tongue", "none"] = choice("cold_tongue", "Whether the edge of the cold tongue is drawn.")

    def cross_faults(self) -> Iterator[CrossFault]:
        """A colour scale must rise."""
        yield from _scale_faults("coldest_degC", self.coldest_degC, "warmest_degC", self.warmest_degC)


class EquatorialSection(PanelOptions):
    """Surface temperature and thermocline depth along the equator."""

    tag: ClassVar[str] = "<equatorial_section>"
    kind: Literal["equatorial_section"] = choice("equatorial_section", "The word that picks this panel.")
    spread: Literal["shaded", "none"] = choice("shaded", "Whether the spread within the window is shaded.")


class HeatBudget(PanelOptions):
    """Heat budget by latitude above the northward heat transport."""

    tag: ClassVar[str] = "<heat_budget>"
    kind: Literal["heat_budget"] = choice("heat_budget", "The word that picks this panel.")
    terms: Annotated[tuple[HeatTerm, ...], Field(min_length=1)] = choice(
        ("surface_heat_flux", "heat_advection", "heat_mixing", "heat_storage"),
        "The terms of the budget that are drawn.",
    )


class Exchange(PanelOptions):
    """Warm water made, destroyed and carried northward, by latitude."""

    tag: ClassVar[str] = "<exchange>"
    kind: Literal["exchange"] = choice("exchange", "The word that picks this panel.")
    form: Literal["south_of_latitude", "per_degree"] = choice(
        "south_of_latitude", "Whether rates are summed from the southern wall or given per degree of latitude."
    )


class Approach(PanelOptions):
    """The approach to equilibrium: equatorial depth, warm-water volume and heat imbalance against time."""

    tag: ClassVar[str] = "<approach>"
    kind: Literal["approach"] = choice("approach", "The word that picks this panel.")
    from_year: Real = quantity(0.0, "The model time at which the axis begins.", "years", ge=0.0)


def _panel_tag(value: Any) -> str:
    if isinstance(value, PanelOptions):
        return value.tag
    return f"<{value.get('kind', '')}>" if isinstance(value, dict) else "<>"


Panel = Annotated[
    Annotated[ThermoclineMap, Tag(ThermoclineMap.tag)]
    | Annotated[TemperatureMap, Tag(TemperatureMap.tag)]
    | Annotated[EquatorialSection, Tag(EquatorialSection.tag)]
    | Annotated[HeatBudget, Tag(HeatBudget.tag)]
    | Annotated[Exchange, Tag(Exchange.tag)]
    | Annotated[Approach, Tag(Approach.tag)],
    Discriminator(_panel_tag),
]
"""Any panel; its `kind` tells which."""


def _scale_faults(low_key: str, low: float | None, high_key: str, high: float | None) -> Iterator[CrossFault]:
    if low is not None and high is not None and low >= high:
        yield CrossFault(
            high_key,
            f"{high:g} with {low_key} {low:g}",
            f"must be greater than {low_key}",
            "swap the two, or leave one out to fit the field",
        )
