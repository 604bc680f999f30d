"""Units of NetCDF sources: the few that surface forcing and initial states come in, in any common spelling."""

from __future__ import annotations

import re

from oceanbox.constants import (
    CELSIUS_ZERO_K,
    FRESH_WATER_DENSITY_KG_PER_M3,
    SECONDS_PER_DAY,
    SECONDS_PER_YEAR,
)

# kind -> unit -> (scale, offset): value in the kind's base unit = scale * value + offset
_TABLE: dict[str, dict[str, tuple[float, float]]] = {
    "stress": {"N m-2": (1.0, 0.0), "Pa": (1.0, 0.0), "dyne cm-2": (0.1, 0.0)},
    "heat flux": {"W m-2": (1.0, 0.0), "J m-2 s-1": (1.0, 0.0)},
    "heat flux per kelvin": {"W m-2 K-1": (1.0, 0.0), "W m-2 degC-1": (1.0, 0.0)},
    "temperature": {"degC": (1.0, CELSIUS_ZERO_K), "K": (1.0, 0.0)},
    "length": {"m": (1.0, 0.0), "km": (1.0e3, 0.0), "cm": (1.0e-2, 0.0)},
    "salinity": {"g kg-1": (1.0e-3, 0.0), "1e-3": (1.0e-3, 0.0), "kg kg-1": (1.0, 0.0)},
    # a mass flux counts as water at the density of rain, which is not a conversion UDUNITS would make
    "velocity": {
        "m s-1": (1.0, 0.0),
        "mm s-1": (1.0e-3, 0.0),
        "m day-1": (1.0 / SECONDS_PER_DAY, 0.0),
        "mm day-1": (1.0e-3 / SECONDS_PER_DAY, 0.0),
        "m year-1": (1.0 / SECONDS_PER_YEAR, 0.0),
        "mm year-1": (1.0e-3 / SECONDS_PER_YEAR, 0.0),
        "kg m-2 s-1": (1.0 / FRESH_WATER_DENSITY_KG_PER_M3, 0.0),
        "kg m-2 day-1": (1.0 / FRESH_WATER_DENSITY_KG_PER_M3 / SECONDS_PER_DAY, 0.0),
    },
}

_SPELLINGS = {
    "newton": "N",
    "newtons": "N",
    "pascal": "Pa",
    "pascals": "Pa",
    "watt": "W",
    "watts": "W",
    "dyn": "dyne",
    "dynes": "dyne",
    "celsius": "degC",
    "degree_C": "degC",
    "degrees_C": "degC",
    "degree_Celsius": "degC",
    "degrees_Celsius": "degC",
    "degree_celsius": "degC",
    "degrees_celsius": "degC",
    "kelvin": "K",
    "degK": "K",
    "metre": "m",
    "metres": "m",
    "meter": "m",
    "meters": "m",
    "kilometre": "km",
    "kilometres": "km",
    "kilometer": "km",
    "kilometers": "km",
    "sec": "s",
    "second": "s",
    "seconds": "s",
    "d": "day",
    "days": "day",
    "yr": "year",
    "years": "year",
}
_FACTOR = re.compile(r"(?P<name>[A-Za-z_]+|1e-3)(?:\*\*|\^)?(?P<power>[-+]?\d+)?")


def canonical(unit: str) -> frozenset[tuple[str, int]]:
    """A unit as its factors with their powers, whatever the spelling; empty where it cannot be read.

    Understands 'N m-2', 'N.m-2', 'N/m2', 'N m^-2', 'N m**-2', 'newton m-2'.
    """
    powers: dict[str, int] = {}
    sign = 1
    for piece in re.split(r"(/)|[\s.]+|(?<!\*)\*(?!\*)", unit.strip()):
        if piece == "/":
            sign = -1
        elif piece:
            factor = _FACTOR.fullmatch(piece)
            if factor is None:
                return frozenset()
            name = _SPELLINGS.get(factor["name"], factor["name"])
            powers[name] = powers.get(name, 0) + sign * int(factor["power"] or 1)
            sign = 1
    return frozenset((name, power) for name, power in powers.items() if power)


_BY_FACTORS = {
    canonical(unit): (kind, scale, offset) for kind, units in _TABLE.items() for unit, (scale, offset) in units.items()
}


def conversion(unit: str, wanted: str) -> tuple[float, float] | None:
    """Scale and offset that turn a number in `unit` into one in `wanted`; None where they do not belong together."""
    got, target = _BY_FACTORS.get(canonical(unit)), _BY_FACTORS.get(canonical(wanted))
    if got is None or target is None or got[0] != target[0]:
        return None
    if canonical(unit) == canonical(wanted):
        return 1.0, 0.0
    return got[1] / target[1], (got[2] - target[2]) / target[1]


def accepted(wanted: str) -> tuple[str, ...]:
    """The units that can be turned into `wanted`, in one spelling each."""
    target = _BY_FACTORS.get(canonical(wanted))
    return tuple(_TABLE[target[0]]) if target is not None else ()
