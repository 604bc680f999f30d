"""The reference of every key, generated from the schema so that it cannot fall behind it."""

from __future__ import annotations

import difflib
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any, get_origin

from pydantic.fields import FieldInfo

from oceanbox.config.allowed import Entry, allowed, entry_of, model_word, sections_in
from oceanbox.config.fields import FIELD_KINDS, FieldKind
from oceanbox.config.schema import Config
from oceanbox.config.section import Section
from oceanbox.config.showing import show
from oceanbox.errors import ConfigError, Fault


@dataclass(frozen=True)
class KeyReference:
    """One key of the configuration.

    key        dotted key; 'layers[].x' inside a list, 'gaussian: x' inside a kind of field
    unit       UDUNITS spelling; '' for words, lists and mappings
    default    as it stands in YAML; 'required' where there is none
    allowed    what the key may hold, with its range
    sentence   what it is
    """

    key: str
    unit: str
    default: str
    allowed: str
    sentence: str


def reference_keys() -> tuple[KeyReference, ...]:
    """Every key of the configuration, in the order of the schema."""
    return tuple(_keys(Config, ""))


def field_keys() -> tuple[KeyReference, ...]:
    """Every key of every kind of field."""
    return tuple(key for kind in FIELD_KINDS for key in _keys(kind, f"{model_word(kind)}: "))


def reference_text() -> str:
    """All keys as text: dotted key, unit, default, allowed values, one sentence."""
    parts = ["KEYS", *(_block(key) for key in reference_keys())]
    parts += ["FIELDS", "A field is a number, the same everywhere, or a mapping of one of these kinds:"]
    for kind in FIELD_KINDS:
        parts.append(f"{model_word(kind)}: {(kind.__doc__ or '').strip()}")
        parts += [_block(key) for key in _keys(kind, f"{model_word(kind)}: ")]
    return "\n\n".join(parts) + "\n"


def keys_text(start: str) -> str:
    """The keys whose dotted name begins with, or contains, `start`, as `reference_text` shows them.

    Raises ConfigError with the nearest names where there is none.
    """
    names = [key.key for key in reference_keys()]
    found = [key for key in reference_keys() if key.key.startswith(start)]
    found = found or [key for key in reference_keys() if start in key.key]
    if not found:
        near = difflib.get_close_matches(start, names, n=3, cutoff=0.4)
        remedy = f"did you mean {' or '.join(near)}?" if near else "list them all with `oceanbox keys`"
        raise ConfigError([Fault("", "", start, "must be the start or a part of a key of the configuration", remedy)])
    return "\n\n".join(_block(key) for key in found)


def json_schema() -> dict[str, Any]:
    """The schema as JSON Schema (draft 2020-12), with the unit of each key."""
    return Config.model_json_schema()


def _block(key: KeyReference) -> str:
    unit = f" [{key.unit}]" if key.unit else ""
    return f"{key.key}{unit}\n    {key.sentence}\n    default: {key.default}\n    allowed: {key.allowed}"


def _keys(model: type[Section], prefix: str) -> Iterator[KeyReference]:
    for name, info in model.model_fields.items():
        entry = entry_of(info)
        inner = [kind for kind in sections_in(entry.annotation) if not issubclass(kind, FieldKind)]
        key = f"{prefix}{name}{'[]' if inner and get_origin(info.annotation) is tuple else ''}"
        yield KeyReference(key, entry.unit, _default(info, entry), allowed(entry), entry.sentence)
        for kind in inner:
            word = model_word(kind)
            yield from _keys(kind, f"{key}.({word}) " if word else f"{key}.")


def _default(info: FieldInfo, entry: Entry) -> str:
    if info.is_required():
        return "required"
    value = info.get_default(call_default_factory=True, validated_data={})
    if isinstance(value, FieldKind):
        return _yaml(value)
    if isinstance(value, Section) or (value and isinstance(value, tuple) and isinstance(value[0], Section)):
        return "the defaults of its keys"
    return show(value)


def _yaml(value: Any) -> str:
    """A field in flow style, whole."""
    if isinstance(value, Section):
        return "{" + ", ".join(f"{name}: {_yaml(getattr(value, name))}" for name in type(value).model_fields) + "}"
    if isinstance(value, tuple):
        return "[" + ", ".join(_yaml(item) for item in value) + "]"
    return str(value)
