"""Physical and calendar constants that no configuration can change, each with its unit and source.

Constants a user may want to vary (gravity, densities, expansion coefficients) are keys of the configuration.
"""

from __future__ import annotations

from typing import Final

EARTH_RADIUS_M: Final = 6.371e6
"""Mean radius of the earth [m], which turns distance from the origin into degrees.

Source: Moritz (2000), J. Geodesy 74, 128-133: mean radius 6371.0088 km, here to four digits.
"""

SECONDS_PER_DAY: Final = 86400.0
"""One day [s], by definition."""

DAYS_PER_YEAR: Final = 365.25
"""One model year [days]: the Julian year, so that ten years are a whole number of half-days."""

SECONDS_PER_YEAR: Final = DAYS_PER_YEAR * SECONDS_PER_DAY
"""One model year [s]."""

FRESH_WATER_DENSITY_KG_PER_M3: Final = 1000.0
"""Density of rain [kg m-3], turning a mass flux into a volume flux; rounded (999.97 at 4 degC)."""

CELSIUS_ZERO_K: Final = 273.15
"""Zero of the Celsius scale [K], by definition. Source: BIPM, The International System of Units, 9th edition."""

WATT_PER_PETAWATT: Final = 1.0e15
"""One petawatt [W], by definition."""

METRES_PER_KILOMETRE: Final = 1.0e3
"""One kilometre [m], by definition."""
