"""Heat and water carried northward."""

from __future__ import annotations

import numpy as np
import pytest
import xarray as xr

from oceanbox.diagnostics.transports import (
    across_latitude,
    exchange_by_latitude,
    heat_transport_by_latitude,
    integral_south_of,
)
from oceanbox.errors import UnreadableResult
from tests.synthetic import synthetic_means

EPS = np.finfo(float).eps


@pytest.fixture(scope="module")
def means() -> xr.Dataset:
    return synthetic_means()


def test_both_northward_heat_transports_agree_to_round_off(means: xr.Dataset) -> None:
    """Each divergence is a difference of face fluxes: it errs by their round-off, and the errors add up."""
    found = heat_transport_by_latitude(means)
    carried = abs(means["heat_transport_y"]) + abs(means["heat_diffusion_y"])
    across = abs(means["heat_transport_x"]) + abs(means["heat_diffusion_x"])
    round_off = 4 * EPS * (float(carried.sum()) * 2.0e5 + float(across.sum()) * 2.5e5)
    difference = found["northward_heat_transport"] - found["northward_heat_transport_from_surface"]
    assert float(abs(difference).max()) < round_off
    assert float(abs(found["northward_heat_transport"]).max()) > 1e6 * round_off


def test_a_heat_leak_shows_as_the_difference_of_the_two_transports(means: xr.Dataset) -> None:
    leaking = means.copy()
    leaking["heat_storage"] = means["heat_storage"] + 1.0
    found = heat_transport_by_latitude(leaking)
    difference = found["northward_heat_transport"] - found["northward_heat_transport_from_surface"]
    south_wall_to = np.linspace(0.0, 1.0e7, 41) * 6.0e6
    np.testing.assert_allclose(difference, south_wall_to, rtol=1e-10, atol=1e4)


def test_no_heat_passes_a_wall(means: xr.Dataset) -> None:
    found = heat_transport_by_latitude(means)["northward_heat_transport"]
    assert found[0] == 0.0
    assert found[-1] == 0.0


def test_uniform_input_accumulates_linearly_from_the_southern_wall() -> None:
    area = np.full((4, 3), 2.0)
    np.testing.assert_array_equal(integral_south_of(np.full((4, 3), 5.0), area), [0, 30, 60, 90, 120])


def test_layers_are_summed_in_a_transport_across_a_latitude() -> None:
    dx = np.array([1.0, 2.0, 4.0])
    flux = np.ones((2, 5, 3))
    flux[1] *= 10
    np.testing.assert_array_equal(across_latitude(flux, dx), np.full(5, 77.0))
    np.testing.assert_array_equal(across_latitude(flux[0], dx), np.full(5, 7.0))


def test_overturning_carries_what_is_made_and_not_destroyed_or_stored(means: xr.Dataset) -> None:
    """Volume is conserved south of every latitude."""
    found = exchange_by_latitude(means)
    area = np.asarray(means["cell_area"])
    elsewhere = integral_south_of(np.asarray(means["outcrop_volume"] - means["volume_storage"]), area)
    expected = found["entrainment_south_of"] - found["transformation_south_of"] + elsewhere
    speed = abs(means["transport_x"]).sum() * 2.5e5 + abs(means["transport_y"]).sum() * 2.0e5
    assert float(abs(found["overturning"] - expected).max()) < 4 * EPS * float(speed)


def test_destruction_is_positive_and_grows_northward(means: xr.Dataset) -> None:
    found = exchange_by_latitude(means)
    for name in ("entrainment_south_of", "transformation_south_of"):
        assert (np.diff(found[name]) >= 0).all()
        assert float(found[name][-1]) > 1e7
        assert found[name].attrs["units"] == "m3 s-1"


def test_a_dataset_without_a_needed_variable_is_refused_by_name(means: xr.Dataset) -> None:
    with pytest.raises(UnreadableResult, match="outcrop_heat: got a dataset without it"):
        heat_transport_by_latitude(means.drop_vars("outcrop_heat"))
