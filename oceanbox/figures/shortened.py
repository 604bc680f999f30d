"""Whether the way to the equilibrium in a result was shortened, and what to say of its time series."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import yaml

from oceanbox.output.provenance import CONFIG_ATTRIBUTE

__all__ = ["SHORTENED", "was_shortened"]

SHORTENED = (
    "The way to equilibrium is shortened by hastened steps and extrapolations: before the windows that are judged, time counts "
    "steps, not what the ocean would take."
)


def was_shortened(attributes: Mapping[Any, Any]) -> bool:
    """By the configuration and the command in the global attributes of a result; False where they state neither."""
    tree = yaml.safe_load(str(attributes.get(CONFIG_ATTRIBUTE, ""))) or {}
    accelerated = (tree.get("equilibrium") or {}).get("acceleration") is not None
    return accelerated and attributes.get("oceanbox_command") == "equilibrate"
