"""Checking plain data against the schema, with every fault put into words a user can act on."""

from __future__ import annotations

import re
from collections.abc import Iterator
from difflib import get_close_matches
from math import isfinite
from typing import Any, TypeVar, get_args

from pydantic import ValidationError
from pydantic_core import ErrorDetails

from oceanbox.config.allowed import Entry, allowed, entry_of, item_of, model_word, sections_in
from oceanbox.config.section import CROSS_CHECK, FIELD_UNIT, Section
from oceanbox.config.showing import show
from oceanbox.errors import ConfigError, Fault

Checked = TypeVar("Checked", bound=Section)
Path = tuple[str | int, ...]

_PICKING_KEYS = ("shape", "kind")
_NUMBER_WITH_UNIT = re.compile(r"\s*([-+]?(?:\d+\.?\d*|\.\d+)(?:[eE][-+]?\d+)?)\s*\S*\s*")


def validate(model: type[Checked], data: Any) -> Checked:
    """Build the model from plain mappings, lists and scalars.

    Raises ConfigError with one fault, without location, for each thing wrong.
    """
    try:
        return model.model_validate(data)
    except ValidationError as error:
        faults = [fault for details in error.errors() for fault in _faults(model, data, details)]
        raise ConfigError(dict.fromkeys(faults)) from None  # a dict, because one list fault may come once per item


def dotted(path: Path) -> str:
    """A path as the key users write: ('layers', 0, 'x') is 'layers.0.x'."""
    return ".".join(str(part) for part in path)


def _faults(model: type[Section], data: Any, details: ErrorDetails) -> Iterator[Fault]:
    """Put one entry of pydantic's list into our words."""
    kind, location, value = details["type"], details["loc"], details["input"]
    context = details.get("ctx", {})
    if kind == "missing" and isinstance(location[-1], int):
        # too short a list of fixed length: speak of the list, not of the absent item
        kind, location = "too_short", location[:-1]
        value = _dig(data, _path(location))
        context = {"min_length": len(value) + 1}
    if kind == "too_short" and len(value) >= context["min_length"]:
        return  # only short because of wrong items, each of which has a fault of its own
    path = _path(location)
    owner, entry = _look_up(model, location)
    if kind == CROSS_CHECK:
        for cross in context["faults"]:
            yield Fault("", dotted((*path, cross.key)), cross.got, cross.allowed, cross.remedy)
    elif kind == "extra_forbidden":
        yield _unknown_key((*_path(location[:-1]), location[-1]), owner, value)
    elif kind == "missing" and entry is not None:
        required = f"required: {allowed(entry)}"
        yield Fault("", dotted(path), "nothing", required, f"add {path[-1]}: {_wanted(entry)}")
    elif kind in ("union_tag_invalid", "union_tag_not_found") and entry is not None:
        yield _unknown_kind(path, entry, value)
    else:
        yield _wrong_value(path, entry, value)


def _path(location: Path) -> Path:
    """A location of pydantic without the tags of the kinds it went through."""
    return tuple(part for part in location if not _is_tag(part))


def _is_tag(part: str | int) -> bool:
    return isinstance(part, str) and part.startswith("<") and part.endswith(">")


def _look_up(model: type[Section], location: Path) -> tuple[type[Section] | None, Entry | None]:
    """The section a location ends in and the schema entry there, None where it leaves the schema."""
    owner: type[Section] | None = model
    entry: Entry | None = None
    for part in location:
        candidates = sections_in(entry.annotation) if entry is not None else (model,)
        if isinstance(part, int):
            entry = item_of(entry, part) if entry is not None else None
        elif _is_tag(part):
            owner = next((kind for kind in candidates if getattr(kind, "tag", "") == part), None)
        elif owner is None or part not in owner.model_fields:
            return owner, None
        else:
            entry = entry_of(owner.model_fields[part])
            inside = sections_in(entry.annotation)
            owner = inside[0] if len(inside) == 1 else None
    return owner, entry


def _dig(data: Any, path: Path) -> Any:
    for part in path:
        data = data[part]
    return data


def _unknown_key(path: Path, owner: type[Section] | None, value: Any) -> Fault:
    known = list(owner.model_fields) if owner is not None else []
    close = get_close_matches(str(path[-1]), known, n=1, cutoff=0.6)
    remedy = f"did you mean '{close[0]}'?" if close else f"the keys here are {', '.join(known)}"
    where = dotted(path[:-1])
    return Fault("", dotted(path), show(value), f"no such key {f'in {where}' if where else 'at the top level'}", remedy)


def _unknown_kind(path: Path, entry: Entry, value: Any) -> Fault:
    """A mapping that names no kind, or one that does not exist."""
    models = sections_in(entry.annotation)
    picking_key = next(key for key in _PICKING_KEYS for model in models if key in model.model_fields)
    words = [model_word(model) for model in models if picking_key in model.model_fields]
    choices = " | ".join(words)
    if not isinstance(value, dict) or picking_key not in value:
        remedy = f"say which with {picking_key}: {choices}"
        return Fault("", dotted(path), show(value), f"must be {allowed(entry)}", remedy)
    word = value[picking_key]
    close = get_close_matches(str(word), words, n=1, cutoff=0.6)
    remedy = f"did you mean '{close[0]}'?" if close else "choose one of these"
    return Fault("", dotted((*path, picking_key)), show(word), f"must be one of {choices}", remedy)


def _wrong_value(path: Path, entry: Entry | None, value: Any) -> Fault:
    if entry is None:
        return Fault("", dotted(path), show(value), "must be a mapping of keys", "write 'key: value' lines")
    text = f"must be {allowed(entry)}"
    if isinstance(value, float) and not isfinite(value):
        text = text.replace("a number", "a finite number", 1)
    return Fault("", dotted(path), show(value), text, _remedy(entry, value))


def _remedy(entry: Entry, value: Any) -> str:
    """What to do about a wrong value of a known key."""
    text = allowed(entry)
    if value is None and text.startswith("a mapping"):
        return "remove the line to keep the defaults, or give the keys"
    models = sections_in(entry.annotation)
    if len(models) == 1 and text.startswith("a mapping"):
        return f"give its keys on lines below: {', '.join(models[0].model_fields)}"
    if text.startswith("one of"):
        words = [str(word) for word in _literal_words(entry.annotation)]
        close = get_close_matches(str(value), words, n=1, cutoff=0.6)
        return f"did you mean '{close[0]}'?" if close else "choose one of these"
    if isinstance(value, str) and text.startswith(("a number", "a whole number")):
        number = _NUMBER_WITH_UNIT.fullmatch(value)
        if number:
            why = ", the unit is part of the key" if entry.unit not in ("", "1", FIELD_UNIT) else ""
            return f"write the bare number, {number[1]}{why}"
    if text.startswith("text") and isinstance(value, int | float):
        return "put it in quotes to make it text"
    if text.startswith("true or false"):
        return "write true or false"
    return f"give {_wanted(entry)}"


def _literal_words(annotation: Any) -> tuple[Any, ...]:
    arguments = get_args(annotation)
    return tuple(word for item in arguments for word in (_literal_words(item) or (item,)) if isinstance(word, str))


def _wanted(entry: Entry) -> str:
    """The sentence of a key as the object of 'give'."""
    sentence = (entry.sentence or "a value").rstrip(".")
    return sentence[0].lower() + sentence[1:]
