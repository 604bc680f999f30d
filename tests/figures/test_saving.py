"""Files: whole pages, their letters, their captions, and that they are the same each time."""

from __future__ import annotations

import itertools
import re
from pathlib import Path

import matplotlib as mpl
import pytest
import xarray as xr
from matplotlib import rc_context
from matplotlib.figure import Figure
from matplotlib.quiver import QuiverKey
from matplotlib.text import Text

from oceanbox.diagnostics import summarise
from oceanbox.figures import Page, draw, loads_page
from oceanbox.figures.caption import caption, run_name, sentence
from oceanbox.figures.drawing import compose
from oceanbox.figures.options import Approach
from oceanbox.figures.shortened import SHORTENED
from oceanbox.figures.style import RC
from oceanbox.output.files import write_dataset
from tests.synthetic import CONFIG, synthetic_means, synthetic_result

SMALL = "name: small\nwidth: single\ncolumns: 1\npanels: [{kind: thermocline_map}, {kind: exchange}]"
THREE = (
    "columns: 3\nletters: upper\nheight_mm: 130\npanels: [{kind: thermocline_map}, {kind: temperature_map},"
    " {kind: equatorial_section}, {kind: heat_budget, terms: [surface_heat_flux, heat_advection, heat_mixing,"
    " outcrop_heat, heat_storage]}, {kind: exchange}, {kind: approach}]"
)


@pytest.fixture(scope="module")
def result() -> xr.Dataset:
    return synthetic_result()


@pytest.fixture(scope="module")
def files(result: xr.Dataset, tmp_path_factory: pytest.TempPathFactory) -> dict[str, Path]:
    folder = tmp_path_factory.mktemp("figures")
    paths = draw(result, loads_page(SMALL), folder, ("pdf", "png", "svg"))
    return {path.suffix[1:]: path for path in paths}


def test_files_are_named_after_run_and_page_with_the_caption_last(files: dict[str, Path]) -> None:
    assert list(files) == ["pdf", "png", "svg", "txt"]
    assert {path.stem for path in files.values()} == {"synthetic_small"}
    assert sorted(path.name for path in files["pdf"].parent.iterdir()) == sorted(p.name for p in files.values())


def test_the_same_result_gives_the_same_bytes(result: xr.Dataset, files: dict[str, Path], tmp_path: Path) -> None:
    again = draw(result, loads_page(SMALL), tmp_path, ("pdf", "png", "svg"))
    for path in again:
        assert path.read_bytes() == files[path.suffix[1:]].read_bytes()


def test_fonts_in_a_pdf_are_true_type(files: dict[str, Path]) -> None:
    content = files["pdf"].read_bytes()
    assert b"/FontFile2" in content
    assert not re.search(rb"/Type3\b", content)


def test_text_in_an_svg_is_text(files: dict[str, Path]) -> None:
    content = files["svg"].read_text(encoding="utf-8")
    for text in ("Thermocline depth (m)", "Warm water (Sv)", "30°N"):
        assert f">{text}</text>" in content
    assert "<dc:date>" not in content


def test_a_png_has_300_dots_to_the_inch_at_the_width_of_the_column(files: dict[str, Path]) -> None:
    content = files["png"].read_bytes()
    pixels = int.from_bytes(content[16:20], "big")  # width in the IHDR chunk
    assert pixels == int(89.0 / 25.4 * 300)


def test_a_result_file_is_drawn_as_the_dataset_it_holds(
    result: xr.Dataset, files: dict[str, Path], tmp_path: Path
) -> None:
    path = tmp_path / "result.nc"
    write_dataset(result, path)
    drawn = draw(path, loads_page(SMALL), tmp_path / "figures", ("svg",))
    assert drawn[0].read_bytes() == files["svg"].read_bytes()


def test_an_unknown_format_is_refused_before_anything_is_written(result: xr.Dataset, tmp_path: Path) -> None:
    with pytest.raises(ValueError, match="one or more of pdf, svg, png are allowed"):
        draw(result, None, tmp_path / "none", ("pdf", "gif"))  # type: ignore[arg-type]
    assert not (tmp_path / "none").exists()


def test_drawing_leaves_the_settings_of_the_library_alone(result: xr.Dataset, tmp_path: Path) -> None:
    before = dict(mpl.rcParams)
    draw(result, loads_page(SMALL), tmp_path, ("png",))
    assert dict(mpl.rcParams) == before


