"""A study that cannot be run is refused before anything runs, each fault at its file and line."""

from __future__ import annotations

from pathlib import Path

import pytest

from oceanbox.errors import ConfigError
from oceanbox.study.loading import check_cases, load_study
from tests.study.oceans import TINY

HEAD = "name: trial\nbase: tiny.yaml\ncommand: evolve\n"  # three lines


def refused(tmp_path: Path, text: str) -> list[str]:
    """The faults of a study file, one line each, without the folder."""
    (tmp_path / "tiny.yaml").write_text(TINY, encoding="utf-8")
    path = tmp_path / "study.yaml"
    path.write_text(text, encoding="utf-8")
    with pytest.raises(ConfigError) as caught:
        loaded = load_study(path)
        check_cases(loaded, loaded.cases)
    return [str(fault).replace(f"{tmp_path}/", "") for fault in caught.value.faults]


@pytest.mark.parametrize(
    ("text", "line", "words"),
    [
        ("axis: []\n", 4, "did you mean 'axes'?"),
        ("axes: []\n", 4, "must have one item or more"),
        ("axes:\n  - {name: a, key: basin.cells_q, values: [20, 30]}\n", 5, "did you mean 'cells_"),
        ("axes:\n  - {name: a, key: basin.cells_x, values: [2, 30]}\n", 5, "must be a whole number >= 4"),
        ("axes:\n  - {name: a, key: basin.cells_x, values: [20, 20]}\n", 5, "each value once"),
        ("axes:\n  - {name: a, key: basin.cells_x}\n", 5, "exactly one of values, linear and logarithmic"),
        ("axes:\n  - {name: a, key: basin.cells_x, values: [true, false]}\n", 5, "need positions"),
        ("axes:\n  - {name: status, key: basin.cells_x, values: [20, 21]}\n", 5, "is taken by the collected dataset"),
        ("axes:\n  - {name: a, key: basin.width_km, logarithmic: {first: 0.0, last: 1.0, count: 3}}\n", 5, "must be > 0"),
        ("changes: {basin.cells_q: 3}\ncases: [{name: a}]\n", 4, "did you mean 'cells_"),
        ("cases: [{name: a}, {name: a}]\n", 4, "names must differ"),
        ("cases:\n  - name: a\n    changes:\n      mixing.nothing: 3.0\n", 7, "no such key in mixing"),
        ("cases: [{name: a}]\nfields: [thermocline_deth]\n", 5, "did you mean thermocline_depth"),
        ("sample: {method: sobol, count: 6, ranges: [{key: basin.width_km, lowest: 1.0, highest: 2.0}]}\n", 4, "power of two"),
        ("cases: [{name: a}]\naxes: [{name: a, key: basin.cells_x, values: [20, 21]}]\n", 4, "exactly one of axes"),
    ],
)  # fmt: skip
def test_a_fault_is_told_with_its_line_and_what_is_allowed(tmp_path: Path, text: str, line: int, words: str) -> None:
    faults = refused(tmp_path, HEAD + text)
    assert any(fault.startswith(f"study.yaml:{line}: ") and words in fault for fault in faults), faults


@pytest.mark.parametrize(
    ("first", "second"),
    [
        ("basin.cells_x", "basin.cells_x"),
        ("surface.wind", "surface.wind.ramp_days"),
        ("surface.wind.ramp_days", "surface.wind"),
    ],
)
def test_a_key_that_is_varied_twice_is_refused(tmp_path: Path, first: str, second: str) -> None:
    axes = f"axes:\n  - {{name: a, key: {first}, values: [20, 21]}}\n  - {{name: b, key: {second}, values: [20, 21]}}\n"
    (fault,) = refused(tmp_path, HEAD + axes)
    assert fault.startswith("study.yaml:6: axes.1.key: got ") and "set already in axes.0.key" in fault
    (fault,) = refused(
        tmp_path, HEAD + f"changes: {{{first}: 20}}\naxes:\n  - {{name: b, key: {second}, values: [1, 2]}}\n"
    )
    assert fault.startswith("study.yaml:6: ") and "set already in changes" in fault
    (fault,) = refused(
        tmp_path, HEAD + f"changes: {{{first}: 20}}\ncases:\n  - name: a\n    changes: {{{second}: 3}}\n"
    )
    assert fault.startswith("study.yaml:7: ") and "may be set only once" in fault


def test_names_that_start_alike_do_not_overlap(tmp_path: Path) -> None:
    (tmp_path / "tiny.yaml").write_text(TINY, encoding="utf-8")
    path = tmp_path / "study.yaml"
    path.write_text(
        HEAD + "axes:\n  - {name: a, key: numerics.step_s, values: [1000.0, 2000.0]}\n"
        "  - {name: b, key: numerics.step_safety, values: [0.5, 0.6]}\n"
        "  - {name: c, key: entrainment.upwelling, values: [null, {}], positions: [off, on]}\n"
    )
    assert len(load_study(path).cases) == 8


def test_a_rule_between_keys_that_only_some_cases_break_names_the_case(tmp_path: Path) -> None:
    faults = refused(tmp_path, HEAD + "axes:\n  - {name: north, key: basin.north_km, values: [900.0, -900.0]}\n")
    assert len(faults) == 1
    assert faults[0].startswith("study.yaml:5: basin.north_km: ") and "in case north=-900" in faults[0]


def test_a_case_that_no_run_would_take_is_refused_at_the_key_that_makes_it_so(tmp_path: Path) -> None:
    # a target below the abyss's 5 degC is a rule about the whole configuration, looked at only before a run
    key = "surface.heat.restoring.target_temperature_degC"
    faults = refused(tmp_path, HEAD + f"axes:\n  - {{name: target, key: {key}, values: [20.0, 2.0]}}\n")
    assert len(faults) == 1
    assert faults[0].startswith(f"study.yaml:5: {key}: ") and "in case target=2" in faults[0]


def test_a_rule_that_a_key_of_the_base_breaks_is_told_at_the_line_of_the_base(tmp_path: Path) -> None:
    # in a basin this wide the wind of the base would lay the ocean bare
    faults = refused(tmp_path, HEAD + "axes:\n  - {name: width, key: basin.width_km, values: [1200.0, 60000.0]}\n")
    assert any(
        fault.startswith("tiny.yaml:7: surface.wind.zonal_stress_N_per_m2: ") and "in case width=60000" in fault
        for fault in faults
    ), faults


def test_a_base_that_is_not_there_is_answered_with_the_nearest_name(tmp_path: Path) -> None:
    (fault,) = refused(tmp_path, "name: a\nbase: tinny.yaml\ncases: [{name: a}]\n")
    assert fault.startswith("study.yaml:2: base: ") and "did you mean 'tiny.yaml'?" in fault
