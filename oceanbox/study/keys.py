"""What the schema says of a dotted key of a configuration: its unit and its sentence."""

from __future__ import annotations

from typing import Any, NamedTuple

from oceanbox.config import Config
from oceanbox.config.allowed import entry_of
from oceanbox.config.section import FIELD_UNIT, Section

__all__ = ["KeyWords", "describe", "value_at"]


class KeyWords(NamedTuple):
    """Unit (UDUNITS spelling, '' for words and mappings) and sentence of a key."""

    unit: str
    sentence: str


def describe(config: Config, key: str) -> KeyWords:
    """The unit and the sentence of a dotted key as it stands in `config`; empty where the schema does not say.

    Numbers inside a field have the unit of the key that holds the field.
    """
    here: Any = config
    words, unit_of_field = KeyWords("", ""), ""
    for part in key.split("."):
        if isinstance(here, tuple):
            if not part.isdecimal() or int(part) >= len(here):
                return KeyWords("", "")
            here = here[int(part)]
            continue
        if not isinstance(here, Section) or part not in type(here).model_fields:
            return KeyWords("", "")
        entry = entry_of(type(here).model_fields[part])
        unit = unit_of_field if entry.unit == FIELD_UNIT else entry.unit
        unit_of_field = unit or unit_of_field
        words = KeyWords(unit, entry.sentence.rstrip("."))
        here = getattr(here, part)
    return words


def value_at(config: Config, key: str) -> Any:
    """The value of a dotted key, None where it leads nowhere."""
    here: Any = config
    for part in key.split("."):
        if isinstance(here, tuple):
            here = here[int(part)] if part.isdecimal() and int(part) < len(here) else None
        else:
            here = getattr(here, part, None)
    return here
