"""Values that a diagnostic needs from the configuration of the run that wrote a file."""

# ruff: noqa: N815  (attributes are keys of the YAML file, whose ending is the unit)

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Literal

import yaml

from oceanbox.errors import UnreadableResult

__all__ = ["CONFIG_ATTRIBUTE", "Reference"]

CONFIG_ATTRIBUTE = "oceanbox_config"
"""Global attribute of a file that holds the whole resolved configuration of its run, as YAML."""


@dataclass(frozen=True)
class Reference:
    """What a file's fields are measured against; each value is the key of that name in the configuration."""

    reference_density_kg_per_m3: float
    heat_capacity_J_per_kg_K: float
    abyss_temperature_degC: float
    abyss_salinity_g_per_kg: float
    cold_tongue_contrast_K: float
    zonal_boundary: Literal["walls", "periodic"]

    @classmethod
    def from_attributes(cls, attributes: Mapping[Any, Any]) -> Reference:
        """Read from the resolved configuration among a file's global attributes.

        Raises UnreadableResult where the attribute is missing, is not YAML, or lacks a key.
        """
        config = _config(attributes)
        return cls(
            reference_density_kg_per_m3=_number(config, "water", "reference_density_kg_per_m3"),
            heat_capacity_J_per_kg_K=_number(config, "water", "heat_capacity_J_per_kg_K"),
            abyss_temperature_degC=_number(config, "water", "abyss_temperature_degC"),
            abyss_salinity_g_per_kg=_number(config, "water", "abyss_salinity_g_per_kg"),
            cold_tongue_contrast_K=_number(config, "output", "cold_tongue_contrast_K"),
            zonal_boundary=_zonal_boundary(config),
        )


def _config(attributes: Mapping[Any, Any]) -> Mapping[str, Any]:
    text = attributes.get(CONFIG_ATTRIBUTE)
    try:
        config = yaml.safe_load(text) if isinstance(text, str) else None
    except yaml.YAMLError as error:
        raise UnreadableResult(
            f"attribute {CONFIG_ATTRIBUTE}: got text that is not YAML ({error}); "
            "the resolved configuration of the run is needed; use the file as the run wrote it"
        ) from error
    if not isinstance(config, Mapping):
        raise UnreadableResult(
            f"attribute {CONFIG_ATTRIBUTE}: got {type(text).__name__}; the resolved configuration "
            "of the run is needed, as YAML; use the file as the run wrote it, or give the reference values"
        )
    return config


def _value(config: Mapping[str, Any], section: str, key: str) -> Any:
    try:
        return config[section][key]
    except (KeyError, TypeError):
        raise UnreadableResult(
            f"attribute {CONFIG_ATTRIBUTE}: got a configuration without {section}.{key}; it is needed here; "
            "use the resolved configuration, which has every key"
        ) from None


def _number(config: Mapping[str, Any], section: str, key: str) -> float:
    value = _value(config, section, key)
    if isinstance(value, bool) or not isinstance(value, int | float):
        raise UnreadableResult(
            f"attribute {CONFIG_ATTRIBUTE}: got {section}.{key} = {value!r}; a number is needed; "
            "use the resolved configuration as the run wrote it"
        )
    return float(value)


def _zonal_boundary(config: Mapping[str, Any]) -> Literal["walls", "periodic"]:
    value = _value(config, "basin", "zonal_boundary")
    if value not in ("walls", "periodic"):
        raise UnreadableResult(
            f"attribute {CONFIG_ATTRIBUTE}: got basin.zonal_boundary = {value!r}; "
            "walls or periodic is allowed; use the resolved configuration as the run wrote it"
        )
    return "periodic" if value == "periodic" else "walls"
