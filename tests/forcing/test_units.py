"""Units of sources are converted as UDUNITS would, with water at its density as the one addition."""

import cf_units
import pytest

from oceanbox.constants import DAYS_PER_YEAR
from oceanbox.forcing.units import _TABLE, accepted, canonical, conversion

WITHOUT_MASS = {kind: [unit for unit in units if not unit.startswith("kg m-2")] for kind, units in _TABLE.items()}
PAIRS = [(one, other) for units in WITHOUT_MASS.values() for one in units for other in units]


@pytest.mark.parametrize(("unit", "wanted"), PAIRS)
def test_conversions_agree_with_udunits(unit: str, wanted: str) -> None:
    factors = conversion(unit, wanted)
    assert factors is not None
    scale, offset = factors
    # UDUNITS counts 365.242198781 days to a year, the model 365.25
    years = ("year-1" in unit) - ("year-1" in wanted)
    udunits = cf_units.Unit(unit)
    for value in (0.0, 17.3):
        expected = udunits.convert(value, cf_units.Unit(wanted)) * (365.242198781 / DAYS_PER_YEAR) ** years
        assert scale * value + offset == pytest.approx(expected, rel=1e-12, abs=1e-12)


def test_a_unit_is_converted_to_itself_without_touching_a_bit() -> None:
    for units in _TABLE.values():
        for unit in units:
            assert conversion(unit, unit) == (1.0, 0.0)


def test_a_mass_flux_of_rain_is_a_volume_flux_of_water() -> None:
    assert conversion("kg m-2 s-1", "m s-1") == (1.0e-3, 0.0)
    scale, _ = conversion("kg m-2 day-1", "m year-1") or (0.0, 0.0)
    assert scale == pytest.approx(0.36525, rel=1e-14)


@pytest.mark.parametrize(
    "spelling",
    ["N m-2", "N m^-2", "N m**-2", "N.m-2", "N*m-2", "N/m2", "N/m^2", "N / m**2", "newton m-2", "m-2 N", " N m-2 "],
)
def test_every_common_spelling_is_the_same_unit(spelling: str) -> None:
    assert canonical(spelling) == canonical("N m-2")
    assert cf_units.Unit(spelling.strip()) == cf_units.Unit("N m-2"), "UDUNITS reads this spelling so, too"


@pytest.mark.parametrize("spelling", ["degC", "degree_C", "degrees_Celsius", "celsius", "degree_celsius"])
def test_celsius_is_known_by_its_names(spelling: str) -> None:
    assert conversion(spelling, "K") == (1.0, 273.15)


def test_a_slash_divides_by_the_next_factor_alone() -> None:
    assert canonical("W/m2 K-1") == canonical("W m-2 K-1")
    assert canonical("W/m2/K") == canonical("W m-2 K-1")
    assert conversion("mm/day", "m/s") == conversion("mm day-1", "m s-1")


@pytest.mark.parametrize("unit", ["Pa s", "N", "W m-2", "", "1", "knots", "N m-2 ?", "0.001", "m2 s-2"])
def test_units_that_do_not_belong_together_are_not_converted(unit: str) -> None:
    assert conversion(unit, "N m-2") is None


def test_the_units_that_would_do_can_be_named() -> None:
    assert accepted("N/m2") == ("N m-2", "Pa", "dyne cm-2")
    assert accepted("parsec") == ()
