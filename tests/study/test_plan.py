"""What the cases of a study are."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from oceanbox.config import identity
from oceanbox.study.executing import nearest_done
from oceanbox.study.plan import Case, axis_points, sample_points
from oceanbox.study.schema import Axis, Sample
from tests.study.oceans import TARGET, TARGETS, WIND, study_of

RANGES = [
    {"key": TARGET, "lowest": 15.0, "highest": 25.0},
    {"key": "motion.viscosity_m2_per_s", "lowest": 1.0e4, "highest": 1.0e6, "scale": "logarithmic"},
]


def test_axes_multiply_and_the_last_runs_fastest(tmp_path: Path) -> None:
    wind = {"name": "wind", "key": WIND, "linear": {"first": -0.06, "last": -0.03, "count": 2}}
    cases = study_of(tmp_path, {"axes": [TARGETS, wind]}).cases
    assert [tuple(case.coordinates.values()) for case in cases] == [
        (target, stress) for target in (15.0, 20.0, 25.0) for stress in (-0.06, -0.03)
    ]
    for case in cases:
        assert case.config.surface.heat.restoring.target_temperature_degC == case.coordinates["target"]
        assert case.config.surface.wind.zonal_stress_N_per_m2 == case.coordinates["wind"]
        assert case.config.motion.viscosity_m2_per_s == 8.0e4


def test_keys_that_move_together_take_one_value_for_all_or_one_for_each() -> None:
    axis = Axis(name="cells", keys=("basin.cells_x", "basin.cells_y"), values=(20, [30, 40]), positions=("few", "many"))
    few, many = axis_points(axis)
    assert few == ("few", {"basin.cells_x": 20, "basin.cells_y": 20})
    assert many == ("many", {"basin.cells_x": 30, "basin.cells_y": 40})


def test_a_logarithmic_axis_has_equal_ratios_and_both_its_ends() -> None:
    axis = Axis.model_validate({"name": "a", "key": "k", "logarithmic": {"first": 1.0e3, "last": 1.0e5, "count": 5}})
    values = [point.position for point in axis_points(axis)]
    assert values[0] == 1.0e3 and values[-1] == 1.0e5
    assert np.diff(np.log(values)) == pytest.approx(np.log(10.0) / 2.0, rel=1e-12)


@pytest.mark.parametrize("method", ["latin_hypercube", "sobol"])
def test_a_sample_puts_one_point_in_each_of_count_equal_slices_of_every_range(method: str) -> None:
    """True of a Latin hypercube by construction, and of 2^k points of a scrambled Sobol' sequence, a (t, m, s) net."""
    sample = Sample.model_validate({"method": method, "count": 16, "seed": 3, "ranges": RANGES})
    points = sample_points(sample)
    shares = [
        [(point[TARGET] - 15.0) / 10.0 for point in points],
        [np.log10(point["motion.viscosity_m2_per_s"] / 1.0e4) / 2.0 for point in points],
    ]
    for share in shares:
        assert sorted(np.floor(np.array(share) * 16).astype(int)) == list(range(16))


def test_a_sample_is_set_by_its_seed() -> None:
    def points(seed: int) -> list[dict[str, float]]:
        return sample_points(Sample.model_validate({"count": 8, "seed": seed, "ranges": RANGES}))

    assert points(1) == points(1)
    assert points(1) != points(2)


def test_changes_hold_for_all_cases(tmp_path: Path) -> None:
    plan = {"changes": {"motion.viscosity_m2_per_s": 9.0e4}, "axes": [TARGETS]}
    assert {case.config.motion.viscosity_m2_per_s for case in study_of(tmp_path, plan).cases} == {9.0e4}


def test_the_identity_of_a_case_tells_where_it_starts_from(tmp_path: Path) -> None:
    one, other, _ = study_of(tmp_path, {"axes": [TARGETS]}).cases
    after = [Case(0, "x", {}, {}, one.config, "evolve", start=start) for start in (None, one, other)]
    assert len({case.identity for case in after}) == 3
    assert after[0].identity == one.identity
    assert len({identity(case.config) for case in after}) == 1


def test_the_nearest_case_is_the_one_that_differs_least_on_the_scale_of_the_study(tmp_path: Path) -> None:
    # 1 K of 10 K is nearer than 0.02 N m-2 of 0.03 N m-2, though the number is larger
    wind = {"name": "wind", "key": WIND, "values": [-0.06, -0.05, -0.03]}
    targets = TARGETS | {"values": [15.0, 16.0, 25.0]}
    cases = study_of(tmp_path, {"axes": [targets, wind]}).cases
    by_place = {tuple(case.coordinates.values()): case for case in cases}
    done = [by_place[25.0, -0.06], by_place[16.0, -0.05], by_place[15.0, -0.03]]
    assert nearest_done(by_place[15.0, -0.05], done, cases) is by_place[16.0, -0.05]
    assert nearest_done(by_place[15.0, -0.06], [], cases) is None
