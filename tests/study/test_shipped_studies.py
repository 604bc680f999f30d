"""Every shipped study can be run: its file is sound, and on a few large cells for a few months it gives all its figures."""

from __future__ import annotations

import math
from contextlib import nullcontext
from functools import partial
from pathlib import Path
from typing import Any

import pytest
import xarray as xr
import yaml

from oceanbox.constants import DAYS_PER_YEAR
from oceanbox.figures.study_page import draw_study
from oceanbox.study.loading import check_cases, load_study
from oceanbox.study.run import run_study
from oceanbox.study.status import State
from tests.study.oceans import HereEngine

SCENARIOS = sorted((Path(__file__).parents[2] / "scenarios").glob("*.yaml"))
WINDOW_DAYS = 15.0
# 500 km x 313 km: just less than an equatorial radius; the viscosity makes the western boundary layer a cell wide.
SMALL = {
    "basin": {"cells_x": 12, "cells_y": 32},
    "motion": {"viscosity_m2_per_s": 3.0e6},
    "output": {"series_interval_days": WINDOW_DAYS / 3.0, "sample_interval_days": 1.0},
}
# Equilibrium is called after two windows, whatever the drift: what is tested is the way from a study file to its figures.
HASTY = {
    "equilibrium.window_years": WINDOW_DAYS / DAYS_PER_YEAR,
    "equilibrium.windows_in_a_row": 2,
    "equilibrium.longest_years": 1.0,
    "equilibrium.acceleration": None,
    "equilibrium.volume_drift_per_decade": 1e3,
    "equilibrium.heat_drift_per_decade": 1e3,
    "equilibrium.heat_imbalance": 1e3,
    "equilibrium.exchange_imbalance": 1e3,
}


def reduced(path: Path, folder: Path) -> Path:
    """The study on a small grid, for weeks; its plan, its measures and its pages are those that are shipped."""
    tree: dict[str, Any] = yaml.safe_load(path.read_text(encoding="utf-8"))
    base = {"extends": str((path.parent / tree["base"]).resolve()), "name": "small", **SMALL}
    (folder / "small.yaml").write_text(yaml.safe_dump(base), encoding="utf-8")
    tree["base"] = "small.yaml"
    tree["changes"] = tree.get("changes", {}) | HASTY
    for axis in (
        tree.get("axes", ()) if len(tree.get("axes", ())) > 1 else ()
    ):  # one axis stays whole: panels name its cases
        for items in ("values", "positions"):
            if len(axis.get(items, ())) > 3:
                axis[items] = axis[items][::3]
    if "switch" in tree:
        tree["switch"] |= {"duration_days": 120.0, "series_interval_days": 5.0}
        for switch in tree["switch"]["switches"]:
            switch.pop("duration_days", None)
    if "sensitivity" in tree:
        keys = tree["sensitivity"].get("keys", ())[:2]
        few = {"sobol_indices": {"base_samples": 2, "resamples": 100}, "elasticities": {"keys": keys}}
        tree["sensitivity"] |= few[tree["sensitivity"]["kind"]]
    study = folder / path.name
    study.write_text(yaml.safe_dump(tree, sort_keys=False), encoding="utf-8")
    return study


@pytest.mark.parametrize("path", SCENARIOS, ids=lambda path: path.stem)
def test_it_loads_and_its_cases_pass_every_check(path: Path) -> None:
    loaded = load_study(path)
    assert loaded.study.name == path.stem
    assert loaded.study.description
    assert len(loaded.cases) >= 2
    assert loaded.pages
    check_cases(loaded, (loaded.cases[0], loaded.cases[-1]))


@pytest.mark.parametrize("path", SCENARIOS, ids=lambda path: path.stem)
def test_in_small_it_runs_to_its_table_and_all_its_figures(
    path: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("oceanbox.study.run._engine", lambda *_: nullcontext(HereEngine()))
    monkeypatch.setattr("oceanbox.study.run.draw_study", partial(draw_study, formats=("png",)))
    study = reduced(path, tmp_path)
    loaded = load_study(study)
    outcome = run_study(study, tmp_path / "into")
    assert [status.state for status in outcome.statuses] == [State.DONE] * len(loaded.cases)
    assert outcome.unsettled == 0
    for page in loaded.pages:
        for ending in ("png", "txt"):
            assert (tmp_path / "into" / "figures" / f"{path.stem}_{page.name}.{ending}").stat().st_size > 100
    with xr.open_dataset(tmp_path / "into" / "collected.nc", decode_times=False) as collected:
        depths = collected["thermocline_depth_equator_mean"].values.ravel()
    assert depths.size >= len(loaded.cases) - 2 and all(math.isfinite(depth) for depth in depths)
    assert len({f"{depth:.6f}" for depth in depths}) > depths.size // 2  # what is varied makes a difference
    rows = (tmp_path / "into" / "scalars.csv").read_text(encoding="utf-8").splitlines()
    assert len([row for row in rows if not row.startswith("#")]) == depths.size + 1
