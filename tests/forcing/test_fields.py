"""Each kind of field takes the values its definition gives."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from oceanbox.config.fields import (
    Band,
    Cosine,
    FieldKind,
    FieldSpec,
    Gaussian,
    Linear,
    Points,
    SumOfFields,
    TropicsToPole,
)
from oceanbox.errors import ConfigError
from oceanbox.forcing import require_above, require_at_least
from tests.forcing.places import Places, centres


def at(field: float | FieldKind, *latitudes: float) -> list[float]:
    """The field at some latitudes [degrees]; the same in all columns, or the test fails."""
    rows = np.radians(latitudes) * 6.371e6
    values = Places(rows, np.array([0.0, 1.0e6, 3.0e6]), (-4.0e6, 5.0e6)).map_of(field)
    assert values.shape == (len(latitudes), 3)
    assert np.ptp(values, axis=1).max() == 0.0
    return list(values[:, 0])


def test_a_number_is_the_same_everywhere() -> None:
    assert np.array_equal(centres().map_of(-0.1), np.full((30, 12), -0.1))


def test_a_gaussian_falls_to_one_over_e_at_its_width() -> None:
    field = Gaussian(peak=2.0, centre_deg=5.0, width_deg=10.0, base=1.0)
    assert at(field, 5.0, 15.0, -5.0) == pytest.approx([3.0, 1.0 + 2.0 / np.e, 1.0 + 2.0 / np.e], rel=1e-14)


def test_tropics_to_pole_is_flat_then_half_a_cosine_then_flat() -> None:
    field = TropicsToPole(tropical=28.0, polar=6.0, flat_to_deg=8.0, pole_deg=40.0)
    assert at(field, 0.0, 7.0, -7.0) == [28.0, 28.0, 28.0]
    assert at(field, 41.0, -80.0) == [6.0, 6.0]
    assert at(field, 24.0, -24.0) == pytest.approx([17.0, 17.0], rel=1e-14), "half way at the mean"
    assert at(field, 16.0) == pytest.approx([6.0 + 11.0 * (1.0 + np.cos(np.pi / 4))], rel=1e-14)


def test_a_cosine_counts_half_waves_between_the_walls() -> None:
    places = Places(np.array([-4.0e6, 0.5e6, 5.0e6]), np.array([0.0]), (-4.0e6, 5.0e6))
    ends_and_middle = places.map_of(Cosine(amplitude=0.1))[:, 0]
    assert ends_and_middle == pytest.approx([0.1, 0.0, -0.1], abs=1e-17)
    whole = places.map_of(Cosine(amplitude=0.1, half_waves=2.0))[:, 0]
    assert whole == pytest.approx([0.1, -0.1, 0.1], abs=1e-16)
    shifted = places.map_of(Cosine(amplitude=0.1, phase_deg_of_basin=90.0))[:, 0]
    assert shifted == pytest.approx([0.0, -0.1, 0.0], abs=1e-16)


@pytest.mark.parametrize(
    ("hemispheres", "south", "north"), [("both", 4.0, 4.0), ("north", 0.0, 4.0), ("south", 4.0, 0.0)]
)
def test_a_band_is_a_sine_squared_bump_in_its_hemispheres(hemispheres: str, south: float, north: float) -> None:
    field = Band(peak=4.0, from_deg=30.0, to_deg=50.0, hemispheres=hemispheres)  # type: ignore[arg-type]
    assert at(field, -40.0, 40.0) == pytest.approx([south, north], rel=1e-14)
    assert at(field, -35.0, 45.0) == pytest.approx([south / 2, north / 2], rel=1e-14)
    assert at(field, 0.0, 29.9, -29.9, 50.1, -50.1) == [0.0] * 5


def test_a_line_rises_with_latitude() -> None:
    assert at(Linear(value_at_origin=3.0, slope_per_deg=-0.5), -10.0, 0.0, 10.0) == pytest.approx([8.0, 3.0, -2.0])


def test_points_are_joined_by_lines_and_constant_beyond_the_ends() -> None:
    field = Points(points=((-20.0, 1.0), (0.0, 3.0), (10.0, -1.0)))
    assert at(field, -60.0, -20.0, -10.0, 0.0, 5.0, 10.0, 70.0) == pytest.approx([1, 1, 2, 3, 1, -1, -1])


@given(st.lists(st.floats(-1.0e3, 1.0e3), min_size=1, max_size=4), st.floats(-80.0, 80.0))
def test_a_sum_is_the_sum_of_its_parts(numbers: list[float], latitude: float) -> None:
    parts: tuple[FieldSpec, ...] = (
        *numbers,
        Gaussian(peak=2.0, width_deg=10.0),
        SumOfFields(sum=(1.0, Linear(value_at_origin=1.0))),
    )
    values = [at(part, latitude)[0] for part in parts]
    alone, size = sum(values), sum(abs(value) for value in values)
    assert at(SumOfFields(sum=parts), latitude)[0] == pytest.approx(alone, abs=len(parts) * np.finfo(float).eps * size)


def test_a_map_belongs_to_its_caller() -> None:
    values = centres().map_of(Gaussian(peak=1.0, width_deg=10.0))
    values[0, 0] = 5.0  # a broadcast view would refuse, or change the whole row
    assert values[0, 1] != 5.0


def test_a_map_with_a_forbidden_value_is_refused_with_its_place() -> None:
    values = np.ones((3, 4))
    require_above(values, 0.0, "m", "layers.0.initial_thickness_m")
    values[2, 1] = 0.0
    require_at_least(values, 0.0, "m", "k")
    with pytest.raises(ConfigError) as caught:
        require_above(values, 0.0, "m", "layers.0.initial_thickness_m")
    assert str(caught.value) == (
        "layers.0.initial_thickness_m: got 0 in row 2, column 1 of the grid; must be > 0 m everywhere; "
        "change the field so that its smallest value is allowed"
    )
    values[0, 3] = -1.0
    with pytest.raises(ConfigError, match="got -1 in row 0, column 3 of the grid; must be >= 0 m everywhere"):
        require_at_least(values, 0.0, "m", "k")
    values = np.ones((3, 4))
    values[1, 1] = np.nan
    with pytest.raises(ConfigError, match="got nan in row 1, column 1"):
        require_at_least(values, 0.0, "m", "k")
