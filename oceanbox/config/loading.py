"""From a YAML file to a checked configuration, with every fault at its file and line."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from oceanbox.config.extending import extended, read_extended
from oceanbox.config.fields import FileField
from oceanbox.config.schema import Config
from oceanbox.config.section import Section
from oceanbox.config.validating import validate
from oceanbox.config.yaml_tree import Node, plain
from oceanbox.errors import ConfigError, Fault


@dataclass(frozen=True)
class Source:
    """Where the values of a configuration were written."""

    tree: Node

    def locate(self, dotted_key: str) -> str:
        """The 'file:line' of a key; of the nearest mapping above it where the key was left to its default."""
        node = self.tree
        for part in dotted_key.split(".") if dotted_key else ():
            child = _child(node, part)
            if child is None:
                break
            node = child
        return node.location


@dataclass(frozen=True)
class LoadedConfig:
    """A checked configuration and where its values stand."""

    config: Config
    source: Source


def load(path: str | Path) -> LoadedConfig:
    """Read, extend and check a YAML file.

    Raises ConfigError with one located fault for each thing wrong, in the order of the lines.
    """
    faults: list[Fault] = []
    return _checked(read_extended(Path(path), faults), faults)


def loads(text: str, *, folder: Path | None = None) -> Config:
    """Check a YAML text; `folder` is where its relative paths start, None to refuse `extends`.

    Raises ConfigError like `load`; locations begin with 'text'.
    """
    faults: list[Fault] = []
    return _checked(extended(text, "text", folder, (), faults), faults).config


def _checked(tree: Node | None, faults: list[Fault]) -> LoadedConfig:
    """Check a tree; `faults` are those found while reading it."""
    if tree is None:
        raise ConfigError(faults)
    source = Source(tree)
    try:
        config = validate(Config, plain(tree))
    except ConfigError as error:
        raise ConfigError(_sorted([*faults, *error.located(source.locate).faults])) from None
    faults += [
        Fault(
            source.locate(key),
            key,
            item.file,
            "there is no such file",
            "mend the path, which starts at the folder of the YAML file",
        )
        for key, item in file_fields(config)
        if not Path(item.file).is_file()
    ]
    if faults:
        raise ConfigError(_sorted(faults))
    return LoadedConfig(config, source)


def file_fields(section: Section, prefix: str = "") -> list[tuple[str, FileField]]:
    """Every NetCDF source below a section, with the dotted key of its `file`."""
    found: list[tuple[str, FileField]] = []
    for name in type(section).model_fields:
        value = getattr(section, name)
        for index, item in enumerate(value if isinstance(value, tuple) else (value,)):
            key = f"{prefix}{name}.{index}" if isinstance(value, tuple) else f"{prefix}{name}"
            if isinstance(item, FileField):
                found.append((f"{key}.file", item))
            elif isinstance(item, Section):
                found += file_fields(item, f"{key}.")
    return found


def _child(node: Node, part: str) -> Node | None:
    if isinstance(node.value, dict):
        return node.value.get(part)
    if isinstance(node.value, list) and part.isdecimal() and int(part) < len(node.value):
        return node.value[int(part)]
    return None


def _sorted(faults: list[Fault]) -> list[Fault]:
    """Faults by file, then line; a stable order for faults of one line."""

    def place(fault: Fault) -> tuple[str, int]:
        file, _, line = fault.location.rpartition(":")
        return file, int(line)

    return sorted(faults, key=place)
