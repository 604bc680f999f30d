"""What stands on axes: short names of numbers, and the units that they are drawn in."""

from __future__ import annotations

import re
from types import MappingProxyType
from typing import Final, NamedTuple

from oceanbox import names
from oceanbox.diagnostics.theory_inputs import THEORY_INPUTS

__all__ = [
    "LABELS",
    "Drawn",
    "drawn",
    "field_label",
    "key_words",
    "label_of",
    "pretty",
    "short_label",
    "shown_name",
    "unit_of",
]


class Drawn(NamedTuple):
    """A unit as it is drawn: numbers of a file are divided by `divisor`."""

    divisor: float
    unit: str


# Powers of a thousand that leave numbers of an ocean basin between 0.1 and 1000.
_LARGE: Final = MappingProxyType(
    {
        "W": Drawn(1e15, "PW"),
        "m3 s-1": Drawn(1e6, "Sv"),
        "m3": Drawn(1e15, "10¹⁵ m³"),
        "m2": Drawn(1e12, "10¹² m²"),
        "J": Drawn(1e21, "10²¹ J"),
        "kg": Drawn(1e15, "10¹⁵ kg"),
        "kg s-1": Drawn(1e6, "10⁶ kg s⁻¹"),
    }
)
_BY_NAME: Final = MappingProxyType(
    {
        "cold_tongue_reach": Drawn(1e3, "km"),
        "equatorial_radius": Drawn(1e3, "km"),
        "heat_imbalance": Drawn(0.01, "%"),
        "exchange_imbalance": Drawn(0.01, "%"),
        "kinetic_energy": Drawn(1e18, "10¹⁸ J"),
    }
)
# Rates at which a layer gains volume or salt are micrometres per second and the like.
_EXCHANGES: Final = frozenset((*names.in_group("volume_budget"), *names.in_group("salt_budget")))
_SUPERSCRIPTS: Final = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")

LABELS: Final = MappingProxyType(
    {
        "thermocline_depth_equator_west": "Equatorial thermocline depth, west",
        "thermocline_depth_equator_east": "Equatorial thermocline depth, east",
        "thermocline_depth_equator_mean": "Equatorial thermocline depth",
        "equatorial_tilt": "Tilt of the equatorial thermocline",
        "thermocline_depth_basin_mean": "Basin-mean thermocline depth",
        "surface_temperature_equator_west": "Equatorial temperature, west",
        "surface_temperature_equator_east": "Equatorial temperature, east",
        "cold_tongue_area": "Cold-tongue area",
        "cold_tongue_reach": "Cold-tongue reach",
        "cold_tongue_mean_deficit": "Cold-tongue mean deficit",
        "cold_tongue_peak_deficit": "Cold-tongue peak deficit",
        "tropical_heat_gain": "Tropical heat gain",
        "total_heat_gain": "Total heat gain",
        "total_heat_loss": "Total heat loss",
        "applied_high_latitude_loss": "High-latitude heat loss",
        "heat_imbalance": "Heat imbalance",
        "entrainment_total": "Entrainment",
        "entrainment_upwelling_total": "Entrainment by upwelling",
        "entrainment_diffusive_total": "Entrainment by diffusion",
        "entrainment_shoaling_total": "Entrainment by shoaling",
        "entrainment_prescribed_total": "Prescribed entrainment",
        "transformation_total": "Warm water destroyed",
        "outcrop_total": "Outcropping warm water",
        "exchange_imbalance": "Exchange imbalance",
        "warm_water_volume": "Warm-water volume",
        "heat_content": "Heat content",
        "salt_content": "Salt content",
        "sverdrup_transport": "Sverdrup transport",
        "gyre_transport": "Gyre transport",
        "western_boundary_transport": "Western boundary transport",
        "kinetic_energy": "Kinetic energy",
        "wave_speed": "Wave speed",
        "equatorial_radius": "Equatorial radius",
        "upwelling_tropics": "Upwelling within 10°",
        "upwelling_basin": "Upwelling in the basin",
        "supply_tropics": "Upwelling from below, within 10°",
        "loss_to_abyss": "Warm water lost to the abyss",
        "upwelling_ratio_tropics": "Upwelled over supplied, within 10°",
        "upwelling_ratio_basin": "Upwelled over lost, whole basin",
        "advective_depth": "Advective depth scale",
        "diffusive_depth": "Diffusive depth scale",
    }
)
"""Short names of scalars and of what laws need; the long ones go into captions."""

_FIELDS: Final = MappingProxyType(
    {
        "thermocline_depth": "thermocline depth",
        "temperature": "surface temperature",
        "salinity": "surface salinity",
        "surface_heat_flux": "surface heat flux",
    }
)

# Parts of keys that name a unit: what follows the quantity.
_UNIT_PARTS: Final = "per m m2 m3 s kg g K K2 W N J Pa PW degC deg degree degrees day days year years h km mm"
# Last parts of keys that say nothing without the part before.
_GENERAL: Final = (
    "value scale peak base polar tropical amplitude centre width total rate time coefficient margin diffusivity"
)


def drawn(name: str, units: str) -> Drawn:
    """The unit in which a number is drawn.

    name   of the scalar, whatever it is called in the file with a prefix for series or regions
    units  in the file, UDUNITS
    """
    bare = name.removeprefix(names.SERIES_PREFIX).removesuffix(names.STD_SUFFIX)
    if units in ("m s-1", "kg m-2 s-1") and bare in _EXCHANGES:
        return Drawn(1e-6, f"10⁻⁶ {pretty(units)}")
    return _BY_NAME.get(bare) or _LARGE.get(units) or Drawn(1.0, pretty(units))


def unit_of(name: str) -> Drawn:
    """The unit in which a scalar, or a number that a law needs, is drawn."""
    units = THEORY_INPUTS[name].units if name in THEORY_INPUTS else names.lookup(name).units
    return drawn(name, units)


def pretty(units: str) -> str:
    """UDUNITS as they are printed: 'W m-2 K-1' is 'W m⁻² K⁻¹'; '' for pure numbers."""
    if units in ("", "1"):
        return ""
    words = {"degC": "°C", "day-1": "d⁻¹", "degrees_north": "°N", "degree": "°", "degrees": "°"}
    if units in words:
        return words[units]
    return re.sub(r"(?<=[A-Za-z])-?\d+", lambda power: power[0].translate(_SUPERSCRIPTS), units)


def short_label(name: str) -> str:
    """A scalar as it stands on an axis, with its unit."""
    return label_of(
        LABELS.get(name, names.lookup(name).long_name if name not in THEORY_INPUTS else name), unit_of(name)
    )


def field_label(name: str) -> str:
    """A map in a few words, without its unit."""
    words = _FIELDS.get(name, names.lookup(name).long_name)
    return words[:1].upper() + words[1:]


def label_of(words: str, unit: Drawn) -> str:
    """Words and unit as they stand on an axis."""
    return f"{words} ({unit.unit})" if unit.unit else words


def shown_name(name: str) -> str:
    """The name of a case or of a place on an axis as it is printed."""
    return name if "=" in name else name.replace("_", " ")


def key_words(key: str) -> str:
    """A dotted key in words: its last part without the unit, and the one before where that alone says little."""
    parts = [_without_unit(part) for part in key.split(".") if not part.isdecimal()]
    last = parts[-1]
    if last in _GENERAL.split() and len(parts) > 1:
        last = f"{parts[-2]}, {last}"
    return last.replace("_", " ")


def _without_unit(part: str) -> str:
    words = part.split("_")
    while len(words) > 1 and words[-1] in _UNIT_PARTS.split():
        words.pop()
    return "_".join(words)
