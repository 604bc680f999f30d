"""The table of variables agrees with the public standards it uses."""

from __future__ import annotations

import xml.etree.ElementTree as ElementTree
from pathlib import Path

import cf_units
import compliance_checker
import pytest

from oceanbox import names

ENTRIES = [names.lookup(name) for name in names.all_names()]
COORDINATES = [names.coordinate(name) for name in names.coordinate_names()]
WITH_UNITS = [entry for entry in ENTRIES + COORDINATES if entry.units]


@pytest.fixture(scope="module")
def canonical_units() -> dict[str, str]:
    table = Path(compliance_checker.__file__).parent / "data" / "cf-standard-name-table.xml"
    entries = ElementTree.parse(table).getroot().findall("entry")
    return {e.attrib["id"]: e.findtext("canonical_units") or "1" for e in entries}


def test_every_unit_is_known_to_udunits_and_means_what_it_looks_like():
    """'Sv' would parse, as sievert; 'psu' would not."""
    for entry in WITH_UNITS:
        unit = cf_units.Unit(entry.units, calendar=names.CALENDAR if "since" in entry.units else None)
        assert not unit.is_unknown(), entry.name
        assert not {"Sv", "psu", "PW"} & set(entry.units.split()), entry.name


def test_every_standard_name_is_in_the_table_and_has_a_convertible_unit(canonical_units):
    for entry in ENTRIES + COORDINATES:
        if entry.standard_name in (None, "time", "region"):
            continue
        assert entry.standard_name in canonical_units, entry.name
        assert cf_units.Unit(entry.units).is_convertible(canonical_units[entry.standard_name]), entry.name


def test_every_temperature_says_whether_it_is_on_scale():
    temperatures = [e for e in ENTRIES if e.units in ("degC", "K")]
    assert {e.name for e in temperatures} >= {"temperature", "temperature_std", "cold_tongue_peak_deficit"}
    for entry in temperatures:
        kind = "on_scale" if entry.units == "degC" else "difference"
        assert dict(entry.attributes)["units_metadata"] == f"temperature: {kind}", entry.name


def test_names_are_unique():
    bases = [v.name for v in names.VARIABLES]
    assert len(set(bases)) == len(bases)
    assert not set(names.all_names()) & set(names.coordinate_names())


def test_every_scalar_has_a_series_and_a_deviation_and_every_budget_term_a_regional_integral():
    for name in names.in_group("scalar"):
        assert names.lookup(f"series_{name}").dims == ("time",)
        assert names.lookup(f"{name}_std").cell_methods == "window: standard_deviation"
    for group in ("volume_budget", "heat_budget", "salt_budget"):
        for name in names.in_group(group):
            term, integral = names.lookup(name), names.lookup(f"region_{name}")
            assert cf_units.Unit(term.units) * cf_units.Unit("m2") == cf_units.Unit(integral.units)


def test_a_series_exists_for_scalars_only():
    for name in ("series_thickness", "region_thickness", "heat_storage_std", "temperature_std_std"):
        with pytest.raises(KeyError):
            names.lookup(name)


def test_an_unknown_name_lists_its_neighbours():
    with pytest.raises(KeyError, match=r"'thicknes'.*thickness"):
        names.lookup("thicknes")


def test_a_mean_over_a_window_becomes_a_value_at_one_time():
    entry = names.at_one_time("velocity_x")
    assert entry.dims == ("time", "layer", "y", "x_face")
    assert entry.cell_methods == "time: point y: mean"


@pytest.mark.parametrize("name", ["temperature_std", "wind_stress_x", "series_heat_content"])
def test_what_has_no_meaning_at_one_time_is_refused(name):
    with pytest.raises(ValueError, match=name):
        names.at_one_time(name)
