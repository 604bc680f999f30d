"""What all sections of the configuration share: strict values, a unit and a sentence for every key, cross checks."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Annotated, Any, Self

from pydantic import BaseModel, ConfigDict, Field, model_validator
from pydantic_core import PydanticCustomError

# Strict, because the lenient rules would read `true` as 1.0 and the text '12' as a number.
Real = Annotated[float, Field(strict=True)]
Whole = Annotated[int, Field(strict=True)]
YesNo = Annotated[bool, Field(strict=True)]

FIELD_UNIT = "unit of the field"
"""Stands for a unit inside a field, whose numbers are in the unit of the key that holds the field."""

CROSS_CHECK = "oceanbox_cross_check"


@dataclass(frozen=True)
class CrossFault:
    """A value that is right by itself and wrong beside the others.

    key        key inside the section, dotted where it lies deeper
    got        the values that disagree, as text
    allowed    the rule they break
    remedy     what to do
    """

    key: str
    got: str
    allowed: str
    remedy: str


class Section(BaseModel):
    """One mapping of the configuration: frozen, no unknown keys, no infinite numbers."""

    model_config = ConfigDict(frozen=True, extra="forbid", allow_inf_nan=False)

    def cross_faults(self) -> Iterator[CrossFault]:
        """Yield every rule between the keys of this section that is broken."""
        yield from ()

    @model_validator(mode="after")
    def _refuse_cross_faults(self) -> Self:
        faults = tuple(self.cross_faults())
        if faults:
            raise PydanticCustomError(CROSS_CHECK, "keys of this section disagree", {"faults": faults})
        return self


def quantity(
    default: float | int | None,
    sentence: str,
    unit: str = "1",
    *,
    gt: float | None = None,
    ge: float | None = None,
    lt: float | None = None,
    le: float | None = None,
) -> Any:
    """A number with its unit (UDUNITS spelling), its sentence (begins with 'The' or 'A') and its range."""
    return Field(default, description=sentence, json_schema_extra={"unit": unit}, gt=gt, ge=ge, lt=lt, le=le)


def required_quantity(sentence: str, unit: str = "1", *, gt: float | None = None) -> Any:
    """A number without a default; `gt` is the value it must exceed."""
    return Field(description=sentence, json_schema_extra={"unit": unit}, gt=gt)


def choice(default: Any, sentence: str) -> Any:
    """A key without a unit: a word out of a list, yes or no, or a list of words."""
    return Field(default, description=sentence)


def subsection(default_factory: Any, sentence: str) -> Any:
    """A nested mapping that is built from its own defaults when it is left out."""
    return Field(default_factory=default_factory, description=sentence)


def optional_subsection(sentence: str) -> Any:
    """A nested mapping that is absent (null) unless it is written down."""
    return Field(None, description=sentence)
