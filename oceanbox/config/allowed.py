"""What a key may hold, in words, read off the schema: one wording for fault messages and for the reference."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from types import NoneType, UnionType
from typing import Annotated, Any, Literal, Union, get_args, get_origin

import annotated_types
from pydantic.fields import FieldInfo

from oceanbox.config.fields import FieldKind
from oceanbox.config.section import FIELD_UNIT, Section

A_FIELD = "a number or a field (shape, points, file or sum)"
_BOUNDS = (
    (annotated_types.Gt, "gt", ">"),
    (annotated_types.Ge, "ge", ">="),
    (annotated_types.Lt, "lt", "<"),
    (annotated_types.Le, "le", "<="),
)
_PLAIN_WORDS = {bool: "true or false", int: "a whole number", float: "a number", str: "text"}


@dataclass(frozen=True)
class Entry:
    """A place in the schema: what it may hold, in which unit (UDUNITS spelling, '' for words and mappings)."""

    annotation: Any
    metadata: tuple[Any, ...]
    unit: str
    sentence: str


def entry_of(info: FieldInfo) -> Entry:
    """The schema entry of a key."""
    extra = info.json_schema_extra
    unit = str(extra.get("unit", "")) if isinstance(extra, dict) else ""
    return Entry(info.annotation, tuple(info.metadata), unit, info.description or "")


def item_of(entry: Entry, index: int) -> Entry:
    """The entry of one item of a list; the entry itself where it is no list."""
    annotation, metadata = entry.annotation, entry.metadata
    while get_origin(annotation) is Annotated:
        annotation, *inner = get_args(annotation)
        metadata = (*metadata, *inner)
    if get_origin(annotation) is not tuple:
        return entry
    items = get_args(annotation)
    item = items[0] if items[-1] is Ellipsis else items[min(index, len(items) - 1)]
    return Entry(item, (), entry.unit, entry.sentence)


def sections_in(annotation: Any) -> tuple[type[Section], ...]:
    """The section models an annotation can hold, whatever unions and lists they are wrapped in."""
    if isinstance(annotation, type) and issubclass(annotation, Section):
        return (annotation,)
    return tuple(model for argument in get_args(annotation) for model in sections_in(argument))


def allowed(entry: Entry) -> str:
    """What the entry may hold, as 'a number > 0 km or null'."""
    pattern = next((item.pattern for item in entry.metadata if getattr(item, "pattern", None)), None)
    if pattern is not None:
        return f"text that matches {pattern}"
    return _describe(entry.annotation, entry.metadata, entry.unit)


def _describe(annotation: Any, metadata: tuple[Any, ...], unit: str) -> str:
    """Put one annotation into words; `metadata` holds the bounds that apply to it."""
    origin, arguments = get_origin(annotation), get_args(annotation)
    models = sections_in(annotation)
    if origin is Annotated:
        return _describe(arguments[0], (*metadata, *arguments[1:]), unit)
    if origin is tuple:
        return _describe_list(arguments, metadata, unit)
    if origin is dict:
        return "a mapping of keys" + _at_least(metadata)
    if annotation is Any:
        return "any value"
    if origin in (Union, UnionType) and NoneType in arguments:
        rest = [argument for argument in arguments if argument is not NoneType]
        return _describe(rest[0], metadata, unit) + " or null"
    if origin is Literal:
        return "one of " + " | ".join(str(word) for word in arguments)
    if any(issubclass(model, FieldKind) for model in models):
        return A_FIELD + (f", {unit}" if unit else "")
    if len(models) > 1:
        return "a mapping with kind " + " | ".join(model_word(model) for model in models)
    if models:
        return "a mapping of keys"
    if origin in (Union, UnionType):
        return " or ".join(_describe(argument, metadata, unit) for argument in arguments)
    return _PLAIN_WORDS[annotation] + _range(metadata, unit)


def _at_least(metadata: tuple[Any, ...]) -> str:
    """The least number of keys among the metadata."""
    least = next((item for item in metadata if isinstance(item, annotated_types.MinLen)), None)
    return f", {least.min_length} or more" if least is not None else ""


def _describe_list(arguments: tuple[Any, ...], metadata: tuple[Any, ...], unit: str) -> str:
    if arguments[-1] is not Ellipsis:
        return f"a list of {len(arguments)}: " + ", ".join(_describe(item, (), unit) for item in arguments)
    lengths = {type(item): item for item in metadata}
    least, most = lengths.get(annotated_types.MinLen), lengths.get(annotated_types.MaxLen)
    count = ""
    if least is not None and most is not None:
        count = (
            f", {least.min_length} to {most.max_length} items"
            if least.min_length < most.max_length
            else ", exactly 1 item"
        )
    elif least is not None:
        count = f", {least.min_length} or more items"
    return f"a list{count}, each {_describe(arguments[0], (), unit)}"


def _range(metadata: tuple[Any, ...], unit: str) -> str:
    """The bounds among the metadata with their unit, as ' > 0 and <= 1 m'."""
    bounds = list(_bounds(metadata))
    named = "" if unit in ("", "1", FIELD_UNIT) else f" {unit}"
    if not bounds:
        return f" in{named}" if named else ""
    return " " + " and ".join(bounds) + named


def _bounds(metadata: tuple[Any, ...]) -> Iterator[str]:
    for item in metadata:
        if isinstance(item, FieldInfo):  # an Annotated type keeps its bounds inside a FieldInfo
            yield from _bounds(tuple(item.metadata))
        for kind, attribute, sign in _BOUNDS:
            if isinstance(item, kind):
                yield f"{sign} {getattr(item, attribute):g}"


def model_word(model: type[Section]) -> str:
    """The word that picks a model out of its union, from its tag."""
    return str(getattr(model, "tag", "")).strip("<>")
