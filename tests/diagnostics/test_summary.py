"""The probe of a running model and the summary of a file."""

from __future__ import annotations

import time

import numpy as np
import pytest
import xarray as xr

from oceanbox import names
from oceanbox.diagnostics import Geometry, Probe, Reference, SampledScalars, summarise
from oceanbox.diagnostics.reference import CONFIG_ATTRIBUTE
from oceanbox.errors import UnreadableResult
from oceanbox.output import provenance
from tests.synthetic import synthetic_means, synthetic_result


@pytest.fixture(scope="module")
def result() -> xr.Dataset:
    return synthetic_result()


def test_the_probe_finds_what_the_summary_finds(result: xr.Dataset) -> None:
    probe = Probe(Geometry.of(result))
    found = probe(result["thickness"].values, result["temperature"].values)
    for name, value in found._asdict().items():
        assert float(result[name]) == value


def test_every_sampled_scalar_is_in_the_table_of_variables() -> None:
    assert set(SampledScalars._fields) <= set(names.in_group("scalar"))


def test_volume_is_thickness_times_area_over_all_layers(result: xr.Dataset) -> None:
    thickness = np.repeat(result["thickness"].values, 2, axis=0) * [[[0.25]], [[0.75]]]
    probe = Probe(Geometry.of(result))
    one = probe(result["thickness"].values, result["temperature"].values)
    two = probe(thickness, np.repeat(result["temperature"].values, 2, axis=0))
    assert one.warm_water_volume == pytest.approx(float(result["thickness"].sum()) * 5e10, rel=1e-13)
    assert two == pytest.approx(one, rel=1e-13)


def test_the_surface_is_the_top_layer(result: xr.Dataset) -> None:
    probe = Probe(Geometry.of(result))
    thickness = np.full((2, 40, 30), 80.0)
    temperature = np.stack([np.full((40, 30), 25.0), np.full((40, 30), 12.0)])
    temperature[0, :, 26:] = 21.0  # the eastern eighth is the last 3.75 columns
    found = probe(thickness, temperature)
    assert found.surface_temperature_equator_west == pytest.approx(25.0, rel=1e-14)
    assert found.surface_temperature_equator_east == pytest.approx(21.0, rel=1e-14)
    assert found.cold_tongue_peak_deficit == pytest.approx(4.0, rel=1e-13)


def test_probing_costs_less_than_a_millisecond() -> None:
    geometry = Geometry(np.linspace(0, 6e6, 201), np.linspace(-5e6, 5e6, 121))
    probe = Probe(geometry)
    thickness = np.full((1, 120, 200), 150.0)
    temperature = np.full((1, 120, 200), 25.0) - np.linspace(0, 5, 200)
    costs = []
    for _ in range(50):  # the least of many: other work on the machine only adds
        start = time.perf_counter()
        probe(thickness, temperature)
        costs.append(time.perf_counter() - start)
    assert min(costs) < 1e-3


def test_a_contrast_that_is_not_positive_is_refused() -> None:
    with pytest.raises(ValueError, match="contrast_K: got -1"):
        Probe(Geometry(np.linspace(0, 6e6, 9), np.linspace(-5e6, 5e6, 9)), contrast_K=-1)


def test_a_summary_holds_every_derived_variable_of_the_table(result: xr.Dataset) -> None:
    derived = [*names.in_group("scalar"), *names.in_group("latitude"), *names.in_group("region")]
    for name in derived:
        assert result[name].dims == names.lookup(name).dims
        assert result[name].attrs["units"] == names.lookup(name).units
        assert np.isfinite(result[name]).all()


def test_a_summary_leaves_its_input_alone() -> None:
    means = synthetic_means()
    before = means.copy(deep=True)
    summary = summarise(means)
    xr.testing.assert_identical(means, before)
    xr.testing.assert_identical(summary.drop_vars(set(summary.data_vars) - set(means.data_vars)), means)


def test_tropical_gain_is_the_surface_flux_of_the_tropics(result: xr.Dataset) -> None:
    tropics = result["region_surface_heat_flux"].sel(region="tropics")
    assert float(result["tropical_heat_gain"]) == pytest.approx(float(tropics), rel=1e-13)


def test_transports_at_the_northern_wall_are_the_totals(result: xr.Dataset) -> None:
    for what in ("entrainment", "transformation"):
        whole = float(result[f"{what}_south_of"][-1])
        assert whole == pytest.approx(float(result[f"{what}_total"]), rel=1e-13)


def test_reference_values_come_from_the_attribute_that_files_carry() -> None:
    assert CONFIG_ATTRIBUTE == provenance.CONFIG_ATTRIBUTE


@pytest.mark.parametrize(
    ("text", "complaint"),
    [
        (None, "got NoneType"),
        ("a: [", "not YAML"),
        ("water: {}", "without water.reference_density_kg_per_m3"),
        ("water: {reference_density_kg_per_m3: heavy}", "= 'heavy'; a number is needed"),
    ],
)
def test_a_file_without_a_usable_configuration_is_refused(text: str | None, complaint: str) -> None:
    attributes = {} if text is None else {CONFIG_ATTRIBUTE: text}
    with pytest.raises(UnreadableResult, match=complaint):
        Reference.from_attributes(attributes)
