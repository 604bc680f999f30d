"""Files of studies: whole pages and their captions, the same each time, with nothing that touches."""

from __future__ import annotations

import itertools
import re
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from matplotlib import rc_context
from matplotlib.figure import Figure
from matplotlib.text import Text
from matplotlib.transforms import Bbox

from oceanbox.figures.study_page import StudyPage, draw_study
from oceanbox.figures.study_panels.axes import set_names
from oceanbox.figures.study_panels.caption import study_caption, study_name
from oceanbox.figures.study_panels.cases import StudyData
from oceanbox.figures.study_panels.drawing import compose_study, draw_study_panel
from oceanbox.figures.style import RC
from tests.figures.test_saving import text_boxes
from tests.figures.test_study_page import page_of

LETTER_POINTS = 8.0  # size of the letter of a panel, which is at least as wide as it is drawn
SMALL = {"name": "small", "width": "single", "columns": 1}
ALONG = {"kind": "scalar_along_axis"}
SECTIONS = {"kind": "equatorial_sections"}
MAPS = {"kind": "case_maps", "span_columns": 2}
BARS = {"kind": "budget_bars", "regions": ["tropics", "northern_high_latitudes"]}
LAW = {"kind": "scalar_along_axis", "axis": "target", "theory": "log_law"}
RATIO = {"kind": "scalar_against_scalar", "x": "upwelling_ratio_tropics", "x_scale": "logarithmic", "theory": "log_law"}

TURNED = {"kind": "scalar_map", "x_axis": "wind", "y_axis": "target"}
NAMED = {"kind": "equatorial_sections", "cases": ["target=2 wind=-0.03", "target=6 wind=-0.06"]}
HEAT = {"kind": "scalar_along_axis", "scalars": ["tropical_heat_gain", "applied_high_latitude_loss", "total_heat_loss"]}


def caption_of(study: StudyData, *panels: dict[str, Any]) -> str:
    return " ".join(study_caption(study, page_of(*panels)).split())


@pytest.fixture(scope="module")
def files(one_axis: StudyData, tmp_path_factory: pytest.TempPathFactory) -> list[Path]:
    pages = (page_of(ALONG, SECTIONS, **SMALL), page_of(ALONG, name="other", width_mm=120.0))
    return draw_study(
        one_axis.dataset, one_axis.folder, pages, tmp_path_factory.mktemp("figures"), ("pdf", "png", "svg")
    )


def test_files_are_named_after_study_and_page_each_with_its_caption(files: list[Path]) -> None:
    ends = [f"synthetic_axes_{page}.{end}" for page in ("small", "other") for end in ("pdf", "png", "svg", "txt")]
    assert [path.name for path in files] == ends
    assert all(path.stat().st_size > 300 for path in files)


def test_the_same_study_gives_the_same_bytes(one_axis: StudyData, files: list[Path], tmp_path: Path) -> None:
    pages = (page_of(ALONG, SECTIONS, **SMALL),)
    for path, before in zip(
        draw_study(one_axis.dataset, one_axis.folder, pages, tmp_path, ("pdf", "png", "svg")), files, strict=False
    ):
        assert path.read_bytes() == before.read_bytes()


def test_vector_files_hold_true_type_letters_and_text(files: list[Path]) -> None:
    pdf, svg = files[0].read_bytes(), files[2].read_text(encoding="utf-8")
    assert b"/FontFile2" in pdf
    assert not re.search(rb"/Type3\b", pdf)
    assert ">Polar target temperature (°C)</text>" in svg
    assert not re.search(r"<dc:date>|<image", svg)


def test_a_page_has_the_width_asked_for(files: list[Path]) -> None:
    widths = [int.from_bytes(path.read_bytes()[16:20], "big") for path in files if path.suffix == ".png"]
    assert widths == [int(89.0 / 25.4 * 300), int(120.0 / 25.4 * 300)]


def test_an_unknown_format_is_refused_before_anything_is_written(one_axis: StudyData, tmp_path: Path) -> None:
    with pytest.raises(ValueError, match="formats"):
        draw_study(one_axis.dataset, one_axis.folder, (page_of(ALONG),), tmp_path, ("gif",))  # type: ignore[arg-type]
    assert not list(tmp_path.iterdir())


