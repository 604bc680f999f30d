"""A fresh-water flux adds up to nothing over the basin, or is refused."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from oceanbox.config.fields import Band, FieldSpec, Linear, SumOfFields
from oceanbox.config.surface import FreshWater
from oceanbox.constants import SECONDS_PER_YEAR
from oceanbox.errors import ConfigError
from oceanbox.forcing import balanced, fresh_water_flux
from oceanbox.forcing.fresh_water import summation_round_off
from tests.forcing.places import Array, Places, areas, centres

PLACES = centres()
AREA = areas(PLACES)
RAIN = Band(peak=4.0, from_deg=30.0, to_deg=44.0)


def flux_of(field: FieldSpec, places: Places = PLACES, **settings: object) -> Array:
    setting = FreshWater(precipitation_minus_evaporation_m_per_year=field, **settings)  # type: ignore[arg-type]
    place = places
    return fresh_water_flux(setting, place.latitude, place.longitude, place.y, place.x, place.walls, areas(places))


@given(st.sampled_from(["uniform", "band"]), st.floats(-50.0, 50.0), st.floats(-1.0, 1.0), st.integers(8, 50))
def test_a_balanced_flux_adds_up_to_zero_to_round_off(balance: str, peak: float, slope: float, ny: int) -> None:
    places = centres(ny=ny)
    field = SumOfFields(
        sum=(Band(peak=peak, from_deg=20.0, to_deg=44.0), Linear(value_at_origin=0.3, slope_per_deg=slope))
    )
    before = places.map_of(field, "m year-1") / SECONDS_PER_YEAR
    flux = flux_of(field, places, balance=balance)
    # the compensation is right to the round-off of the sum it is made of; the result is summed once more
    bound = summation_round_off(before, areas(places)) + 3.0 * summation_round_off(flux, areas(places))
    assert abs(np.sum(flux * areas(places))) <= bound


def test_uniform_balance_takes_the_same_from_every_cell() -> None:
    taken = PLACES.map_of(RAIN) / SECONDS_PER_YEAR - flux_of(RAIN, balance="uniform")
    mean = np.sum(PLACES.map_of(RAIN) * AREA) / np.sum(AREA) / SECONDS_PER_YEAR
    assert taken == pytest.approx(np.full_like(taken, mean), rel=1e-12)


def test_band_balance_takes_only_from_the_band() -> None:
    taken = PLACES.map_of(RAIN) / SECONDS_PER_YEAR - flux_of(RAIN, balance="band", balance_band_deg=(12.0, 28.0))
    distance = np.abs(PLACES.latitude)
    inside = (distance > 12.0) & (distance < 28.0)
    assert np.all(taken[inside] > 0.0)
    assert np.all(taken[~inside] == 0.0)
    assert np.any(PLACES.latitude[inside] < 0.0) and np.any(PLACES.latitude[inside] > 0.0)


def test_a_flux_is_in_metres_per_second() -> None:
    area = np.ones((2, 1))
    setting = FreshWater(precipitation_minus_evaporation_m_per_year=Linear(value_at_origin=0.0, slope_per_deg=1.0))
    latitude = np.array([-2.0, 2.0])
    flux = fresh_water_flux(setting, latitude, np.zeros(1), latitude, np.zeros(1), (-4.0, 4.0), area)
    assert flux[:, 0] == pytest.approx([-2.0 / (365.25 * 86400.0), 2.0 / (365.25 * 86400.0)], rel=1e-15)


def test_a_net_flux_is_refused_with_its_size_and_the_remedy() -> None:
    net = np.sum(PLACES.map_of(RAIN) * AREA) / SECONDS_PER_YEAR
    mean = np.sum(PLACES.map_of(RAIN) * AREA) / np.sum(AREA)
    with pytest.raises(ConfigError) as caught:
        flux_of(RAIN)
    assert str(caught.value) == (
        f"surface.fresh_water.balance: got refuse, with a net flux of {net:.4g} m3 s-1 "
        f"({mean:.4g} m/year averaged over the basin); "
        "a net flux of fresh water must be zero, or the salinity drifts for ever; "
        "set balance to uniform or band, or add a field that makes the sum zero"
    )


def test_round_off_alone_is_not_refused_and_a_real_imbalance_is() -> None:
    setting = FreshWater()
    values = np.random.default_rng(1).standard_normal(AREA.shape)
    flux = balanced(values, FreshWater(balance="uniform"), PLACES.latitude, AREA)
    assert balanced(flux, setting, PLACES.latitude, AREA) is flux
    flux[0, 0] += 10.0 * summation_round_off(flux, AREA) / AREA[0, 0]
    with pytest.raises(ConfigError, match="net flux"):
        balanced(flux, setting, PLACES.latitude, AREA)


def test_no_flux_is_no_flux() -> None:
    assert not np.any(flux_of(0.0))


def test_a_balance_band_without_a_cell_is_refused() -> None:
    with pytest.raises(ConfigError) as caught:
        flux_of(RAIN, balance="band", balance_band_deg=(60.0, 70.0))
    assert str(caught.value) == (
        "surface.fresh_water.balance_band_deg: got [60, 70], with no cell centre inside; "
        "the band must reach into the basin, rows from -34.62 to 43.62 degrees; move or widen the band"
    )
