"""Exchange with the abyss: making warm water, destroying it, and what happens where the layer is gone."""

# ruff: noqa: N815  (attributes are the keys of the YAML file, whose ending is the unit)

from __future__ import annotations

from typing import Annotated, Any, ClassVar, Literal

from pydantic import Discriminator, Tag

from oceanbox.config.fields import FieldSpec, field
from oceanbox.config.section import Real, Section, choice, optional_subsection, quantity, subsection


class UpwellingEntrainment(Section):
    """Water that the wind lifts through the base of the mixed layer, as far as it comes from below the thermocline."""

    mixed_layer_depth_m: Real = quantity(50.0, "The fixed depth of the surface mixed layer.", "m", gt=0.0)
    thermocline_half_thickness_m: Real = quantity(
        30.0, "The depth scale over which a deeper thermocline cuts off cold water.", "m", gt=0.0
    )
    shear_damping_per_day: Real = quantity(0.5, "The damping of the Ekman shear.", "day-1", gt=0.0)


class DiffusiveEntrainment(Section):
    """Entrainment by vertical mixing, diffusivity over thickness."""

    diffusivity_m2_per_s: Real = quantity(1.0e-5, "The vertical diffusivity in the thermocline.", "m2 s-1", gt=0.0)


class ShoalingEntrainment(Section):
    """Entrainment that keeps a thin layer from vanishing."""

    minimum_thickness_m: Real = quantity(50.0, "The thickness below which this entrainment sets in.", "m", gt=0.0)
    time_days: Real = quantity(1.0, "The time scale of that entrainment.", "days", gt=0.0)


class PrescribedEntrainment(Section):
    """An entrainment map that is simply given."""

    velocity_m_per_day: FieldSpec = field(0.0, "The entrainment velocity, into the layer.", "m day-1")


class Entrainment(Section):
    """The ways of making warm water; their sum is the entrainment, null switches one off."""

    upwelling: UpwellingEntrainment | None = subsection(UpwellingEntrainment, "The wind-driven entrainment, or null.")
    diffusive: DiffusiveEntrainment | None = optional_subsection("The entrainment by vertical mixing, or null.")
    shoaling: ShoalingEntrainment | None = subsection(
        ShoalingEntrainment, "The entrainment that keeps a thin layer alive, or null."
    )
    prescribed: PrescribedEntrainment | None = optional_subsection("The given entrainment map, or null.")


class ConstantEfficiency(Section):
    """The same share of every loss destroys warm water."""

    tag: ClassVar[str] = "<constant>"
    kind: Literal["constant"] = choice("constant", "The word that picks this rule.")
    value: Real = quantity(1.0, "The share of the buoyancy loss that destroys warm water.", "1", ge=0.0, le=1.0)


class CoolingEfficiency(Section):
    """The share grows as the layer cools: exp(-Theta/scale), Theta the temperature above the abyss's."""

    tag: ClassVar[str] = "<cooling>"
    kind: Literal["cooling"] = choice("cooling", "The word that picks this rule.")
    scale_K: Real = quantity(6.0, "The temperature excess at which the share falls to 1/e.", "K", gt=0.0)


def _efficiency_tag(value: Any) -> str:
    if isinstance(value, ConstantEfficiency | CoolingEfficiency):
        return value.tag
    return f"<{value.get('kind', '')}>" if isinstance(value, dict) else "<>"


Efficiency = Annotated[
    Annotated[ConstantEfficiency, Tag(ConstantEfficiency.tag)]
    | Annotated[CoolingEfficiency, Tag(CoolingEfficiency.tag)],
    Discriminator(_efficiency_tag),
]


class Transformation(Section):
    """How surface buoyancy loss turns warm water into abyssal water."""

    efficiency: Efficiency = subsection(
        ConstantEfficiency, "The share of the buoyancy loss that destroys warm water rather than cooling it."
    )
    floor_thickness_m: Real = quantity(50.0, "The thickness below which nothing is destroyed.", "m", gt=0.0)
    salt: Literal["carried", "left_behind"] = choice(
        "carried", "Whether destroyed water carries its salinity anomaly into the abyss or leaves it behind."
    )


class Outcrop(Section):
    """What happens where the warm layer has become as dense as the abyss."""

    margin_K: Real = quantity(
        2.0, "The temperature excess over the abyss below which the layer counts as outcropping.", "K", gt=0.0
    )
    time_days: Real = quantity(
        10.0, "The time in which an outcropping layer hands its excess volume to the abyss.", "days", gt=0.0
    )
