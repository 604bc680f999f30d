"""A configuration as complete YAML, and its fingerprint."""

from __future__ import annotations

import hashlib
import json
from pathlib import Path
from typing import Any

import yaml

from oceanbox.config.loading import file_fields
from oceanbox.config.schema import Config
from oceanbox.config.yaml_tree import CoreDumper
from oceanbox.errors import ConfigError, Fault

_WITHOUT_EFFECT = {"name", "description"}


def resolved_yaml(config: Config) -> str:
    """The configuration with every key written out; `loads` turns it back into an equal one."""
    return yaml.dump(
        _listed(config.model_dump()), Dumper=CoreDumper, sort_keys=False, default_flow_style=False, width=110
    )


def identity(config: Config) -> str:
    """SHA-256 (hex) of everything that affects the result: all keys but name and description, and the contents,
    not the paths, of the files that fields are read from.

    Raises ConfigError where such a file cannot be read.
    """
    digests = {item.file: _digest(key, item.file) for key, item in file_fields(config)}
    content = _canonical(config.model_dump(exclude=_WITHOUT_EFFECT), digests)
    text = json.dumps(content, sort_keys=True, separators=(",", ":"), allow_nan=False)
    return hashlib.sha256(text.encode()).hexdigest()


def _digest(key: str, file: str) -> str:
    try:
        return hashlib.sha256(Path(file).read_bytes()).hexdigest()
    except OSError as error:
        fault = Fault(
            "", key, file, f"must be a readable file ({error.strerror})", "put the file back or mend the path"
        )
        raise ConfigError([fault]) from None


def _listed(value: Any) -> Any:
    """Tuples as lists, which is what YAML has."""
    if isinstance(value, dict):
        return {key: _listed(item) for key, item in value.items()}
    return [_listed(item) for item in value] if isinstance(value, list | tuple) else value


def _canonical(value: Any, digests: dict[str, str]) -> Any:
    """Equal configurations to equal trees: no negative zero, file contents in place of paths."""
    if isinstance(value, dict):
        return {key: _file_or(key, item, digests) for key, item in value.items()}
    if isinstance(value, list | tuple):
        return [_canonical(item, digests) for item in value]
    return value + 0.0 if isinstance(value, float) else value


def _file_or(key: str, value: Any, digests: dict[str, str]) -> Any:
    return digests[value] if key == "file" else _canonical(value, digests)
