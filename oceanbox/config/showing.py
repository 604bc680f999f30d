"""Values in messages."""

from __future__ import annotations

from typing import Any


def show(value: Any) -> str:
    """A value as it would stand in YAML, cut where it is long."""
    if value is None:
        return "null"
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, dict):
        text = "{" + ", ".join(f"{key}: {show(item)}" for key, item in value.items()) + "}"
    elif isinstance(value, list | tuple):
        text = "[" + ", ".join(show(item) for item in value) + "]"
    else:
        text = repr(value)
    return text if len(text) <= 60 else text[:57] + "..."