def test_the_caption_counts_cases_and_says_what_became_of_them(one_axis: StudyData) -> None:
    text = caption_of(one_axis, ALONG, SECTIONS)
    assert "Study synthetic_axes: 4 cases, 3 with a result, 1 failed (crosses)" in text
    assert "1 of those with a result did not reach equilibrium (open marks)" in text
    assert "0123456789abcdef" * 4 in text
    assert "(a) Thermocline depth on the equator, mean over longitude, against polar target temperature." in text
    assert "(b) Thermocline depth along the equator" in text
    assert "Dashed: not in equilibrium." in text


def test_the_caption_states_the_law_its_parameters_and_its_misfit(two_axes: StudyData) -> None:
    text = caption_of(two_axes, LAW)
    assert "Dashed: the log law H_m + l ln(W_up/W_d), with W_up all water lifted" in text
    assert "H_m = 47.000 ± 0.000 m" in text
    assert "root-mean-square misfit < 0.01 m" in text
    both = caption_of(two_axes, RATIO | {"parameters": "both"})
    assert "Dotted: the same, with H_m and l as configured and nothing fitted: root-mean-square misfit" in both


def test_the_caption_says_where_a_law_could_not_be_had(one_axis: StudyData) -> None:
    assert "There is no log law: fewer than 3 cases in equilibrium" in caption_of(one_axis, LAW)


def test_the_caption_names_the_places_at_which_a_panel_stays(two_axes: StudyData) -> None:
    text = caption_of(two_axes, LAW | {"at": ["wind=-0.06"]})
    assert "At wind stress -0.06 N m⁻²." in text


def test_the_top_of_a_branch_counts_once_and_findings_are_told(branch: StudyData) -> None:
    text = caption_of(branch, {"kind": "branches"})
    assert "17 cases, 17 with a result" in text
    assert f"{branch.dataset.sizes['probe']} more run to bracket jumps" in text
    low, high = branch.dataset["jump_lower"].values[0], branch.dataset["jump_upper"].values[0]
    assert f"Arrows are jumps, in bands that bracket them: {low:.6g} to {high:.6g} on the way up" in text
    assert "Hysteresis: two states at least between" in text


def test_the_caption_states_times_with_their_errors_in_one_unit(switch: StudyData) -> None:
    text = caption_of(switch, {"kind": "switches"})
    assert re.search(r"Wind slack, e-folding time 1\d\d ± \d+ days", text)
    assert re.search(r"loss off, e-folding time 11\.\d+ ± 0\.\d+ years", text)
    assert "an equilibrium was not looked for in 3 of these" in text


def test_a_study_without_a_name_is_called_study(one_axis: StudyData) -> None:
    bare = StudyData(one_axis.dataset.drop_attrs(), one_axis.folder)
    assert study_name(bare) == "study"
    assert "identity not stated in the file" in caption_of(bare, ALONG)


def pages() -> dict[str, StudyPage]:
    return {
        "one_axis": page_of(ALONG, SECTIONS, MAPS, BARS, {"kind": "case_series"}, HEAT, columns=2),
        "two_axes": page_of(
            LAW, RATIO, {"kind": "scalar_map"}, {"kind": "case_maps", "maps_across": 3}, TURNED, NAMED, columns=2
        ),
        "narrow": page_of(LAW | {"at": ["wind=-0.03"]}, RATIO | {"parameters": "both"}, columns=3),
        "branch": page_of({"kind": "branches"}, **SMALL),
        "switch": page_of({"kind": "switches"}, columns=1),
        "indices": page_of({"kind": "sensitivity_bars"}, **SMALL),
        "elasticities": page_of({"kind": "sensitivity_bars"}, **SMALL),
    }


def assert_apart(boxes: list[tuple[str, Bbox]]) -> None:
    for (one, first), (other, second) in itertools.combinations(boxes, 2):
        overlap_x = min(first.x1, second.x1) - max(first.x0, second.x0)
        overlap_y = min(first.y1, second.y1) - max(first.y0, second.y0)
        assert overlap_x <= 0 or overlap_y <= 0, (one, other)


