"""A changed copy is what a file with the change would have given."""

from typing import Any

import pytest

from oceanbox import config
from oceanbox.errors import ConfigError

BASE = config.loads("name: a")


@pytest.mark.parametrize(
    ("changes", "text"),
    [
        ({"surface.wind.ramp_days": 3}, "surface: {wind: {ramp_days: 3.0}}"),
        ({"basin.north_km": 10, "basin.south_km": -10}, "basin: {north_km: 10, south_km: -10}"),
        ({"transformation": None}, "transformation: null"),
        (
            {"transformation.efficiency": {"kind": "cooling", "scale_K": 9}},
            "transformation: {efficiency: {kind: cooling, scale_K: 9}}",
        ),
        (
            {"entrainment.diffusive.diffusivity_m2_per_s": 2e-5},
            "entrainment: {diffusive: {diffusivity_m2_per_s: 2e-5}}",
        ),
        ({"layers.0.initial_thickness_m": 99}, "layers: [{initial_thickness_m: 99}]"),
        ({"motion.sponge": {"sides": ["west"]}}, "motion: {sponge: {sides: [west]}}"),
        (
            {"surface.heat.restoring": {}, "surface.heat.restoring.coefficient_W_per_m2_K": 2},
            "surface: {heat: {restoring: {coefficient_W_per_m2_K: 2}}}",
        ),
    ],
)
def test_a_changed_copy_equals_a_file_with_the_change(changes: dict[str, Any], text: str) -> None:
    assert BASE.with_changes(changes) == config.loads(f"name: a\n{text}")


def test_one_item_of_a_sum_can_be_changed_and_the_original_stays() -> None:
    def with_bands(*peaks: float) -> config.Config:
        bands = [{"shape": "band", "peak": peak} for peak in peaks]
        return BASE.with_changes({"surface.wind.zonal_stress_N_per_m2": {"sum": bands}})

    original = with_bands(1.0, 2.0, 3.0)
    assert original.with_changes({"surface.wind.zonal_stress_N_per_m2.sum.1.peak": 9}) == with_bands(1.0, 9.0, 3.0)
    assert original == with_bands(1.0, 2.0, 3.0)


@pytest.mark.parametrize(
    ("changes", "lines"),
    [
        (
            {"surface.wind.ramp_day": 1, "basin.cells_x": 1},
            [
                "basin.cells_x: got 1; must be a whole number >= 4; give the number of cells from west to east",
                "surface.wind.ramp_day: got 1; no such key in surface.wind; did you mean 'ramp_days'?",
            ],
        ),
        (
            {"basin.width_km.value": 1},
            ["basin.width_km.value: got 6000.0; a value without keys below it; change the key above it as a whole"],
        ),
        (
            {"layers.1.initial_thickness_m": 1, "layers.1": {}},
            [
                "layers.1.initial_thickness_m: got 1; this list has items 0 to 0; give one of these numbers",
                "layers.1: got {}; this list has items 0 to 0; give one of these numbers",
            ],
        ),
        (
            {"basin.north_km": -6000.0},
            [
                "basin.north_km: got -6000 with south_km -5000; must be more than south_km; "
                "raise north_km or lower south_km"
            ],
        ),
    ],
)
def test_a_wrong_change_is_refused_like_a_wrong_file(changes: dict[str, Any], lines: list[str]) -> None:
    with pytest.raises(ConfigError) as caught:
        BASE.with_changes(changes)
    assert str(caught.value).splitlines() == lines


def test_a_configuration_cannot_be_changed_in_place() -> None:
    with pytest.raises(ValueError, match="frozen"):
        BASE.basin.width_km = 1.0
