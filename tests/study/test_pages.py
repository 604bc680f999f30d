"""The pages of a study are checked with the study and drawn when it has run."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest

from oceanbox.errors import ConfigError
from oceanbox.study.collecting import collect
from oceanbox.study.executing import execute
from oceanbox.study.loading import load_study
from oceanbox.study.run import run_study
from tests.study.oceans import TARGET, TARGETS, HereEngine, study_of, write_study

PAGE: dict[str, Any] = {"name": "depths", "panels": [{"kind": "scalar_along_axis", "axis": "target"}]}


def faults(folder: Path, plan: dict[str, Any]) -> list[str]:
    path = write_study(folder, plan)
    with pytest.raises(ConfigError) as caught:
        load_study(path)
    return [str(fault).replace(f"{folder}/", "") for fault in caught.value.faults]


def test_a_fault_in_a_page_is_told_at_its_line_before_anything_runs(tmp_path: Path) -> None:
    (fault,) = faults(tmp_path, {"cases": [{"name": "a"}], "pages": [{"panels": [{"kind": "no_such_panel"}]}]})
    assert fault.startswith("study.yaml:8: pages.0.panels.0.kind: got 'no_such_panel'")


def test_a_panel_that_names_no_axis_of_the_study_is_refused(tmp_path: Path) -> None:
    wind = PAGE | {"panels": [{"kind": "scalar_along_axis", "axis": "wind"}]}
    (fault,) = faults(tmp_path, {"axes": [TARGETS], "pages": [wind]})
    assert "pages.0.panels.0.axis: got wind; must be an axis of the study: target" in fault
    assert fault.startswith("study.yaml:")


def test_a_sampled_key_is_an_axis_by_its_short_name(tmp_path: Path) -> None:
    ranges = [{"key": TARGET, "lowest": 15.0, "highest": 25.0}]
    page = PAGE | {"panels": [{"kind": "scalar_along_axis", "axis": "target_temperature_degC"}]}
    loaded = study_of(tmp_path, {"sample": {"count": 2, "ranges": ranges}, "pages": [page]})
    assert [page.name for page in loaded.pages] == ["depths"]
    assert "target_temperature_degC" in collect(loaded.study, loaded.cases, tmp_path).coords


def test_the_pages_of_a_study_are_drawn_with_their_captions(tmp_path: Path) -> None:
    loaded = study_of(tmp_path, {"axes": [TARGETS], "pages": [PAGE]})
    execute(loaded.cases, tmp_path / "into", HereEngine())
    outcome = run_study(tmp_path / "study.yaml", tmp_path / "into", workers=1)
    drawn = [path for path in outcome.paths if path.parent.name == "figures"]
    assert {path.suffix for path in drawn} == {".pdf", ".png", ".txt"}
    assert all(path.stat().st_size > 0 for path in drawn)
