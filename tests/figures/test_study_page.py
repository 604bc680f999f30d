"""Pages of studies as data: what is allowed, and how faults are told."""

from __future__ import annotations

import sys
from pathlib import Path
from subprocess import run
from typing import Any

import pytest

from oceanbox import names
from oceanbox.errors import ConfigError
from oceanbox.figures.study_page import StudyPage, axis_faults, load_study_page, study_pages
from oceanbox.figures.study_panels.words import LABELS, key_words, pretty, short_label, unit_of

KINDS = (
    "scalar_along_axis | scalar_against_scalar | scalar_map | equatorial_sections | latitude_lines | case_maps | "
    "budget_bars | case_series | branches | switches | sensitivity_bars"
)


def page_of(*panels: dict[str, Any], **page: Any) -> StudyPage:
    return study_pages([{"panels": list(panels), **page}], Path())[0]


def complaint_of(panel: dict[str, Any]) -> str:
    with pytest.raises(ConfigError) as caught:
        page_of(panel)
    return str(caught.value)


def test_every_kind_of_panel_has_defaults() -> None:
    page = page_of(*({"kind": kind} for kind in KINDS.split(" | ")))
    assert [panel.kind for panel in page.panels] == KINDS.split(" | ")


def test_an_unknown_kind_is_refused_with_the_kinds_there_are() -> None:
    text = complaint_of({"kind": "pie_chart"})
    assert text.startswith("pages.0.panels.0.kind: got 'pie_chart'")
    assert KINDS in text


@pytest.mark.parametrize(
    ("panel", "complaint"),
    [
        ({"scalars": ["thermocline_depth_equator_mea"]}, "did you mean thermocline_depth_equator_mean"),
        ({"scalars": ["cold_tongue_area", "tropical_heat_gain"]}, "must have one unit"),
        ({"scalars": ["cold_tongue_area"], "theory": "log_law"}, "needs one scalar, a thermocline depth"),
        ({"at": ["target"]}, "panels.0.at.0: got 'target'"),
        ({"kind": "scalar_against_scalar", "theory": "log_law"}, "needs x one of upwelling_ratio_tropics"),
        ({"kind": "scalar_against_scalar", "y": "depth"}, "panels.0.y: got depth"),
        ({"kind": "scalar_map", "lowest": 3.0, "highest": 1.0}, "must be greater than lowest"),
        ({"kind": "scalar_map", "x_axis": "a", "y_axis": "a"}, "must differ from x_axis"),
        ({"kind": "case_maps", "field": "velocity_x"}, "must be a map at cell centres"),
        ({"kind": "budget_bars", "terms": ["heat_mixing", "salt_mixing"]}, "must be of one budget"),
        ({"kind": "budget_bars", "regions": ["tropic"]}, "did you mean tropics?"),
        ({"kind": "case_series", "from_year": 9.0, "to_year": 3.0}, "must be greater than from_year"),
        ({"kind": "branches", "scalar": "nothing"}, "panels.0.scalar: got nothing"),
        ({"kind": "sensitivity_bars", "labels": [{"key": "a"}]}, "panels.0.labels.0.label: got nothing"),
    ],
)
def test_a_faulty_panel_is_refused_by_key(panel: dict[str, Any], complaint: str) -> None:
    assert complaint in complaint_of({"kind": "scalar_along_axis", **panel})


def test_all_faults_of_all_pages_are_told_at_once(tmp_path: Path) -> None:
    written = {"panels": [{"kind": "branches"}], "width": "triple"}
    (tmp_path / "page.yaml").write_text("name: maps\npanels:\n  - kind: nothing\n", encoding="utf-8")
    with pytest.raises(ConfigError) as caught:
        study_pages([written, "page.yaml", "absent.yaml", {"panels": []}], tmp_path)
    assert [fault.key for fault in caught.value.faults] == [
        "pages.0.width",
        "panels.0.kind",
        "pages.2",
        "pages.3.panels",
    ]
    assert caught.value.faults[1].location.endswith("page.yaml:3")


def test_pages_whose_files_would_overwrite_each_other_are_refused() -> None:
    page = {"panels": [{"kind": "branches"}]}
    with pytest.raises(ConfigError, match="the name study 2 times"):
        study_pages([page, page], Path())


def test_a_page_is_read_from_a_file_beside_the_study(tmp_path: Path) -> None:
    (tmp_path / "page.yaml").write_text("name: maps\npanels: [{kind: case_maps}]\n", encoding="utf-8")
    assert study_pages(["page.yaml"], tmp_path) == (load_study_page(tmp_path / "page.yaml"),)


def test_axes_that_the_study_does_not_have_are_found_before_it_runs() -> None:
    panels = (
        {"kind": "scalar_along_axis", "axis": "wind", "at": ["target=2"]},
        {"kind": "scalar_against_scalar", "coloured_by": "sun", "joined_along": "case_name"},
    )
    faults = axis_faults([page_of(*panels)], ["wind", "target"])
    assert [(fault.key, fault.value) for fault in faults] == [("pages.0.panels.1.coloured_by", "sun")]
    faults = axis_faults([page_of(*panels)], ["sun"])
    assert [fault.key for fault in faults] == ["pages.0.panels.0.axis", "pages.0.panels.0.at.0"]


def test_every_scalar_has_a_short_name_and_a_unit_to_be_drawn_in() -> None:
    for name in names.in_group("scalar"):
        assert name in LABELS
        unit = unit_of(name)
        assert unit.divisor > 0.0
        assert short_label(name).endswith(f"({unit.unit})" if unit.unit else LABELS[name])


def test_units_are_printed_with_raised_powers() -> None:
    assert pretty("W m-2 K-1") == "W m⁻² K⁻¹"
    assert (pretty("degC"), pretty("1"), pretty("m2 s-1")) == ("°C", "", "m² s⁻¹")
    assert unit_of("transformation_total") == (1e6, "Sv")
    assert unit_of("heat_imbalance") == (0.01, "%")


def test_keys_are_named_by_what_they_are_without_the_unit() -> None:
    assert key_words("motion.viscosity_m2_per_s") == "viscosity"
    assert key_words("entrainment.upwelling.shear_damping_per_day") == "shear damping"
    assert key_words("transformation.efficiency.scale_K") == "efficiency, scale"
    assert key_words("surface.wind.zonal_stress_N_per_m2.sum.0.peak") == "sum, peak"


def test_checking_a_page_needs_no_drawing_library() -> None:
    code = "import oceanbox.figures.study_page, sys; print([m for m in ('matplotlib', 'xarray') if m in sys.modules])"
    found = run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert found.stdout.strip() == "[]"
