"""Equilibrium judged on window means, because a basin with eddies never stops moving.

Four measures, each to stay below its tolerance for some windows in a row:

- relative drift of the warm-water volume from one window mean to the next, per decade;
- the same of the heat content relative to the abyss;
- heat imbalance |net heat gain|/Int |Q| dA, the net including what the outcrop hands to the abyss;
- exchange imbalance |W_e - W_d|/W_e, W_d including the volume the outcrop hands over.
"""

import math
from dataclasses import dataclass

__all__ = ["Drift", "Tolerances", "WindowMeans", "drift_between", "held"]


@dataclass(frozen=True)
class WindowMeans:
    """Basin integrals of one window: mean volume [m3] and heat content [J], fluxes over the window."""

    volume: float
    heat_content: float
    net_heating: float  # W, surface flux and outcrop term
    absolute_heating: float  # W, Int |Q| dA of the window-mean map
    entrainment: float  # m3 s-1
    destruction: float  # m3 s-1, positive: transformation and outcrop


@dataclass(frozen=True)
class Drift:
    """The four measures of one window against the one before, all relative."""

    volume_per_decade: float
    heat_per_decade: float
    heat_imbalance: float
    exchange_imbalance: float


@dataclass(frozen=True)
class Tolerances:
    """The largest value of each measure that still counts as equilibrium."""

    volume_per_decade: float
    heat_per_decade: float
    heat_imbalance: float
    exchange_imbalance: float


def _relative(difference: float, size: float) -> float:
    """|difference|/size; nothing of nothing is no imbalance, something of nothing an infinite one."""
    if size > 0.0:
        return abs(difference) / size
    return 0.0 if difference == 0.0 else math.inf


def drift_between(before: WindowMeans, now: WindowMeans, window_years: float) -> Drift:
    """Measures of the window ``now`` against the one just ``before``; means lie one window apart."""
    decades = window_years / 10.0
    return Drift(
        volume_per_decade=_relative(now.volume - before.volume, abs(before.volume)) / decades,
        heat_per_decade=_relative(now.heat_content - before.heat_content, abs(before.heat_content)) / decades,
        heat_imbalance=_relative(now.net_heating, now.absolute_heating),
        exchange_imbalance=_relative(now.entrainment - now.destruction, now.entrainment),
    )


def held(drift: Drift, tolerances: Tolerances) -> dict[str, bool]:
    """Which measures are within their tolerance."""
    return {name: getattr(drift, name) <= getattr(tolerances, name) for name in Drift.__dataclass_fields__}
