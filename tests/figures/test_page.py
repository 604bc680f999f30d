"""Pages as data: what is allowed, and how panels are laid out."""

from __future__ import annotations

import sys
from pathlib import Path
from subprocess import run

import pytest

from oceanbox.diagnostics import Geometry
from oceanbox.errors import ConfigError
from oceanbox.figures import Page, default_page, load_page, loads_page
from oceanbox.figures.options import EquatorialSection
from tests.synthetic import synthetic_means

KINDS = "thermocline_map | temperature_map | equatorial_section | heat_budget | exchange | approach"


def test_an_empty_file_is_the_default_page_of_six_panels() -> None:
    assert loads_page("") == Page()
    assert [panel.kind for panel in Page().panels] == KINDS.split(" | ")
    assert Page().size_mm()[0] == 183.0


def test_an_unknown_kind_is_refused_with_the_kinds_there_are() -> None:
    with pytest.raises(ConfigError) as caught:
        loads_page("columns: 1\npanels:\n  - kind: thermocline_map\n  - kind: pie_chart\n")
    text = str(caught.value)
    assert text.startswith("text:4: panels.1.kind: got 'pie_chart'")
    assert KINDS in text


@pytest.mark.parametrize(
    ("text", "complaint"),
    [
        ("width: triple", "width: got 'triple'; must be one of single | double"),
        ("colums: 2", "did you mean 'columns'?"),
        ("columns: 7", "columns: got 7"),
        ("panels: []", "panels: got []"),
        ("name: Über", "name: got 'Über'"),
        ("panels: [{kind: heat_budget, terms: [friction]}]", "panels.0.terms.0: got 'friction'"),
        ("panels: [{kind: heat_budget, terms: []}]", "panels.0.terms: got []"),
        ("panels: [{kind: temperature_map, coldest_degC: 9, warmest_degC: 9}]", "must be greater than coldest_degC"),
        ("panels: [{kind: exchange, shallowest_m: 9}]", "no such key"),
        ("panels: {", "must be one YAML document"),
    ],
)
def test_a_faulty_page_is_refused_by_key(text: str, complaint: str) -> None:
    with pytest.raises(ConfigError) as caught:
        loads_page(text)
    assert complaint in str(caught.value)


def test_all_faults_of_a_page_are_told_at_once() -> None:
    with pytest.raises(ConfigError) as caught:
        loads_page("width: triple\nletters: greek\nheight_mm: 3\n")
    assert len(caught.value.faults) == 3


def test_a_page_is_read_from_a_file_and_its_faults_name_file_and_line(tmp_path: Path) -> None:
    file = tmp_path / "page.yaml"
    file.write_text("name: maps\ncolumns: 1\npanels: [{kind: temperature_map}]\n", encoding="utf-8")
    assert load_page(file).name == "maps"
    file.write_text("name: maps\ncolumns: none\n", encoding="utf-8")
    with pytest.raises(ConfigError, match=r"page\.yaml:2: columns: got 'none'"):
        load_page(file)
    with pytest.raises(ConfigError, match="absent"):
        load_page(tmp_path / "absent.yaml")


def test_panels_fill_rows_and_a_wide_one_opens_the_next() -> None:
    page = loads_page(
        "columns: 3\npanels: [{kind: exchange}, {kind: exchange, span_columns: 3, relative_height: 2},"
        " {kind: exchange}, {kind: exchange, span_columns: 2, relative_height: 0.5}]"
    )
    assert page.rows() == ((0,), (1,), (2, 3))
    assert page.row_heights() == (1.0, 2.0, 1.0)
    assert page.size_mm() == (183.0, 4 * 62.0)


def test_a_panel_wider_than_the_page_takes_the_whole_width() -> None:
    page = loads_page("columns: 2\npanels: [{kind: exchange, span_columns: 5}]")
    assert page.span(0) == 2
    assert page.rows() == ((0,),)


def test_widths_are_those_of_journal_columns_or_given() -> None:
    assert loads_page("width: single").size_mm()[0] == 89.0
    assert loads_page("width_mm: 120\nheight_mm: 80").size_mm() == (120.0, 80.0)


def test_letters_count_the_panels() -> None:
    assert [Page().letter(index) for index in (0, 1, 25, 26)] == ["a", "b", "z", "aa"]
    assert Page(letters="upper").letter(2) == "C"
    assert Page(letters="none").letter(2) == ""


def test_the_default_page_leaves_out_an_equator_that_is_not_there() -> None:
    means = synthetic_means()
    assert default_page(means) == Page()
    f_plane = means.assign(coriolis=0 * means["coriolis"] + 1e-4)
    assert not Geometry.of(f_plane).rows_near_equator(2.0).any()
    kinds = [type(panel) for panel in default_page(f_plane).panels]
    assert len(kinds) == 5
    assert EquatorialSection not in kinds


def test_checking_a_page_needs_no_drawing_library() -> None:
    code = "import oceanbox.figures, sys; print([m for m in ('matplotlib', 'xarray', 'numba') if m in sys.modules])"
    found = run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert found.stdout.strip() == "[]"
