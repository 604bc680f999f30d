"""Every shipped study can be run: its file is sound and so is the configuration of each of its cases."""

from __future__ import annotations

from pathlib import Path

import pytest

from oceanbox.study.loading import check_cases, load_study

SCENARIOS = Path(__file__).parents[2] / "scenarios"


@pytest.mark.parametrize("path", sorted(SCENARIOS.glob("*.yaml")), ids=lambda path: path.stem)
def test_it_loads_and_its_cases_pass_every_check(path: Path) -> None:
    loaded = load_study(path)
    assert loaded.study.name == path.stem
    assert loaded.study.description
    assert len(loaded.cases) >= 2
    check_cases(loaded, (loaded.cases[0], loaded.cases[-1]))
