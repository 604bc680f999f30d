"""Changing single keys of a finished configuration."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, TypeVar

from oceanbox.config.section import Section
from oceanbox.config.showing import show
from oceanbox.config.validating import validate
from oceanbox.errors import ConfigError, Fault

Changed = TypeVar("Changed", bound=Section)


def with_changes(section: Changed, changes: Mapping[str, Any]) -> Changed:
    """A copy with the given dotted keys changed, checked anew as if it came from a file.

    A key below an absent (null) section brings that section to life with its defaults. Raises ConfigError.
    """
    tree = section.model_dump()
    faults = [fault for key, value in changes.items() if (fault := _set(tree, key, value)) is not None]
    if faults:
        raise ConfigError(faults)
    return validate(type(section), tree)


def _set(tree: dict[str, Any], key: str, value: Any) -> Fault | None:
    """Put a value at a dotted key; unknown keys are left to the schema, which knows what is close to them."""
    *parents, last = key.split(".")
    here: Any = tree
    for part in parents:
        step = _child(here, part)
        if isinstance(step, Fault):
            return Fault("", key, step.value, step.allowed, step.remedy)
        here = step
    if isinstance(here, list):
        if _item(here, last) is None:
            return Fault("", key, show(value), f"this list has items 0 to {len(here) - 1}", "give one of these numbers")
        here[int(last)] = value
    elif isinstance(here, dict):
        here[last] = value
    else:
        return _no_keys(key, here)
    return None


def _child(here: Any, part: str) -> Any:
    """The container one step down, made where it is absent; a Fault where there can be none."""
    if isinstance(here, dict):
        if here.get(part) is None:
            here[part] = {}
        elif isinstance(here[part], tuple):
            here[part] = list(here[part])
        return here[part]
    if isinstance(here, list):
        item = _item(here, part)
        if item is None:
            return Fault("", part, part, f"this list has items 0 to {len(here) - 1}", "give one of these numbers")
        return item
    return _no_keys(part, here)


def _item(items: list[Any], part: str) -> Any:
    return items[int(part)] if part.isdecimal() and int(part) < len(items) else None


def _no_keys(key: str, value: Any) -> Fault:
    return Fault("", key, show(value), "a value without keys below it", "change the key above it as a whole")
