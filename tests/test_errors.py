"""Errors raised on purpose share one base, and a configuration error keeps its faults."""

import pytest

from oceanbox import errors
from oceanbox.errors import ConfigError, Fault, InterruptedRun, OceanboxError, UnstableRun


def test_the_tree_in_the_docstring_is_the_tree_of_the_classes() -> None:
    drawn = {line.strip("├└─ ").split()[0] for line in (errors.__doc__ or "").splitlines() if "──" in line}
    built = {kind.__name__ for kind in OceanboxError.__subclasses__()}
    assert drawn == built


def test_a_configuration_error_has_one_line_for_each_fault() -> None:
    faults = [
        Fault("run.yaml:3", "basin.width_km", "-1", "must be > 0", "give a width"),
        Fault("", "name", "nothing", "required", "add it"),
        Fault("run.yaml:1", "", "no mapping", "a mapping", "write keys"),
    ]
    assert str(ConfigError(faults)).splitlines() == [
        "run.yaml:3: basin.width_km: got -1; must be > 0; give a width",
        "name: got nothing; required; add it",
        "run.yaml:1: got no mapping; a mapping; write keys",
    ]


def test_only_faults_without_a_location_are_given_one() -> None:
    faults = [Fault("", "a.b", "1", "x", "y"), Fault("here:1", "c", "1", "x", "y")]
    located = ConfigError(faults).located(lambda key: f"file of {key}:9")
    assert [fault.location for fault in located.faults] == ["file of a.b:9", "here:1"]


def test_a_configuration_error_without_a_fault_cannot_be_made() -> None:
    with pytest.raises(ValueError, match="at least one"):
        ConfigError([])


def test_a_stopped_run_says_when_and_what_to_do() -> None:
    assert str(UnstableRun("thickness is -3 m in row 2", 12, 0.5, "halve step_safety")) == (
        "unstable at step 12 (day 0.50): thickness is -3 m in row 2; halve step_safety"
    )
    assert str(InterruptedRun(30.0, "run the same command again")) == (
        "interrupted at day 30.00; run the same command again"
    )
