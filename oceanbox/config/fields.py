"""Fields: the ways to write down a map over the basin, from one number to a variable of a NetCDF file."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated, Any, ClassVar, Literal

from pydantic import Discriminator, Field, Tag

from oceanbox.config.section import FIELD_UNIT, CrossFault, Real, Section, Whole, choice, quantity, required_quantity

Hemispheres = Literal["both", "north", "south"]
Latitude = Annotated[Real, Field(ge=-90.0, le=90.0)]


class FieldKind(Section):
    """Base of all fields that are more than a number; values are in the unit of the key that holds the field."""

    tag: ClassVar[str]


class Gaussian(FieldKind):
    """A bell curve in latitude: base + peak exp(-((lat - centre)/width)^2)."""

    tag: ClassVar[str] = "<gaussian>"
    shape: Literal["gaussian"] = choice("gaussian", "The word that picks this kind of field.")
    peak: Real = required_quantity("The height of the bell above its base.", FIELD_UNIT)
    centre_deg: Real = quantity(0.0, "The latitude of the peak.", "degree", ge=-90.0, le=90.0)
    width_deg: Real = required_quantity("The distance from the peak at which the bell falls to 1/e.", "degree", gt=0.0)
    base: Real = quantity(0.0, "The value far from the peak.", FIELD_UNIT)


class TropicsToPole(FieldKind):
    """Flat in the tropics, flat beyond a polar latitude, half a cosine between; the same in both hemispheres."""

    tag: ClassVar[str] = "<tropics_to_pole>"
    shape: Literal["tropics_to_pole"] = choice("tropics_to_pole", "The word that picks this kind of field.")
    tropical: Real = required_quantity("The value equatorward of flat_to_deg.", FIELD_UNIT)
    polar: Real = required_quantity("The value poleward of pole_deg.", FIELD_UNIT)
    flat_to_deg: Real = quantity(
        8.0, "The distance from the equator up to which the field is flat.", "degree", ge=0.0, le=90.0
    )
    pole_deg: Real = quantity(
        45.0,
        "The distance from the equator at which the polar value is reached.",
        "degree",
        ge=0.0,
        le=90.0,
    )

    def cross_faults(self) -> Iterator[CrossFault]:
        """The polar latitude lies poleward of the flat part."""
        if self.pole_deg <= self.flat_to_deg:
            yield CrossFault(
                "pole_deg",
                f"{self.pole_deg:g} with flat_to_deg {self.flat_to_deg:g}",
                "must be more than flat_to_deg",
                "raise pole_deg or lower flat_to_deg",
            )


class Cosine(FieldKind):
    """A cosine over the length B of the basin: amplitude cos(pi half_waves (y - y_south)/B + phase)."""

    tag: ClassVar[str] = "<cosine>"
    shape: Literal["cosine"] = choice("cosine", "The word that picks this kind of field.")
    amplitude: Real = required_quantity("The value at the crest.", FIELD_UNIT)
    phase_deg_of_basin: Real = quantity(
        0.0, "The phase at the southern wall, where 180 is the basin's length for half_waves 1.", "degree"
    )
    half_waves: Real = quantity(1.0, "The number of half waves from the southern to the northern wall.", gt=0.0)


class LatitudeBand(Section):
    """A band between two distances from the equator, in one hemisphere or both."""

    from_deg: Real = quantity(30.0, "The equatorward edge as a distance from the equator.", "degree", ge=0.0, le=90.0)
    to_deg: Real = quantity(45.0, "The poleward edge as a distance from the equator.", "degree", ge=0.0, le=90.0)
    hemispheres: Hemispheres = choice("both", "The hemispheres that carry the band.")

    def cross_faults(self) -> Iterator[CrossFault]:
        """The poleward edge lies poleward of the other."""
        if self.to_deg <= self.from_deg:
            yield CrossFault(
                "to_deg",
                f"{self.to_deg:g} with from_deg {self.from_deg:g}",
                "must be more than from_deg",
                "raise to_deg or lower from_deg (both are distances from the equator)",
            )


class Band(LatitudeBand, FieldKind):
    """A smooth bump, peak sin^2, between two distances from the equator; zero outside."""

    tag: ClassVar[str] = "<band>"
    shape: Literal["band"] = choice("band", "The word that picks this kind of field.")
    peak: Real = required_quantity("The value in the middle of the band.", FIELD_UNIT)


class Linear(FieldKind):
    """A straight line in latitude: value_at_origin + slope_per_deg lat."""

    tag: ClassVar[str] = "<linear>"
    shape: Literal["linear"] = choice("linear", "The word that picks this kind of field.")
    value_at_origin: Real = required_quantity("The value at latitude zero.", FIELD_UNIT)
    slope_per_deg: Real = quantity(0.0, "The change for each degree northward.", FIELD_UNIT)


class Points(FieldKind):
    """Straight lines between (latitude, value) points, constant beyond the first and the last."""

    tag: ClassVar[str] = "<points>"
    points: tuple[tuple[Latitude, Real], ...] = Field(
        description="The [latitude, value] pairs, latitudes strictly increasing, at least two.", min_length=2
    )

    def cross_faults(self) -> Iterator[CrossFault]:
        """Latitudes increase strictly, or the line between two points has no meaning."""
        for index in range(1, len(self.points)):
            before, here = self.points[index - 1][0], self.points[index][0]
            if here <= before:
                yield CrossFault(
                    f"points.{index}",
                    f"latitude {here:g} after {before:g}",
                    "latitudes must increase strictly",
                    "sort the points from south to north and keep one for each latitude",
                )


class FileField(FieldKind):
    """A variable of a NetCDF file on a rectilinear latitude/longitude or x/y grid, interpolated linearly."""

    tag: ClassVar[str] = "<file>"
    file: str = Field(
        description="The NetCDF file, a relative path starting at the folder of the YAML file.", min_length=1
    )
    variable: str = Field(description="The name of the variable in that file.", min_length=1)
    time_index: Whole = quantity(0, "The record to take where the variable has a time dimension, from 0.", ge=0)


class SumOfFields(FieldKind):
    """The sum of other fields."""

    tag: ClassVar[str] = "<sum>"
    sum: tuple[FieldSpec, ...] = Field(description="The fields to add up, at least one.", min_length=1)


SHAPES: tuple[type[FieldKind], ...] = (Gaussian, TropicsToPole, Cosine, Band, Linear)
FIELD_KINDS: tuple[type[FieldKind], ...] = (*SHAPES, Points, FileField, SumOfFields)
NUMBER_TAG = "<number>"


def _field_tag(value: Any) -> str:
    """Pick the kind by the key that is present, so that faults speak of that kind alone."""
    if isinstance(value, FieldKind):
        return value.tag
    if isinstance(value, dict):
        if "shape" in value:
            return f"<{value['shape']}>"
        for key in ("points", "file", "sum"):
            if key in value:
                return f"<{key}>"
        return "<>"
    return NUMBER_TAG


FieldSpec = Annotated[
    Annotated[Real, Tag(NUMBER_TAG)]
    | Annotated[Gaussian, Tag(Gaussian.tag)]
    | Annotated[TropicsToPole, Tag(TropicsToPole.tag)]
    | Annotated[Cosine, Tag(Cosine.tag)]
    | Annotated[Band, Tag(Band.tag)]
    | Annotated[Linear, Tag(Linear.tag)]
    | Annotated[Points, Tag(Points.tag)]
    | Annotated[FileField, Tag(FileField.tag)]
    | Annotated[SumOfFields, Tag(SumOfFields.tag)],
    Discriminator(_field_tag),
]
"""A number (uniform) or one of the kinds above."""

SumOfFields.model_rebuild()


def field(default: float | FieldKind | None, sentence: str, unit: str) -> Any:
    """A key that holds a field, in the given unit (UDUNITS spelling)."""
    return Field(default, description=sentence, json_schema_extra={"unit": unit})