@pytest.mark.parametrize("page", ["", "width: single\ncolumns: 1", THREE])
def test_no_two_texts_touch_and_none_leaves_the_page(result: xr.Dataset, page: str) -> None:
    with rc_context(dict(RC)):
        figure = compose(result, loads_page(page))
        figure.draw_without_rendering()
        boxes = text_boxes(figure)
        width, height = figure.bbox.width, figure.bbox.height
    assert len(boxes) > 60
    for text, box in boxes:
        assert box.x0 >= 0, text
        assert box.y0 >= 0, text
        assert box.x1 <= width, text
        assert box.y1 <= height, text
    for (one, first), (other, second) in itertools.combinations(boxes, 2):
        overlap_x = min(first.x1, second.x1) - max(first.x0, second.x0)
        overlap_y = min(first.y1, second.y1) - max(first.y0, second.y0)
        assert overlap_x <= 0 or overlap_y <= 0, (one, other)


def text_boxes(figure: Figure) -> list[tuple[str, mpl.transforms.Bbox]]:
    """Every text that is drawn, with its extent in dots."""
    found = []
    for item in figure.findobj(Text):
        if isinstance(item, Text) and item.get_visible() and item.get_text() and drawn(item, figure):
            found.append((item.get_text(), item.get_window_extent()))
    for key in figure.findobj(QuiverKey):
        if isinstance(key, QuiverKey):
            box = key.text.get_window_extent()
            arrow = 5.0 / 25.4 * figure.dpi  # the longest arrow of a key ends at its place, where the text begins
            tip = key.Q.axes.transAxes.transform((key.X, key.Y))[0]
            found.append((key.label, mpl.transforms.Bbox.from_extents(tip - arrow, box.y0, box.x1, box.y1)))
    return found


def drawn(text: Text, figure: Figure) -> bool:
    """Whether a text is drawn: ticks keep labels of unused places, and of axes that are switched off."""
    for ax in figure.findobj(mpl.axes.Axes):
        for axis in (ax.xaxis, ax.yaxis):
            if text in axis.findobj(Text):
                ticks = axis._update_ticks() if ax.axison else []  # the ticks that are inside the axes
                labels = [label for tick in ticks for label in (tick.label1, tick.label2) if label.get_visible()]
                return ax.axison and (text in labels or text is axis.label)
    return True


def test_panels_stand_side_by_side_in_the_columns_they_span(result: xr.Dataset) -> None:
    page = loads_page("columns: 3\npanels: [{kind: exchange, span_columns: 2}, {kind: exchange}]")
    with rc_context(dict(RC)):
        figure = compose(result, page)
        figure.draw_without_rendering()
    wide, narrow = (ax.get_position() for ax in figure.axes)
    assert wide.x1 < narrow.x0
    assert wide.width > 1.9 * narrow.width


def test_letters_are_in_reading_order(result: xr.Dataset) -> None:
    with rc_context(dict(RC)):
        figure = compose(result, Page())
    titles = [ax.get_title(loc="left") for ax in figure.axes]
    assert [title for title in titles if title] == list("abcdef")


def test_the_caption_states_run_window_identity_outcome_and_cautions(result: xr.Dataset) -> None:
    text = " ".join(caption(result, Page()).split())
    assert "Run synthetic, mean over model years 58 to 60." in text
    assert "0123456789abcdef" * 4 in text
    assert "How the run ended: equilibrium held for two windows in a row." in text
    assert "Not for forecasts of the real ocean" in text
    assert "2 K colder than the equatorial warm pool" in text
    assert [f"({letter})" in text for letter in "abcdef"] == [True] * 6


def test_the_caption_of_an_approach_says_that_it_was_shortened_and_only_then(result: xr.Dataset) -> None:
    """Time before the windows that are judged is then not what the ocean would take."""
    shortened = {"oceanbox_config": "equilibrium: {acceleration: {memory: 8}}", "oceanbox_command": "equilibrate"}
    assert SHORTENED in sentence(result.assign_attrs(shortened), Approach())
    assert SHORTENED not in sentence(result.assign_attrs(shortened | {"oceanbox_command": "evolve"}), Approach())
    plain = shortened | {"oceanbox_config": "equilibrium: {acceleration: null}"}
    assert SHORTENED not in sentence(result.assign_attrs(plain), Approach())


def test_the_caption_says_so_where_there_is_no_cold_tongue() -> None:
    means = synthetic_means()
    warm = summarise(means.assign(temperature=0 * means["temperature"] + 25.0))
    text = " ".join(caption(warm, Page()).split())
    assert "no cold tongue" in text
    assert "edge of the cold tongue" not in text


def test_what_a_file_does_not_state_is_said_to_be_missing(result: xr.Dataset) -> None:
    bare = result.drop_vars(["window", "window_bounds"])
    bare.attrs = {"oceanbox_config": CONFIG.replace("name: synthetic\n", "")}
    assert run_name(bare) == "result"
    text = " ".join(caption(bare, Page()).split())
    assert "Run result, mean over a window not stated in the file." in text
    assert "Configuration identity not stated in the file." in text
