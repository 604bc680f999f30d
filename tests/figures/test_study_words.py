"""What captions and lines of studies owe to a reader: signs, sources of steps, laws between the cases."""

from __future__ import annotations

from itertools import pairwise
from pathlib import Path

import netCDF4
import numpy as np
import pytest
from matplotlib import rc_context

from oceanbox.figures.study_options import CaseMaps, CaseSeries, SensitivityBars
from oceanbox.figures.study_panels.against import _smooth
from oceanbox.figures.study_panels.caption import study_caption, study_sentence
from oceanbox.figures.study_panels.cases import StudyData, open_study
from oceanbox.figures.study_panels.drawing import compose_study
from oceanbox.figures.study_panels.marks import look_of_place
from oceanbox.figures.style import RC
from oceanbox.names import lookup
from tests.figures.test_study_page import page_of
from tests.synthetic_study import MEASURE, axes_study

STEPS = "hastened steps and extrapolations"


def with_attributes(study: StudyData, **attributes: str) -> StudyData:
    """The study after writing global attributes into all its results."""
    for case in study.cases():
        with netCDF4.Dataset(case.result, "a") as file:
            file.setncatts(attributes)
    return study


@pytest.fixture
def study(tmp_path: Path) -> StudyData:
    return open_study(axes_study(tmp_path, 1), tmp_path)


def test_steps_of_an_accelerated_approach_are_explained_and_only_those(study: StudyData) -> None:
    accelerated = "equilibrium: {acceleration: {cycle_years: 0.5}}"
    assert STEPS not in study_sentence(study, CaseSeries())
    assert STEPS not in study_sentence(
        with_attributes(study, oceanbox_config="equilibrium: {acceleration: null}", oceanbox_command="equilibrate"),
        CaseSeries(),
    )
    assert STEPS not in study_sentence(
        with_attributes(study, oceanbox_config=accelerated, oceanbox_command="evolve"), CaseSeries()
    )
    assert STEPS in study_sentence(with_attributes(study, oceanbox_command="equilibrate"), CaseSeries())


def test_a_map_of_a_flux_says_which_way_is_positive(study: StudyData) -> None:
    assert "Positive: the warm layer gains." in study_sentence(study, CaseMaps(field="surface_heat_flux"))


def test_the_log_law_is_drawn_as_a_logarithm_between_the_cases() -> None:
    ratio = np.array([30.0, 2.0, np.nan, 500.0])
    fine, depth = _smooth(ratio, 50.0 + 30.0 * np.log(ratio))
    assert (fine[0], fine[-1]) == pytest.approx((2.0, 500.0))
    np.testing.assert_allclose(depth, 50.0 + 30.0 * np.log(fine), rtol=1e-12)


def test_the_error_bars_of_elasticities_are_explained(elasticities: StudyData) -> None:
    assert "a third of what halving it changes" in study_sentence(elasticities, SensitivityBars())
    text = study_caption(elasticities, page_of({"kind": "sensitivity_bars"}))
    assert " ln " in text and "D ln " not in text  # a differential, not the beginning of a sentence


def test_a_caption_tells_only_the_findings_about_what_its_page_shows(switch: StudyData) -> None:
    shown, *others = (MEASURE, "equatorial_tilt", "tropical_heat_gain")
    lines = [f"wind_slack: {lookup(name).long_name} from 1 to 2 m" for name in (shown, *others)]
    general = "the start was not in equilibrium: part of each adjustment is its own drift, see the control"
    study = StudyData(switch.dataset.assign_attrs(oceanbox_switch_findings="\n".join([*lines, general])), switch.folder)
    text = " ".join(study_caption(study, page_of({"kind": "switches", "scalar": shown})).split())
    assert f"Wind slack: {lookup(shown).long_name} from 1 to 2 m." in text
    assert "The start was not in equilibrium" in text
    assert not [name for name in others if f"{lookup(name).long_name} from 1 to 2 m" in text]


@pytest.mark.parametrize("width", [60.0, 89.0, 183.0])
def test_names_of_the_terms_of_a_budget_keep_apart(two_axes: StudyData, width: float) -> None:
    """Level names by their boxes; slanted ones as parallel lines, a line's height (7 points) apart across them."""
    terms = [
        "surface_heat_flux",
        "heat_flux_prescribed",
        "heat_advection",
        "heat_mixing",
        "outcrop_heat",
        "heat_storage",
    ]
    page = page_of({"kind": "budget_bars", "terms": terms}, columns=1, width_mm=width)
    with rc_context(dict(RC)):
        figure = compose_study(two_axes, page)
        figure.draw_without_rendering()
        (inner,) = figure.axes[0].child_axes
        names = inner.get_xticklabels()
        boxes = [name.get_window_extent() for name in names]
        slanted = {name.get_rotation() for name in names}
        anchors = inner.transData.transform([(0.0, 0.0), (1.0, 0.0)])
    if slanted == {0.0}:
        assert all(one.x1 < other.x0 for one, other in pairwise(boxes))
    else:
        assert (anchors[1, 0] - anchors[0, 0]) * np.sin(np.radians(slanted.pop())) > 7.0 / 72.0 * figure.dpi


def test_lines_for_names_differ_in_grey_print_and_lines_for_numbers_in_colour_alone() -> None:
    named = [look_of_place(["calm", "stormy"], index) for index in (0, 1)]
    assert len({look.marker for look in named}) == len({look.linestyle for look in named}) == 2
    assert [look.label for look in named] == ["calm", "stormy"]
    numbered = [look_of_place([2.0, 6.0], index) for index in (0, 1)]
    assert len({look.color for look in numbered}) == 2
    assert {(look.linestyle, look.label) for look in numbered} == {("solid", "")}