@pytest.mark.filterwarnings("error")  # the layout says so when it fails
@pytest.mark.parametrize("name", list(pages()))
def test_no_two_texts_touch_and_none_leaves_the_page(name: str, request: pytest.FixtureRequest) -> None:
    study: StudyData = request.getfixturevalue("two_axes" if name == "narrow" else name)
    with rc_context(dict(RC)):
        figure = compose_study(study, pages()[name])
        figure.draw_without_rendering()
        boxes = text_boxes(figure)
        size = np.array([figure.bbox.width, figure.bbox.height])
    assert len(boxes) > 8
    for text, box in boxes:
        assert box.x0 >= 0 and box.y0 >= 0, text
        assert np.all(box.max <= size), text
    assert_apart(boxes)
    for ax in figure.axes:
        legend = ax.get_legend()
        assert (
            legend is None
            or legend.get_window_extent().x0 > ax.get_window_extent().x0 + LETTER_POINTS / 72.0 * figure.dpi
        )


@pytest.mark.parametrize(("across", "at"), [(1, ["wind=-0.03"]), (2, []), (3, []), (4, [])])
def test_titles_of_maps_keep_off_the_maps_and_their_numbers(two_axes: StudyData, across: int, at: list[str]) -> None:
    page = page_of({"kind": "case_maps", "maps_across": across, "at": at}, columns=2, height_mm=90.0)
    with rc_context(dict(RC)):
        figure = compose_study(two_axes, page)
        figure.draw_without_rendering()
        frames = [inner for ax in figure.axes for inner in ax.child_axes]
        titles = [text for inner in frames for text in inner.findobj(Text) if "°C" in text.get_text()]
        boxes = [text.get_window_extent() for text in titles]
        texts = text_boxes(figure)
    assert len(boxes) == len(frames) == (3 if at else 5)
    for inner, box in itertools.product(frames, boxes):
        beside = box.x1 <= inner.bbox.x0 or inner.bbox.x1 <= box.x0
        assert beside or box.y0 >= inner.bbox.y1 or box.y1 <= inner.bbox.y0
    assert_apart(texts)


@pytest.mark.parametrize(("names", "slant"), [(["calm", "cold", "dry"], 0.0), (["a very long name indeed"] * 9, 40.0)])
def test_names_along_an_axis_are_slanted_where_they_would_touch(names: list[str], slant: float) -> None:
    """Slanted names touch where the distance across them, of their anchors, is less than the height of a line."""
    with rc_context(dict(RC)):
        figure = Figure(figsize=(3.5, 2.5), layout="constrained")
        ax = figure.add_subplot()
        set_names(ax, names)
        figure.draw_without_rendering()
        texts = ax.get_xticklabels()
        boxes = [(text.get_text(), text.get_window_extent()) for text in texts]
    assert {text.get_rotation() for text in texts} == {slant}
    if not slant:
        assert_apart(boxes)
    anchors = ax.transData.transform([(0.0, 0.0), (1.0, 0.0)])
    across = (anchors[1, 0] - anchors[0, 0]) * np.sin(np.radians(slant or 90.0))
    assert across > 7.0 / 72.0 * figure.dpi


@pytest.mark.parametrize("width", [1.8, 2.5, 3.5, 7.0])
def test_numbers_on_an_axis_keep_a_letter_apart(two_axes: StudyData, width: float) -> None:
    with rc_context(dict(RC)):
        figure = Figure(figsize=(width, 2.0), layout="constrained")
        ax = draw_study_panel(figure.add_subplot(), two_axes, page_of(TURNED).panels[0])
        figure.draw_without_rendering()
        labels = [text.get_window_extent() for text in ax.get_xticklabels() if text.get_text()]
    inside = [box for box in labels if ax.bbox.x0 <= 0.5 * (box.x0 + box.x1) <= ax.bbox.x1]
    numbers = [text.get_window_extent() for text in ax.texts]
    assert all(ax.bbox.contains(*corner) for box in numbers for corner in (box.min, box.max))
    assert len(inside) > 1
    for first, second in itertools.pairwise(inside):
        assert second.x0 - first.x1 > 0.5 * 7.0 / 72.0 * figure.dpi
