"""The configuration: its schema, its loading from YAML, and its description in words."""

from oceanbox.config.identity import identity, resolved_yaml
from oceanbox.config.loading import LoadedConfig, Source, load, loads
from oceanbox.config.reference import json_schema, reference_keys, reference_text
from oceanbox.config.schema import Config

__all__ = [
    "Config",
    "LoadedConfig",
    "Source",
    "identity",
    "json_schema",
    "load",
    "loads",
    "reference_keys",
    "reference_text",
    "resolved_yaml",
]
