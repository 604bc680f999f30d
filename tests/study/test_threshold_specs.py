"""What the threshold sections of a study file refuse, in words a user can act on."""

from __future__ import annotations

from typing import Any

import pytest

from oceanbox.config.validating import validate
from oceanbox.errors import ConfigError
from oceanbox.study.schema import Study

SWITCH = {"name": "calm", "changes": {"surface.wind": None}}
RANGE = {"key": "a.b", "lowest": 1.0, "highest": 2.0}
REFUSED: list[tuple[dict[str, Any], str]] = [
    (
        {"branch": {"key": "a", "lowest": 3.0, "highest": 1.0}},
        "branch.highest: got 1 with lowest 3; must be more than lowest; swap the two; the way up always comes first",
    ),
    (
        {"branch": {"key": "a", "lowest": 0.0, "highest": 1.0, "steps": 10, "refine_to": 0.2}},
        "branch.refine_to: got 0.2 with steps of 0.1; must be less than one step; "
        "lower refine_to, or write null to leave jumps bracketed by one step",
    ),
    (
        {"branch": {"key": "a", "lowest": 0.0, "highest": 1.0, "measure": "heat_contents"}},
        "branch.measure: got heat_contents; must be a scalar of a result; did you mean heat_content or salt_content?",
    ),
    (
        {"switch": {"switches": [SWITCH], "measures": ["wave_speed"]}},
        "switch.measures.0: got wave_speed; must be a scalar of a result that is recorded as a series; take one of ",
    ),
    (
        {"switch": {"switches": [SWITCH, SWITCH]}},
        "switch.switches: got the name calm more than once; names must differ, also from start and control; "
        "rename one of them",
    ),
    (
        {"switch": {"switches": [SWITCH | {"changes": 3}]}},
        "switch.switches.0.changes: got 3; must be a mapping of keys, 1 or more; "
        "give the dotted keys that change at time zero and their new values, at least one",
    ),
    (
        {"switch": {"switches": [SWITCH], "duration_days": 100.0}},
        "switch.switches.0.series_interval_days: got 30 in a run of 100 days; must leave at least 8 points to fit; "
        "lengthen the run or shorten the interval",
    ),
    (
        {"sensitivity": {"kind": "sobol", "ranges": [RANGE, RANGE]}},
        "sensitivity.kind: got 'sobol'; must be one of elasticities | sobol_indices; choose one of these",
    ),
    (
        {"sensitivity": {"kind": "sobol_indices", "ranges": [RANGE, RANGE | {"key": "c"}], "base_samples": 24}},
        "sensitivity.base_samples: got 24; must be a power of two, for which the sample is balanced; take 16 or 32",
    ),
    (
        {"sensitivity": {"kind": "sobol_indices", "ranges": [RANGE, RANGE]}},
        "sensitivity.ranges: got a.b more than once; keys must differ; remove one of the ranges",
    ),
    (
        {
            "sensitivity": {
                "kind": "sobol_indices",
                "ranges": [RANGE, {"key": "c", "lowest": -1.0, "highest": 1.0, "scale": "logarithmic"}],
            }
        },
        "sensitivity.ranges.1.lowest: got -1 with scale logarithmic; must be > 0; raise it, or set scale to linear",
    ),
    (
        {"sensitivity": {"kind": "elasticities", "keys": ["a", "a"]}},
        "sensitivity.keys: got a more than once; keys must differ; remove one of them",
    ),
]


@pytest.mark.parametrize(("plan", "message"), REFUSED, ids=[message.split(":")[0] for _, message in REFUSED])
def test_a_wrong_section_is_refused_with_its_remedy(plan: dict[str, Any], message: str) -> None:
    with pytest.raises(ConfigError) as caught:
        validate(Study, {"name": "trial", "base": "base.yaml", **plan})
    assert str(caught.value).startswith(message)
    assert len(caught.value.faults) == 1


@pytest.mark.parametrize(
    "plan",
    [
        {"branch": {"key": "a", "lowest": 0.0, "highest": 1.0, "refine_to": 0.01}},
        {"switch": {"switches": [SWITCH]}},
        {"sensitivity": {"kind": "elasticities", "keys": ["a", "b"]}},
        {"sensitivity": {"kind": "sobol_indices", "ranges": [RANGE, RANGE | {"key": "c", "scale": "logarithmic"}]}},
    ],
)
def test_a_right_section_is_taken(plan: dict[str, Any]) -> None:
    (name,) = plan
    assert validate(Study, {"name": "trial", "base": "base.yaml", **plan}).plan == name
