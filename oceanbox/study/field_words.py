"""Fields of a configuration in words, as a methods section would put them."""

from __future__ import annotations

from pathlib import Path

from oceanbox.config.fields import (
    Band,
    Cosine,
    FieldSpec,
    FileField,
    Gaussian,
    Linear,
    Points,
    SumOfFields,
    TropicsToPole,
)

__all__ = ["FIELDS", "field_words", "spoken"]

FIELDS = (Band, Cosine, FileField, Gaussian, Linear, Points, SumOfFields, TropicsToPole)
"""All kinds of fields that are more than one number."""

_SPOKEN = {"1": "", "degree": "degrees", "year": "years", "day-1": "per day"}


def spoken(value: float, unit: str) -> str:
    """A number with its unit."""
    return f"{value:.6g} {_SPOKEN.get(unit, unit)}".strip()


def field_words(field: FieldSpec | float, unit: str) -> str:
    """A field as the end of a sentence that begins with what it is; numbers are in `unit`."""
    match field:
        case Gaussian():
            base = f" above {spoken(field.base, unit)}" if field.base else ""
            return (
                f"a Gaussian of latitude with peak {spoken(field.peak, unit)}{base} at {field.centre_deg:g} degrees and "
                f"e-folding half-width {field.width_deg:g} degrees"
            )
        case TropicsToPole():
            return (
                f"{spoken(field.tropical, unit)} within {field.flat_to_deg:g} degrees of the equator, half a cosine to "
                f"{spoken(field.polar, unit)} at {field.pole_deg:g} degrees in both hemispheres"
            )
        case Band():
            where = "both hemispheres" if field.hemispheres == "both" else f"the {field.hemispheres}ern hemisphere"
            return (
                f"a sin2 bump with peak {spoken(field.peak, unit)} between {field.from_deg:g} and {field.to_deg:g} degrees "
                f"in {where}"
            )
        case Cosine():
            return f"a cosine over the basin with amplitude {spoken(field.amplitude, unit)} and {field.half_waves:g} half waves"
        case Linear():
            return (
                f"a linear function of latitude, {spoken(field.value_at_origin, unit)} at the origin, "
                f"{spoken(field.slope_per_deg, unit)} per degree"
            )
        case Points():
            points = ", ".join(f"{value:g} at {latitude:g}" for latitude, value in field.points)
            return f"linear between points of latitude ({points} degrees; {unit})"
        case FileField():
            return f"the variable {field.variable} of the file {Path(field.file).name}"
        case SumOfFields():
            return "the sum of " + " and ".join(field_words(part, unit) for part in field.sum)
        case _:
            return f"{spoken(float(field), unit)} everywhere"
